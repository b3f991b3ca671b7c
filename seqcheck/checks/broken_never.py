"""``broken-never``: what a rule forbids can be, for longer than it tolerates.

A condition of several parts holds as long as the latest of them to come has come and the first to go has not gone: it
is kept where, for some two of its parts, the one goes before the other has come, or no longer after than is tolerated.
"""

from __future__ import annotations

from collections.abc import Iterator

from seqcheck.checks.check import Check, Obligation, Sight, Wording
from seqcheck.checks.narrate import narrate_typical
from seqcheck.checks.spells_of import Holds, together, whole_spells, without_breaks
from seqcheck.checks.study import Study
from seqcheck.checks.wording import in_time
from seqcheck.engine.conditions import alternatives_of
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
    """Where the machine has come to a stand and it is so still."""
    if not study.trace.finished:
        return
    last = max(study.trace.happened, key=study.time)
    for rule in study.machine.rules:
        if isinstance(rule, Never):
            for spell in whole_spells(study, alternatives_of(rule.condition)):
                if spell.end is None:
                    run = narrate_typical(study, spell.begin, last)
                    yield Sight(rule.text, None, rule.place, f"`{rule.text}` is broken for good", run, at=last)


CHECK = Check("broken-never", Severity.ERROR, "what a rule forbids can be", _obligations, _for_good)
