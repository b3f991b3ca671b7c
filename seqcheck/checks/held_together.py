"""When the parts of a condition held together in a play, or would if one of them came a little earlier or later."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from itertools import pairwise, product

from seqcheck.checks.study import Study
from seqcheck.engine.bounds import greatest_separation
from seqcheck.engine.conditions import Alternative
from seqcheck.engine.held import Holds, spells_of_condition


def together(study: Study, alternative: Alternative) -> Iterator[tuple[Holds, ...]]:
    """Spells of every literal that hold together, or would if one of them came a little earlier or later: each spell
    with those of the others that hold as it begins, and their neighbours."""
    spells = [spells_of_condition(study.trace, ((literal,),)) for literal in alternative]
    given = set()
    for number, own in enumerate(spells):
        for one in own:
            near = [[one] if other == number else _near(study, spells[other], one) for other in range(len(spells))]
            for together in product(*near):
                if together not in given:
                    given.add(together)
                    yield together


def _near(study: Study, spells: Sequence[Holds], one: Holds) -> Sequence[Holds]:
    """The last spell that had begun as this one begins, and the next."""
    begun = [other for other in spells if study.time(other.begin) <= study.time(one.begin)]
    return spells[max(0, len(begun) - 1) : len(begun) + 1]


def without_breaks(study: Study, spells: Sequence[Holds]) -> list[Holds]:
    """The spells, and those that come of it where a break between two can be none: what begins the next one comes
    before what ends the one."""
    found = list(spells)
    begin = None
    for one, following in pairwise(spells):
        begin = one.begin if begin is None else begin
        if one.end is not None and greatest_separation(study.trace.graph, following.begin, one.end) > 0:
            found.append(Holds(begin, following.end))
        else:
            begin = None
    return found
