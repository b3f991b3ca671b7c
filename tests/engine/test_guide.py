"""What is under way at a state, and whether how long it takes from there hangs on what came before."""

from __future__ import annotations

import pytest

from seqcheck.engine.graph import OPEN
from seqcheck.engine.guide import UnderWay


@pytest.mark.parametrize(
    ("latest", "before", "loose"),
    [
        (5, -3, True),  # 3 to 5 later than the state, as times have gone before it
        (5, -5, False),  # always as much later
        (0, 4, False),  # never later
        (OPEN, 0, False),  # at any time: somebody outside knows nothing of what has been
        (OPEN, -3, True),  # at any time, but no sooner than that
    ],
)
def test_what_is_loose(latest: int, before: int, loose: bool) -> None:
    assert UnderWay(False, "seen", "B1", "on", latest, before).loose is loose
