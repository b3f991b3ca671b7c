"""From obligations to findings: bound them all, keep the tightest of each, show the run that breaks it.

Takes studies, the catalogue of checks and the reserve that every margin must leave; gives findings, those last that
the text accepts, and margins. Obligations that the text states once are met in every cycle; the tightest stands for
them.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace

from seqcheck.checks.check import Check, Obligation
from seqcheck.checks.narrate import narrate
from seqcheck.checks.stale_accept import stale_accepts, with_reasons
from seqcheck.checks.study import Study
from seqcheck.checks.wording import in_time
from seqcheck.engine.bounds import (
    Rows,
    both_ways,
    closed,
    greatest_separation,
    greatest_separations,
    longest_least_chain,
)
from seqcheck.engine.settle import Settlement
from seqcheck.engine.timeline import given
from seqcheck.engine.witness import Witness, replay, witness
from seqcheck.machine.findings import Finding, Margin, Severity
from seqcheck.machine.model import Machine
from seqcheck.machine.places import Place


@dataclass(frozen=True, slots=True)
class Broken:
    """A finding with the run behind it and the way of playing to which that run belongs; None for a finding that needs
    no run."""

    finding: Finding
    witness: Witness | None
    settlement: Settlement | None = None


@dataclass(frozen=True, slots=True)
class Proof:
    """``strays``: the played run itself breaks what other runs keep, and what these come to afterwards was not
    played."""

    broken: tuple[Broken, ...]
    margins: tuple[Margin, ...]
    strays: bool


_Key = tuple[str, str, str | None, Place]


def prove(studies: Sequence[Study], checks: Sequence[Check], reserve_us: int = 0) -> Proof:
    """Prove every way in which the machine was played, and put the results together. A margin that holds, but leaves
    less than ``reserve_us``, is a finding too."""
    proofs = [_prove_one(study, checks, reserve_us) for study in studies]
    by_key: dict[_Key, list[Broken]] = {}
    for proof in proofs:
        for one in proof.broken:
            by_key.setdefault((one.finding.kind, one.finding.subject, one.finding.step, one.finding.place), []).append(
                one
            )
    broken = [_one_of(found, len(proofs)) for found in by_key.values() if _stands(found, len(proofs))]
    broken = _accepted(broken, studies[0].machine)
    margins: dict[_Key, Margin] = {}
    for proof in proofs:
        for margin in proof.margins:
            key = (margin.kind, margin.subject, margin.step, margin.place)
            margins[key] = min(margins.get(key, margin), margin, key=_by_margin)
    strays = any(proof.strays for proof in proofs)
    return Proof(_sorted(broken), tuple(sorted(margins.values(), key=_by_margin)), strays)


def _stands(found: Sequence[Broken], worlds: int) -> bool:
    """What a sequence leaves out, it must leave out in every way that it is played."""
    one = found[0]
    timed = one.witness is not None or one.finding.margin_us is not None
    return one.finding.severity is Severity.ERROR or timed or len(found) == worlds


def _one_of(found: Sequence[Broken], worlds: int) -> Broken:
    """The finding whose run was replayed, and that by most; certain only where every way shows it for certain. What
    is thin in one way may be broken in another."""
    best = min(found, key=lambda one: (_is_thin(one), one.finding.replayed is False, one.finding.margin_us or 0))
    certain = len(found) == worlds and all(one.finding.certain for one in found)
    return replace(best, finding=replace(best.finding, certain=certain))


def _is_thin(one: Broken) -> bool:
    return one.finding.margin_us is not None and one.finding.margin_us >= 0


def _accepted(broken: Sequence[Broken], machine: Machine) -> list[Broken]:
    """What the comments of the text accept has their reasons; comments that accept nothing are added."""
    findings = [one.finding for one in broken]
    reasoned = zip(with_reasons(findings, machine.accepts), broken, strict=True)
    stale = stale_accepts(findings, machine.accepts)
    return [*(replace(one, finding=finding) for finding, one in reasoned), *(Broken(one, None) for one in stale)]


def _prove_one(study: Study, checks: Sequence[Check], reserve_us: int) -> Proof:
    stated = [(check, obligation) for check in checks for obligation in check.obligations(study)]
    rows = greatest_separations(study.trace.graph, both_ways((one.first, one.second) for _, one in stated))
    tightest: dict[_Key, tuple[Check, Obligation, int]] = {}
    for check, one in stated:
        margin = -rows[one.second, one.first] - one.least
        key = (check.kind, one.subject, one.step, one.place)
        if key not in tightest or margin < tightest[key][2]:
            tightest[key] = (check, one, margin)
    turn = _turning_point(study, (one for _, one in stated), rows)
    broken = [_broken(study, check, one, margin, rows, turn) for check, one, margin in tightest.values() if margin < 0]
    thin = [_thin(study, *found, reserve_us) for found in tightest.values() if 0 <= found[2] < reserve_us]
    seen = [check.finding(sight) for check in checks for sight in check.sights(study)]
    if turn is not None:
        seen = [one if one.severity is Severity.NOTE else replace(one, certain=False) for one in seen]
    broken += [Broken(finding, None) for finding in (*thin, *seen)]
    margins = [
        Margin(check.kind, one.subject, one.step, one.place, _shown(margin)) for check, one, margin in tightest.values()
    ]
    return Proof(tuple(broken), tuple(margins), turn is not None)


def _turning_point(study: Study, obligations: Iterable[Obligation], rows: Rows) -> int | None:
    """The typical time at which the played run first breaks what other runs keep: nothing that it comes to afterwards
    is certain. None where it never does."""
    return min(
        (
            study.time(one.second)
            for one in obligations
            if study.time(one.first) + one.least > study.time(one.second) and rows[one.first, one.second] >= one.least
        ),
        default=None,
    )


def _broken(study: Study, check: Check, one: Obligation, margin: int, rows: Rows, turn: int | None) -> Broken:
    run = witness(study.trace, one.first, one.second)
    shown = _shown(margin)
    by = "an unlimited time" if shown is None else in_time(-shown)
    mend = one.wording.mend
    finding = Finding(
        kind=check.kind,
        severity=check.severity,
        certain=rows[one.first, one.second] < one.least and (turn is None or study.time(one.first) <= turn),
        subject=one.subject,
        step=one.step,
        place=one.place,
        message=one.wording.broken(by),
        margin_us=shown,
        replayed=_shows(study, check, one, run),
        run=narrate(study, run, one.first, one.second),
        mend=None if mend is None or shown is None else mend(_needed(study, one, -shown)),
    )
    return Broken(finding, run, study.settlement)


def _shows(study: Study, check: Check, one: Obligation, run: Witness) -> bool:
    """Whether the witness, really played, breaks what the check states at this place of the text."""
    played = replay(study.machine, study.settlement, run)
    again = Study(study.machine, played, given(played.delays))
    return any(
        again.time(other.first) + other.least > again.time(other.second)
        for other in check.obligations(again)
        if again.comes(other.second) and (other.subject, other.step, other.place) == (one.subject, one.step, one.place)
    )


def _thin(study: Study, check: Check, one: Obligation, margin: int, reserve_us: int) -> Finding:
    """It holds, and nothing can be shown to break; what would mend it is asked as if the reserve were due."""
    mend = one.wording.mend
    due = replace(one, least=one.least + reserve_us)
    return Finding(
        kind=check.kind,
        severity=Severity.WARNING,
        certain=False,
        subject=one.subject,
        step=one.step,
        place=one.place,
        message=one.wording.thin(in_time(margin)),
        margin_us=margin,
        replayed=None,
        run=(),
        mend=None
        if mend is None
        else f"for a reserve of {in_time(reserve_us)}: {mend(_needed(study, due, reserve_us - margin))}",
    )


def _needed(study: Study, one: Obligation, by: int) -> int:
    """How much longer the lever must take: what it alone gives may be less than what the margin says, where something
    else keeps the second event back so far."""
    if one.lever is None:
        return by
    graph = study.trace.graph
    behind = greatest_separation(graph, one.lever, one.first)
    return max(by, behind - longest_least_chain(graph, one.lever, one.second) + one.least)


def _shown(margin: int) -> int | None:
    least_separation = closed(-margin)
    return None if least_separation is None else -least_separation


def _sorted(broken: Iterable[Broken]) -> tuple[Broken, ...]:
    """Certain ones first, errors before warnings, causes before the standstill that they may lead to, then by place;
    notes behind them all, and behind these what is accepted."""
    severities = list(Severity)
    return tuple(
        sorted(
            broken,
            key=lambda one: (
                one.finding.accepted is not None,
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
