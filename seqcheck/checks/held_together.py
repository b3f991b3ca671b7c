"""When the parts of a condition held together in a play, or would if one of them came a little earlier or later."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import replace
from itertools import pairwise, product

from seqcheck.checks.study import Study
from seqcheck.engine.bounds import greatest_separation
from seqcheck.engine.conditions import Alternative, Alternatives
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


def without_breaks(study: Study, alternatives: Alternatives) -> list[tuple[Holds, bool]]:
    """The spells of a whole condition, and those that come of it where a break between two may be none, or be for an
    instant of no length. Whether that is so in every run, too."""
    spells = spells_of_condition(study.trace, alternatives)
    found = [(one, True) for one in spells]
    since, always = None, True
    for one, following in pairwise(spells):
        since = one if since is None else since
        if one.end is not None and _may_join(study, one.end, following):
            always = always and greatest_separation(study.trace.graph, one.end, following.begin) <= 0
            found.append((replace(since, end=following.end, ended_by_read=following.ended_by_read), always))
        else:
            since, always = None, True
    return found


def _may_join(study: Study, end: int, following: Holds) -> bool:
    """What begins the one spell may come at the instant at which the other ends; or before, if that makes them one."""
    latest = greatest_separation(study.trace.graph, following.begin, end)
    return latest == 0 or (latest > 0 and following.goes_on)


def begun_or_ended_otherwise(study: Study, alternatives: Alternatives) -> Iterator[tuple[Holds, bool]]:
    """The same, and each also begun by another alternative that comes to hold within it, or ended by one that ceases
    within it: in other runs that may be the first, or the last."""
    parts = [part for one in alternatives for part in spells_of_condition(study.trace, (one,))]
    for spell, always in without_breaks(study, alternatives):
        yield spell, always
        if spell.end is None or len(alternatives) == 1:
            continue
        within = range(study.time(spell.begin) + 1, study.time(spell.end))
        for part in parts:
            if study.time(part.begin) in within:
                yield replace(spell, begin=part.begin), always
            if part.end is not None and study.time(part.end) in within:
                yield replace(spell, end=part.end), always
