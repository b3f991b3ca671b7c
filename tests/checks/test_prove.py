"""What runs show and what sums over several runs come to, put together: the worse of the two is told."""

from __future__ import annotations

import pytest

from seqcheck.checks.prove import Broken, _at_least_as_bad
from seqcheck.machine.findings import Finding, Severity
from seqcheck.machine.places import Place


def finding(message: str, margin_us: int | None) -> Finding:
    return Finding(
        kind="over-limit",
        severity=Severity.ERROR,
        certain=False,
        subject="limit cycle main 1 s",
        step=None,
        place=Place("a.steps", 1, 1, 1, 1),
        message=message,
        margin_us=margin_us,
        replayed=None,
        run=(),
        mend=None,
    )


@pytest.mark.parametrize(
    ("shown", "summed", "told"),
    [
        (-10, -30, "summed"),
        (-30, -10, "shown"),
        (-10, -10, "shown"),
        # What nothing limits is longer than all else
        (None, -10, "shown"),
        (-10, None, "summed"),
        # What is merely thin in one play is broken over several
        (10, -10, "summed"),
        (10, None, "summed"),
    ],
)
def test_the_worse_of_what_a_run_shows_and_what_several_add_up_to(
    shown: int | None, summed: int | None, told: str
) -> None:
    one = _at_least_as_bad(Broken(finding("shown", shown), None), finding("summed", summed))
    assert one.finding.message == told
    assert one.finding.margin_us == (summed if told == "summed" else shown)
