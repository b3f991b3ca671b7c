"""The run that shows one finding, as a window of its own.

Takes an examined machine and its report; gives the part of the run around the finding: played again with the delays of
the witness, from the start of the cycle in which it comes about to the end of that cycle. Refuses, in words, a finding
that has no run.
"""

from __future__ import annotations

from collections.abc import Sequence

from seqcheck.chart.asked import Unplaceable
from seqcheck.chart.window import Window, cycle_around
from seqcheck.checks.catalogue import CHECKS
from seqcheck.checks.study import Study
from seqcheck.engine.explore import replay
from seqcheck.engine.settlement import Settlement
from seqcheck.engine.timeline import given
from seqcheck.engine.witness import Witness
from seqcheck.machine.findings import Finding, Report
from seqcheck.machine.model import Machine
from seqcheck.pipeline import Studied


def window_of_run(studied: Studied, report: Report, number: int) -> tuple[Window, int]:
    """The window, and the time of the run at which finding ``number`` (from 1) lies. Raises ``Unplaceable``."""
    if not 1 <= number <= len(report.findings):
        count = len(report.findings)
        there = "there is no finding" if count == 0 else f"there are findings 1 to {count}"
        raise Unplaceable(f"there is no finding {number}; {there}")
    finding, behind = report.findings[number - 1], studied.broken[number - 1]
    if not finding.run:
        raise Unplaceable(f"finding {number} ({finding.kind} of {finding.subject}) is not shown by a run")
    title, part = f"the run that shows finding {number}", studied.parts[behind.part]
    if behind.witness is not None and behind.settlement is not None:
        return _of_witness(part.machine, behind.settlement, behind.witness, title)
    return _of_sight(part.studies, finding, title)


def _of_witness(machine: Machine, settlement: Settlement, witness: Witness, title: str) -> tuple[Window, int]:
    played = replay(machine, settlement, witness)
    study = Study(machine, played, given(played.delays))
    at = max(witness.times[event] for event in witness.chain)
    return cycle_around(study, at, title), at


def _of_sight(studies: Sequence[Study], finding: Finding, title: str) -> tuple[Window, int]:
    """What needs no times of its own shows as the machine was played."""
    (check,) = (one for one in CHECKS if one.kind == finding.kind)
    for study in studies:
        for sight in check.sights(study):
            if (sight.subject, sight.step, sight.place) == (finding.subject, finding.step, finding.place):
                at = 0 if sight.at is None else study.time(sight.at)
                return cycle_around(study, at, title), at
    raise Unplaceable(f"finding {finding.kind} of {finding.subject} shows in no play")
