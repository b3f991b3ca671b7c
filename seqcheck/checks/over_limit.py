"""``over-limit``: a cycle, or the time from one condition to another, can be longer (or shorter) than a rule allows."""

from __future__ import annotations

from bisect import bisect_left
from collections.abc import Iterator

from seqcheck.checks.check import Check, Obligation, Wording
from seqcheck.checks.spells_of import whole_spells
from seqcheck.checks.study import Study
from seqcheck.checks.times import cycles_in
from seqcheck.checks.wording import in_time
from seqcheck.engine.conditions import alternatives_of
from seqcheck.machine.findings import Severity
from seqcheck.machine.rules import CycleLimit, PathLimit


def _obligations(study: Study) -> Iterator[Obligation]:
    for rule in study.machine.rules:
        match rule:
            case CycleLimit(sequence, greatest):
                over = f"a cycle of {sequence} can take {{by}} longer than {in_time(greatest)}"
                for begin, end in cycles_in(study, sequence):
                    yield Obligation(rule.text, None, rule.place, end, begin, Wording(over), -greatest, diverts=False)
            case PathLimit():
                yield from _between(study, rule)
            case _:
                pass


def _between(study: Study, rule: PathLimit) -> Iterator[Obligation]:
    """From each time that the one condition comes to hold to the next time that the other does."""
    starts = [spell.begin for spell in whole_spells(study, alternatives_of(rule.start))]
    ends = [spell.begin for spell in whole_spells(study, alternatives_of(rule.end))]
    times = [study.time(event) for event in ends]
    over = Wording(f"`{rule.text}` can be exceeded by {{by}}")
    under = Wording(f"`{rule.text}` can be undercut by {{by}}")
    for start in starts:
        at = bisect_left(times, study.time(start))
        for end in ends[at : at + 1]:
            yield Obligation(rule.text, None, rule.place, end, start, over, -rule.greatest, diverts=False)
            if rule.least is not None:
                yield Obligation(rule.text, None, rule.place, start, end, under, rule.least, diverts=False)


CHECK = Check("over-limit", Severity.ERROR, "a cycle or a way takes longer, or shorter, than it may", _obligations)
