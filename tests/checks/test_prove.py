"""What runs show and what sums over several runs come to, put together: the worse of the two is told. Of what several
runs show, the worst that comes about is told, and not all of them are played again."""

from __future__ import annotations

from dataclasses import replace

import pytest

from seqcheck.checks.certainty import Ways
from seqcheck.checks.prove import _MOST_REPLAYED, Broken, _at_least_as_bad, _one_of, _Seen
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


@pytest.mark.parametrize(
    ("comes_about", "told", "played"),
    [
        (0, -100, 1),
        (3, -97, 4),
        (_MOST_REPLAYED - 1, -100 + _MOST_REPLAYED - 1, _MOST_REPLAYED),
        (50, -100, _MOST_REPLAYED),
    ],
)
def test_the_worst_that_comes_about_is_looked_for_but_not_for_ever(comes_about: int, told: int, played: int) -> None:
    again: list[int] = []

    def seen(number: int) -> _Seen:
        def make() -> Broken:
            again.append(number)
            return Broken(replace(finding("shown", number - 100), replayed=number == comes_about), None)

        return _Seen(("over-limit", "", None, Place("a.steps", 1, 1, 1, 1)), number - 100, False, make)

    best = _one_of([seen(number) for number in reversed(range(60))], Ways([]))
    assert (best.finding.margin_us, len(again)) == (told, played)
