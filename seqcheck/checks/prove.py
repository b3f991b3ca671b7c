"""From obligations to findings: bound them all, keep the tightest of each, show the run that breaks it.

Takes a study and the catalogue of checks; gives findings, margins and the handover table. Obligations that the text
states once are met in every cycle; the tightest stands for them.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from seqcheck.checks.check import Check, Obligation
from seqcheck.checks.narrate import narrate
from seqcheck.checks.study import Study
from seqcheck.checks.wording import in_time
from seqcheck.engine.bounds import Rows, greatest_separations, is_open
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


def prove(study: Study, checks: Sequence[Check]) -> Proof:
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
    broken += [Broken(finding, None) for check in checks for finding in check.findings(study)]
    margins = [
        Margin(check.kind, one.subject, one.step, one.place, _closed(margin))
        for check, one, margin in tightest.values()
    ]
    return Proof(_sorted(broken), tuple(sorted(margins, key=_by_margin)))


def _broken(study: Study, check: Check, one: Obligation, margin: int, rows: Rows) -> Broken:
    run = witness(study.trace, one.first, one.second)
    shown = _closed(margin)
    by = "without limit" if shown is None else in_time(-shown)
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
        replayed=replays(study.machine, study.trace, run, one.first, one.second),
        run=narrate(study, run, one.first, one.second),
        mend=None if mend is None or shown is None else mend(-shown),
    )
    return Broken(finding, run)


def _closed(margin: int) -> int | None:
    return None if is_open(-margin) else margin


def _sorted(broken: Iterable[Broken]) -> tuple[Broken, ...]:
    """Certain ones first, errors before warnings, then by place; notes behind them all."""
    severities = list(Severity)
    return tuple(
        sorted(
            broken,
            key=lambda one: (
                one.finding.severity is Severity.NOTE,
                not one.finding.certain,
                severities.index(one.finding.severity),
                one.finding.place,
                one.finding.kind,
                one.finding.subject,
            ),
        )
    )


def _by_margin(margin: Margin) -> tuple[object, ...]:
    return (margin.margin_us is not None, margin.margin_us or 0, margin.place, margin.kind, margin.subject)
