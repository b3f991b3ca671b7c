"""From the proofs of the parts of a machine to the proof of the whole.

Takes the machine, a proof for each of its parts and the catalogue of checks; gives all findings in their order, those
last that the text accepts, and all margins, tightest first. What does not hang on how the machine is played is asked
here, of the whole: what one part leaves alone another may use.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import replace

from seqcheck.checks.check import Check
from seqcheck.checks.prove import Broken, Proof, by_margin
from seqcheck.checks.stale_accept import stale_accepts, with_reasons
from seqcheck.machine.findings import Severity
from seqcheck.machine.model import Machine


def whole_proof(machine: Machine, proofs: Sequence[Proof], checks: Sequence[Check]) -> Proof:
    played = [replace(one, part=number) for number, proof in enumerate(proofs) for one in proof.broken]
    read = [Broken(check.finding(sight), None) for check in checks for sight in check.reading(machine)]
    margins = [margin for proof in proofs for margin in proof.margins]
    return Proof(
        _sorted(_accepted([*played, *read], machine)),
        tuple(sorted(margins, key=by_margin)),
        any(proof.strays for proof in proofs),
    )


def _accepted(broken: Sequence[Broken], machine: Machine) -> list[Broken]:
    """What the comments of the text accept has their reasons; comments that accept nothing are added."""
    findings = [one.finding for one in broken]
    reasoned = zip(with_reasons(findings, machine.accepts), broken, strict=True)
    stale = stale_accepts(findings, machine.accepts)
    return [*(replace(one, finding=finding) for finding, one in reasoned), *(Broken(one, None) for one in stale)]


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
