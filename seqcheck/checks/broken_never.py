"""``broken-never``: what a rule forbids can be, for longer than it tolerates.

A condition of several parts holds as long as the latest of them to come has come and the first to go has not gone: it
is kept where, for some two of its parts, the one goes before the other has come, or no longer after than is tolerated.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from seqcheck.checks.check import Check, Obligation, Sight, Wording
from seqcheck.checks.crossings import Spell, crossings
from seqcheck.checks.narrate import narrate_typical
from seqcheck.checks.spells_of import Holds, spells_of, together, whole_spells, without_breaks
from seqcheck.checks.study import Study
from seqcheck.checks.wording import UNLIMITED, in_time
from seqcheck.engine.conditions import alternatives_of
from seqcheck.machine.conditions import TermKind, terms_of
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
        if len(alternatives) > 1 and rule.tolerated:
            for spell in without_breaks(study, whole_spells(study, alternatives)):
                yield from _obligation(rule, (spell,))


def _obligation(rule: Never, spells: tuple[Holds, ...]) -> Iterator[Obligation]:
    pairs = [(one.end, other.begin) for one in spells for other in spells if one.end is not None]
    if pairs:
        (first, second), *others = pairs
        yield Obligation(
            rule.text,
            None,
            rule.place,
            first,
            second,
            _wording(rule),
            -rule.tolerated,
            others=tuple(others),
            diverts=False,
        )


def _wording(rule: Never) -> Wording:
    why = f" ({rule.why})" if rule.why else ""
    over = f" longer than the {in_time(rule.tolerated)} tolerated" if rule.tolerated else ""
    held = f"`{rule.text}` can be broken{why}"
    return Wording(f"{held}, for up to {{by}}{over}", timeless=held)


def _for_good(study: Study) -> Iterator[Sight]:
    """Where the machine has come to a stand and it is so still, or goes round and it is so all the time."""
    trace, around = study.trace, study.settlement.path.round
    if trace.finished:
        at = last = max(trace.happened, key=study.time)
    elif around is not None:
        at, last = (study.settlement.path.passages[number].at for number in around)
    else:
        return
    for rule in study.machine.rules:
        if isinstance(rule, Never):
            for spell in whole_spells(study, alternatives_of(rule.condition)):
                if spell.end is None and study.time(spell.begin) <= study.time(at):
                    run = narrate_typical(study, spell.begin, last)
                    # A stroke that is turned before its end may come to it at other times.
                    certain = trace.finished or not _asks_of_cylinders(rule)
                    message = f"`{rule.text}` is broken for good" if certain else _wording(rule).broken(UNLIMITED)
                    yield Sight(rule.text, None, rule.place, message, run, certain=certain, at=at)


def _asks_of_cylinders(rule: Never) -> bool:
    return any(term.kind is TermKind.CYLINDER for term in terms_of(rule.condition))


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
        longest = found[rule.text].greatest()
        if longest is None:
            yield Sight(rule.text, None, rule.place, _wording(rule).broken(UNLIMITED), certain=False)
        elif longest > max(0, rule.tolerated):
            margin = rule.tolerated - longest
            message = _wording(rule).broken(in_time(-margin))
            yield Sight(rule.text, None, rule.place, message, certain=False, margin_us=margin)


def _spells(study: Study, rule: Never) -> Iterator[Spell]:
    alternatives = alternatives_of(rule.condition)
    held = whole_spells(study, alternatives)
    if [len(one) for one in alternatives] == [1]:
        held = spells_of(study, alternatives[0][0])
    for one in held:
        yield Spell(one.begin, one.end)


CHECK = Check(
    "broken-never",
    Severity.ERROR,
    "what a rule forbids can be",
    _obligations,
    _for_good,
    omissions=_over_several_runs,
)
