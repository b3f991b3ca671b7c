"""``over-limit``: a cycle, or the time from one condition to another, can be longer (or shorter) than a rule allows."""

from __future__ import annotations

from bisect import bisect_left
from collections.abc import Iterator, Sequence

from seqcheck.checks.check import Check, Obligation, Sight, Wording
from seqcheck.checks.crossings import Spell, crossings
from seqcheck.checks.narrate import narrate_typical
from seqcheck.checks.spells_of import whole_spells
from seqcheck.checks.study import Study
from seqcheck.checks.times import cycle_spells
from seqcheck.checks.wording import in_time
from seqcheck.engine.conditions import alternatives_of
from seqcheck.machine.findings import Severity
from seqcheck.machine.rules import CycleLimit, Never, PathLimit, Rule


def _obligations(study: Study) -> Iterator[Obligation]:
    for rule in study.machine.rules:
        for spell in _spells(study, rule):
            if spell.end is None or isinstance(rule, Never):
                continue
            over = Wording(_over(rule))
            yield Obligation(rule.text, None, rule.place, spell.end, spell.begin, over, -rule.greatest, diverts=False)
            if isinstance(rule, PathLimit) and rule.least is not None:
                under = Wording(f"`{rule.text}` can be undercut by {{by}}")
                yield Obligation(rule.text, None, rule.place, spell.begin, spell.end, under, rule.least, diverts=False)


def _over(rule: CycleLimit | PathLimit) -> str:
    if isinstance(rule, CycleLimit):
        return f"a cycle of {rule.sequence} can take {{by}} longer than {in_time(rule.greatest)}"
    return f"`{rule.text}` can be exceeded by {{by}}"


def _spells(study: Study, rule: Rule) -> list[Spell]:
    """What the rule limits, the last one of a play, which it has not come to the end of, included."""
    match rule:
        case CycleLimit(sequence):
            return cycle_spells(study, sequence)
        case PathLimit():
            return _from_one_to_the_other(study, rule)
        case _:
            return []


def _from_one_to_the_other(study: Study, rule: PathLimit) -> list[Spell]:
    """From each time that the one condition comes to hold to the next time that the other does."""
    starts = [spell.begin for spell in whole_spells(study, alternatives_of(rule.start))]
    ends = [spell.begin for spell in whole_spells(study, alternatives_of(rule.end))]
    times = [study.time(event) for event in ends]
    spells = []
    for start in starts:
        at = bisect_left(times, study.time(start))
        spells.append(Spell(start, ends[at] if at < len(ends) else None))
    return spells


def _never_comes(study: Study) -> Iterator[Sight]:
    """The one condition comes to hold and the other never does again: the play has ended, or goes round without."""
    trace, around = study.trace, study.settlement.round
    if trace.finished:
        last = max(trace.happened, key=study.time)
        until = study.time(last)
    elif around is not None:
        until, last = (
            study.time(study.settlement.path.passages[around[0]].at),
            study.settlement.path.passages[around[1]].at,
        )
    else:
        return
    for rule in study.machine.rules:
        if isinstance(rule, PathLimit):
            for spell in _spells(study, rule):
                if spell.end is None and study.time(spell.begin) <= until:
                    run = narrate_typical(study, spell.begin, last)
                    message = f"`{rule.text}` can be exceeded: once the one has come, the other may never come"
                    yield Sight(rule.text, None, rule.place, message, run, at=last)
                    break


def _over_several_runs(studies: Sequence[Study]) -> Iterator[Sight]:
    """Where no play shows all of it in one: added up along the ways through the state graph."""
    rules = [rule for rule in studies[0].machine.rules if isinstance(rule, CycleLimit | PathLimit)]
    plays = [(study.settlement, {rule.text: _spells(study, rule) for rule in rules}) for study in studies]
    found = crossings(plays, settled=False)
    for rule in rules:
        ways = found.get(rule.text)
        if ways is None or ways.least() is None:
            continue
        greatest = ways.greatest()
        if greatest is not None and greatest > rule.greatest:
            message = _over(rule).replace("{by}", in_time(greatest - rule.greatest))
            margin = rule.greatest - greatest
            yield Sight(rule.text, None, rule.place, message, certain=False, margin_us=margin)


CHECK = Check(
    "over-limit",
    Severity.ERROR,
    "a cycle or a way takes longer, or shorter, than it may",
    _obligations,
    _never_comes,
    omissions=_over_several_runs,
)
