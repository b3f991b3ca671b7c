"""From obligations to findings: bound them all, keep the tightest of each, show the run that breaks it.

Takes a study and the catalogue of checks; gives findings, margins and the handover table. Obligations that the text
states once are met in every cycle; the tightest stands for them.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace

from seqcheck.checks.check import Check, Obligation
from seqcheck.checks.narrate import narrate
from seqcheck.checks.study import Study
from seqcheck.checks.wording import in_time
from seqcheck.engine.bounds import Rows, greatest_separation, greatest_separations, is_open, longest_least_chain
from seqcheck.engine.witness import Witness, replays, witness
from seqcheck.machine.findings import Finding, Margin, Severity
from seqcheck.machine.places import Place


@dataclass(frozen=True, slots=True)
class Broken:
    """A finding with the run behind it; None for a finding that needs no run."""

    finding: Finding
    witness: Witness | None


@dataclass(frozen=True, slots=True)
class Proof:
    broken: tuple[Broken, ...]
    margins: tuple[Margin, ...]


_Key = tuple[str, str, str | None, Place]


def prove(studies: Sequence[Study], checks: Sequence[Check]) -> Proof:
    """Prove every way in which the machine was played, and put the results together."""
    proofs = [_prove_one(study, checks) for study in studies]
    by_key: dict[_Key, list[Broken]] = {}
    for proof in proofs:
        for one in proof.broken:
            by_key.setdefault((one.finding.kind, one.finding.subject, one.finding.step, one.finding.place), []).append(
                one
            )
    broken = [_one_of(found, len(proofs)) for found in by_key.values() if _stands(found, len(proofs))]
    margins: dict[_Key, Margin] = {}
    for proof in proofs:
        for margin in proof.margins:
            key = (margin.kind, margin.subject, margin.step, margin.place)
            margins[key] = min(margins.get(key, margin), margin, key=_by_margin)
    return Proof(_sorted(broken), tuple(sorted(margins.values(), key=_by_margin)))


def _stands(found: Sequence[Broken], worlds: int) -> bool:
    """What a sequence leaves out, it must leave out in every way that it is played."""
    return found[0].finding.severity is Severity.ERROR or found[0].witness is not None or len(found) == worlds


def _one_of(found: Sequence[Broken], worlds: int) -> Broken:
    """The finding whose run was replayed, and that by most; certain only where every way shows it for certain."""
    best = min(found, key=lambda one: (one.finding.replayed is False, one.finding.margin_us or 0))
    certain = len(found) == worlds and all(one.finding.certain for one in found)
    return Broken(replace(best.finding, certain=certain), best.witness)


def _prove_one(study: Study, checks: Sequence[Check]) -> Proof:
    stated = [(check, obligation) for check in checks for obligation in check.obligations(study)]
    rows = greatest_separations(
        study.trace.graph, (pair for _, one in stated for pair in ((one.second, one.first), (one.first, one.second)))
    )
    tightest: dict[_Key, tuple[Check, Obligation, int]] = {}
    for check, one in stated:
        margin = -rows[one.second, one.first] - one.least
        key = (check.kind, one.subject, one.step, one.place)
        if key not in tightest or margin < tightest[key][2]:
            tightest[key] = (check, one, margin)
    broken = [_broken(study, check, one, margin, rows) for check, one, margin in tightest.values() if margin < 0]
    seen = [finding for check in checks for finding in check.findings(study)]
    if any(_in_played_run_only(study, one, rows) for _, one in stated):
        seen = [one if one.severity is Severity.NOTE else replace(one, certain=False) for one in seen]
    broken += [Broken(finding, None) for finding in seen]
    margins = [
        Margin(check.kind, one.subject, one.step, one.place, _closed(margin))
        for check, one, margin in tightest.values()
    ]
    return Proof(tuple(broken), tuple(margins))


def _broken(study: Study, check: Check, one: Obligation, margin: int, rows: Rows) -> Broken:
    run = witness(study.trace, one.first, one.second)
    shown = _closed(margin)
    by = "an unlimited time" if shown is None else in_time(-shown)
    mend = one.wording.mend
    finding = Finding(
        kind=check.kind,
        severity=check.severity,
        certain=rows[one.first, one.second] < one.least,
        subject=one.subject,
        step=one.step,
        place=one.place,
        message=one.wording.message.replace("{by}", by),
        margin_us=shown,
        replayed=replays(study.machine, study.settlement, run, one.first, one.second),
        run=narrate(study, run, one.first, one.second),
        mend=None if mend is None or shown is None else mend(_needed(study, one, -shown)),
    )
    return Broken(finding, run)


def _needed(study: Study, one: Obligation, by: int) -> int:
    """How much longer the lever must take: what it alone gives may be less than what the margin says, where something
    else keeps the second event back so far."""
    if one.lever is None:
        return by
    graph = study.trace.graph
    behind = greatest_separation(graph, one.lever, one.first)
    return max(by, behind - longest_least_chain(graph, one.lever, one.second) + one.least)


def _in_played_run_only(study: Study, one: Obligation, rows: Rows) -> bool:
    """Whether the played run breaks an obligation that others keep: what it then comes to is not certain either."""
    if study.time(one.first) + one.least <= study.time(one.second):
        return False
    return rows[one.first, one.second] >= one.least


def _closed(margin: int) -> int | None:
    return None if is_open(-margin) else margin


def _sorted(broken: Iterable[Broken]) -> tuple[Broken, ...]:
    """Certain ones first, errors before warnings, causes before the standstill that they may lead to, then by place;
    notes behind them all."""
    severities = list(Severity)
    return tuple(
        sorted(
            broken,
            key=lambda one: (
                one.finding.severity is Severity.NOTE,
                not one.finding.certain,
                severities.index(one.finding.severity),
                one.witness is None,
                one.finding.place,
                one.finding.kind,
                one.finding.subject,
            ),
        )
    )


def _by_margin(margin: Margin) -> tuple[object, ...]:
    return (margin.margin_us is not None, margin.margin_us or 0, margin.place, margin.kind, margin.subject)
