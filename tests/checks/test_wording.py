"""Times as findings advise them: to whole milliseconds, to the side that is safe."""

from __future__ import annotations

import pytest

from seqcheck.checks.wording import in_time, round_down, round_up


@pytest.mark.parametrize(
    ("time_us", "exact", "up", "down"),
    [
        (743_000, "743 ms", "743 ms", "743 ms"),
        (743_001, "743.001 ms", "744 ms", "743 ms"),
        (743_999, "743.999 ms", "744 ms", "743 ms"),
        (1_999, "1.999 ms", "2 ms", "1 ms"),
        (1_000, "1 ms", "1 ms", "1 ms"),
        (999, "999 us", "1 ms", "999 us"),
        (1, "1 us", "1 ms", "1 us"),
    ],
)
def test_rounded_to_the_safe_side(time_us: int, exact: str, up: str, down: str) -> None:
    assert (in_time(time_us), round_up(time_us), round_down(time_us)) == (exact, up, down)
