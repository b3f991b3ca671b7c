"""``broken-never``: what a rule forbids can be, for longer than it tolerates.

A condition of several parts holds as long as the latest of them to come has come and the first to go has not gone: it
is kept where, for some two of its parts, the one goes before the other has come, or no longer after than is tolerated.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from functools import partial

from seqcheck.checks.check import Check, Obligation, Sight, Wording
from seqcheck.checks.comings import all_so_by, holds_at_rest, passages_before
from seqcheck.checks.crossings import Spell, crossings
from seqcheck.checks.held_together import begun_or_ended_otherwise, together, without_breaks
from seqcheck.checks.narrate import narrate_typical
from seqcheck.checks.study import Study
from seqcheck.checks.wording import OR_LESS, UNLIMITED, in_time
from seqcheck.engine.conditions import Alternatives, alternatives_of, literals_of
from seqcheck.engine.held import Holds
from seqcheck.machine.findings import Severity
from seqcheck.machine.rules import Never


def _obligations(study: Study) -> Iterator[Obligation]:
    for rule in study.machine.rules:
        if not isinstance(rule, Never):
            continue
        alternatives = alternatives_of(rule.condition)
        for one in alternatives:
            for spells in together(study, one):
                yield from _obligation(rule, spells)
        if [len(one) > 1 for one in alternatives] != [True]:  # Parts that hold together are bounded one by one above.
            for spell, always in begun_or_ended_otherwise(study, alternatives):
                yield from _obligation(rule, (spell,), always)


def _obligation(rule: Never, spells: tuple[Holds, ...], always: bool = True) -> Iterator[Obligation]:
    pairs = [(one.end, other.begin) for one in spells for other in spells if one.end is not None]
    if pairs:
        (first, second), *others = pairs
        yield Obligation(
            rule.text,
            None,
            rule.place,
            first,
            second,
            partial(_wording, rule),
            -rule.tolerated,
            others=tuple(others),
            diverts=False,
            always=always,
        )


def _wording(rule: Never) -> Wording:
    why = f" ({rule.why})" if rule.why else ""
    over = f" longer than the {in_time(rule.tolerated)} tolerated" if rule.tolerated else ""
    held = f"`{rule.text}` can be broken{why}"
    return Wording(f"{held}, for up to {{by}}{over}", timeless=held)


def _for_good(study: Study) -> Iterator[Sight]:
    """Where the machine has come to a stand and it is so still, or goes round and it is so all the time."""
    if study.for_ever is None:
        return
    at, last = study.for_ever
    for rule in study.machine.rules:
        if not isinstance(rule, Never):
            continue
        alternatives = alternatives_of(rule.condition)
        for spell, _ in without_breaks(study, alternatives):
            if _lasts(study, spell, at, last):
                certain = not _changes_since(study, alternatives, at)
                message = f"`{rule.text}` is broken for good" if certain else _wording(rule).broken(UNLIMITED)
                run = narrate_typical(study, spell.begin, last)
                yield Sight(rule.text, None, rule.place, message, run, certain=certain, at=at)


def _lasts(study: Study, spell: Holds, begin: int, end: int) -> bool:
    """All the time between two events, the first one included."""
    if spell.end is None:
        return study.time(spell.begin) <= study.time(begin)
    return study.time(spell.begin) < study.time(begin) < study.time(end) <= study.time(spell.end)


def _changes_since(study: Study, alternatives: Alternatives, event: int) -> bool:
    """Whether what the rule looks at changes all the same: at other times it may be otherwise in between."""
    return any(
        study.time(change.event) > study.time(event)
        for literal in literals_of(alternatives)
        for change in study.trace.changes.get(literal.aspect, ())
    )


def _over_several_runs(studies: Sequence[Study]) -> Iterator[Sight]:
    """Where no play shows all of it in one: added up along the ways through the state graph."""
    rules = [rule for rule in studies[0].machine.rules if isinstance(rule, Never)]
    found = crossings(
        [(study.settlement, {rule.text: list(_spells(study, rule)) for rule in rules}) for study in studies],
        settled=False,
    )
    for rule in rules:
        if rule.text not in found:
            continue
        for part in found[rule.text].parts.values():
            part.within = None  # What lies in one play its own bounds tell best.
        longest = found[rule.text].longest()
        if longest is None and found[rule.text].unlimited:
            yield Sight(rule.text, None, rule.place, _wording(rule).broken(UNLIMITED), certain=False)
        elif longest is not None and longest.time > max(0, rule.tolerated):
            margin = rule.tolerated - longest.time
            message = _wording(rule).broken(in_time(-margin))
            message = message if longest.exact else f"{message}, {OR_LESS}"
            yield Sight(rule.text, None, rule.place, message, certain=False, margin_us=margin)


def _spells(study: Study, rule: Never) -> Iterator[Spell]:
    alternatives = alternatives_of(rule.condition)
    for one, _ in without_breaks(study, alternatives):
        last = None if one.end is None else passages_before(study, one.end, one.ended_by_read)
        at_rest = one.begin == 0 and holds_at_rest(study, alternatives)
        # What is so as the machine stands was so before its first state, at which all ways begin.
        first = 0 if at_rest else passages_before(study, one.begin, one.begun_by_read) - 1
        begin = one.begin if at_rest else all_so_by(study, alternatives, one.begin)
        yield Spell(begin, one.end, first, last)


CHECK = Check(
    "broken-never",
    Severity.ERROR,
    "what a rule forbids can be",
    _obligations,
    _for_good,
    omissions=_over_several_runs,
)
