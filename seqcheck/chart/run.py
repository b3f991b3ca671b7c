"""The run that shows one finding, as a window of its own.

Takes a machine with its ways of playing and its report; gives the part of the run around the finding: played again with
the delays of the witness, from the start of the cycle in which it comes about to the end of that cycle. Refuses, in
words, a finding that has no run.
"""

from __future__ import annotations

from seqcheck.chart.marks import spots
from seqcheck.chart.window import Part, Unplaceable, Window, anchor_of, window_of
from seqcheck.checks.catalogue import CHECKS
from seqcheck.checks.prove import Broken, prove
from seqcheck.checks.study import Study
from seqcheck.engine.timeline import given
from seqcheck.engine.witness import Witness, replay
from seqcheck.engine.worlds import Worlds
from seqcheck.machine.findings import Report
from seqcheck.machine.model import Machine


def window_of_run(machine: Machine, worlds: Worlds, report: Report, number: int) -> tuple[Window, int]:
    """The window, and the time of the run at which finding ``number`` (from 1) lies. Raises ``Unplaceable``."""
    if not 1 <= number <= len(report.findings):
        count = len(report.findings)
        there = "there is no finding" if count == 0 else f"there are findings 1 to {count}"
        raise Unplaceable(f"there is no finding {number}; {there}")
    finding = report.findings[number - 1]
    if not finding.run:
        raise Unplaceable(f"finding {number} ({finding.kind} of {finding.subject}) is not shown by a run")
    studies = [Study(machine, settlement) for settlement in worlds.settlements]
    key = (finding.kind, finding.subject, finding.step, finding.place)
    for one in prove(studies, CHECKS).broken:
        found = one.finding
        if (found.kind, found.subject, found.step, found.place) == key and one.witness is not None:
            return _around(machine, one, one.witness, number)
    return _typical(machine, worlds, report, number)


def _around(machine: Machine, one: Broken, witness: Witness, number: int) -> tuple[Window, int]:
    assert one.settlement is not None
    played = replay(machine, one.settlement, witness)
    study = Study(machine, played, given(played.delays))
    at = max(witness.times[event] for event in witness.chain)
    cycles = study.trace.cycles
    first = max(index for index, read in enumerate(cycles) if study.time(read.event) <= at or index == 0)
    begin = study.time(cycles[first].event)
    if first + 1 < len(cycles):
        end = study.time(cycles[first + 1].event)
    else:
        end = max(study.time(event) for event in study.trace.happened)
    title = f"the run that shows finding {number}"
    return Window(study, begin, max(end, at + (at - begin) // 20), *anchor_of(cycles[first]), title, None, ()), at


def _typical(machine: Machine, worlds: Worlds, report: Report, number: int) -> tuple[Window, int]:
    """What needs no times of its own shows at typical times."""
    window = window_of(machine, worlds.settlements[0], Part())
    (spot,) = spots(window, report.findings[number - 1 : number])
    return window, window.begin if spot is None else spot.time
