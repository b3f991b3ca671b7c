"""Texts in which two things may come in either order, and only one of the two is harmless.

The typical run shows the harmless order; times within the tolerances show the other one. The head of each text gives
both orders in figures. Whatever a finding says of it: such a text is not clean.
"""

from __future__ import annotations

from pathlib import Path

import pytest

from seqcheck.pipeline import examine

CASES = sorted((Path(__file__).parent / "order").glob("*.steps"))


@pytest.mark.parametrize("file", CASES, ids=lambda file: file.stem)
def test_an_open_order_is_found(file: Path) -> None:
    report = examine(str(file))
    assert not report.problems
    assert report.verdict == "findings"


@pytest.mark.parametrize(
    ("name", "kind", "margin_us"),
    [
        ("pulse_then_reset", "cut-stroke", -27_500),
        ("pulse_then_set", "short-pulse", -44_500),
        ("coil_held_twice", "opposed-coils", -41_500),
        ("command_gone_again", "missed-signal", -11_000),
        ("step_gone_again", "missed-signal", -11_000),
        ("command_not_yet_there", "missed-signal", -8_000),
    ],
)
def test_the_other_order_is_bounded_too(name: str, kind: str, margin_us: int) -> None:
    """The sums stand in the head of each text. Of ``pulse_then_set``: the valve is back up to 1 + 12 + 40 after the
    pulse has ended, and the coil is energized again 8.5 after the step that comes at once: 8.5 - 53."""
    report = examine(str(Path(__file__).parent / "order" / f"{name}.steps"))
    assert margin_us in {finding.margin_us for finding in report.findings if finding.kind == kind}
