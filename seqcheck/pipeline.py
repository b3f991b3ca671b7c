"""The whole story: from a text and its timing sheets to a report.

Takes the name of a text and those of sheets; gives a report, in which everything that is wrong with the input is a
problem and everything that is wrong with the machine a finding.
"""

from __future__ import annotations

import gc
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from dataclasses import replace

from seqcheck.checks.assumptions import assumptions
from seqcheck.checks.catalogue import ACCEPTABLE, CHECKS
from seqcheck.checks.opposed_coils import handovers, tightest_handovers
from seqcheck.checks.prove import Broken, Proof, prove
from seqcheck.checks.shown_states import shown_runs, shown_states
from seqcheck.checks.study import Study, studies_of
from seqcheck.checks.times import critical_path, times_of, times_of_all
from seqcheck.checks.whole import whole_proof
from seqcheck.engine.explore import explore
from seqcheck.engine.parts import parts_of
from seqcheck.engine.player import MOST_EVENTS
from seqcheck.engine.scope import outside_scope
from seqcheck.engine.settlement import StateGraph
from seqcheck.engine.states import TimedStates, side_by_side, timed_states
from seqcheck.language.read import read_machine
from seqcheck.language.source import Source, read_source
from seqcheck.machine.findings import Problem, Report
from seqcheck.machine.model import Machine
from seqcheck.machine.records import record


@record
class StudiedPart:
    """Sequences that something ties together, and every play of them, the typical one first. ``sewn``: plays of ways of
    which each run is among them, and whether they are all that it takes."""

    machine: Machine
    studies: Sequence[Study]
    states: TimedStates
    sewn: Sequence[Study]
    all_sewn: bool


@record
class Studied:
    """A machine, its parts, and what is behind its report: ``broken`` in the order of the report's findings."""

    machine: Machine
    parts: Sequence[StudiedPart]
    broken: Sequence[Broken]

    @property
    def studies(self) -> Sequence[Study]:
        """Every play of every part."""
        return [study for part in self.parts for study in part.studies]


def examine(name: str, sheets: Sequence[str] = (), reserve_us: int = 0, brief: bool = False) -> Report:
    """Read, play, prove. ``name`` is a path, or ``-`` for standard input. What holds, but with less than
    ``reserve_us`` left, is a finding too. A ``brief`` report has neither the times of steps nor the critical path."""
    return study(name, sheets, reserve_us, brief)[0]


def examine_source(source: Source, sheets: Sequence[str] = (), reserve_us: int = 0) -> Report:
    return study_source(source, sheets, reserve_us)[0]


def study(
    name: str, sheets: Sequence[str] = (), reserve_us: int = 0, brief: bool = False
) -> tuple[Report, Studied | None]:
    """The same, with what is behind the report; None where the report has problems."""
    source = read_source(name)
    if isinstance(source, Problem):
        return Report(name, None, problems=(source,)), None
    return study_source(source, sheets, reserve_us, brief)


def study_source(
    source: Source, sheets: Sequence[str] = (), reserve_us: int = 0, brief: bool = False
) -> tuple[Report, Studied | None]:
    with _collecting_later():
        return _studied(source, sheets, reserve_us, brief)


@contextmanager
def _collecting_later() -> Iterator[None]:
    """All that an examination makes is kept until its end: looking for what could be given back only takes time."""
    collecting = gc.isenabled()
    gc.disable()
    try:
        yield
    finally:
        if collecting:
            gc.enable()


def _studied(source: Source, sheets: Sequence[str], reserve_us: int, brief: bool) -> tuple[Report, Studied | None]:
    machine = read_machine(source, sheets, ACCEPTABLE)
    if not isinstance(machine, Machine):
        return Report(source.name, None, problems=machine), None
    refused = outside_scope(machine)
    if refused:
        return _refused(source, machine, refused), None
    explored = [(part, explore(part, reserve_us)) for part in parts_of(machine)]
    too_long = [_too_long(part) for part, graph in explored if any(one.trace.too_long for one in graph.settlements)]
    if too_long:
        return _refused(source, machine, too_long), None
    parts = [_studied_part(part, graph) for part, graph in explored]
    proof = whole_proof(machine, [prove(part.studies, CHECKS, reserve_us, part.sewn) for part in parts], CHECKS)
    report = _report(machine, parts, proof, brief)
    lines = _lines_of(source)
    findings = tuple(replace(one, source=lines[one.place.line - 1]) for one in report.findings)
    return replace(report, findings=findings), Studied(machine, parts, proof.broken)


def _studied_part(part: Machine, graph: StateGraph) -> StudiedPart:
    studies = studies_of(part, graph)
    return StudiedPart(
        part, studies, timed_states(graph), [studies[0].alike(one) for one in graph.sewn], graph.all_sewn
    )


def _refused(source: Source, machine: Machine, problems: Sequence[Problem]) -> Report:
    lines = _lines_of(source)
    shown = tuple(replace(one, source=lines[one.place.line - 1]) for one in problems)
    return Report(source.name, machine.name, problems=shown)


def _lines_of(source: Source) -> list[str]:
    return [line.rstrip("\r") for line in source.text.split("\n")]


def _too_long(machine: Machine) -> Problem:
    return Problem(
        machine.sequences[0].place,
        f"one cycle of sequence {machine.sequences[0].name} is too long to examine (over {MOST_EVENTS:,} events)",
        advice="fewer repetitions show the same faults",
    )


def _report(machine: Machine, parts: Sequence[StudiedPart], proof: Proof, brief: bool) -> Report:
    """The critical path is that of the first sequence."""
    typical = [part.studies[0] for part in parts]
    findings = tuple(one.finding for one in proof.broken)
    times = times_of_all(machine, [times_of(part.studies, part.states, not brief) for part in parts])
    timed = side_by_side([part.states for part in parts])
    accepted = any(one.accepted is not None and one.diverts and not one.certain for one in findings)
    return Report(
        file=machine.file,
        machine=machine.name,
        findings=findings,
        sheets=machine.sheets,
        assumptions=assumptions(machine, typical, accepted, proof.strays, all(part.all_sewn for part in parts)),
        cycles=times.cycles,
        choices=times.choices,
        states=shown_states(timed),
        runs=shown_runs(timed),
        steps=times.steps,
        critical_path=() if brief else critical_path(typical[0]),
        handovers=tightest_handovers(handovers(study) for part in parts for study in (*part.studies, *part.sewn)),
        margins=proof.margins,
    )
