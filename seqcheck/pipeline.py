"""The whole story: from a text and its timing sheets to a report.

Takes the name of a text and those of sheets; gives a report, in which everything that is wrong with the input is a
problem and everything that is wrong with the machine a finding.
"""

from __future__ import annotations

import gc
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass, replace

from seqcheck.checks.assumptions import assumptions
from seqcheck.checks.catalogue import ACCEPTABLE, CHECKS
from seqcheck.checks.opposed_coils import handovers, tightest_handovers
from seqcheck.checks.prove import Broken, Proof, prove
from seqcheck.checks.shown_states import shown_runs, shown_states
from seqcheck.checks.study import Study, studies_of
from seqcheck.checks.times import critical_path, times_of
from seqcheck.engine.explore import explore
from seqcheck.engine.player import MOST_EVENTS
from seqcheck.engine.scope import outside_scope
from seqcheck.engine.states import TimedStates, timed_states
from seqcheck.language.read import read_machine
from seqcheck.language.source import Source, read_source
from seqcheck.machine.findings import Problem, Report
from seqcheck.machine.model import Machine


@dataclass(frozen=True, slots=True)
class Studied:
    """A machine with every play of it, the typical one first, and what is behind its report: ``broken`` in the order of
    the report's findings."""

    machine: Machine
    studies: Sequence[Study]
    broken: Sequence[Broken]


def examine(name: str, sheets: Sequence[str] = (), reserve_us: int = 0) -> Report:
    """Read, play, prove. ``name`` is a path, or ``-`` for standard input. What holds, but with less than
    ``reserve_us`` left, is a finding too."""
    return study(name, sheets, reserve_us)[0]


def examine_source(source: Source, sheets: Sequence[str] = (), reserve_us: int = 0) -> Report:
    return study_source(source, sheets, reserve_us)[0]


def study(name: str, sheets: Sequence[str] = (), reserve_us: int = 0) -> tuple[Report, Studied | None]:
    """The same, with what is behind the report; None where the report has problems."""
    source = read_source(name)
    if isinstance(source, Problem):
        return Report(name, None, problems=(source,)), None
    return study_source(source, sheets, reserve_us)


def study_source(source: Source, sheets: Sequence[str] = (), reserve_us: int = 0) -> tuple[Report, Studied | None]:
    with _collecting_later():
        return _studied(source, sheets, reserve_us)


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


def _studied(source: Source, sheets: Sequence[str], reserve_us: int) -> tuple[Report, Studied | None]:
    machine = read_machine(source, sheets, ACCEPTABLE)
    if not isinstance(machine, Machine):
        return Report(source.name, None, problems=machine), None
    refused = outside_scope(machine)
    if refused:
        return _refused(source, machine, refused), None
    graph = explore(machine)
    if any(settlement.trace.too_long for settlement in graph.settlements):
        return _refused(source, machine, (_too_long(machine),)), None
    studies = studies_of(machine, graph)
    timed = timed_states(graph)
    proof = prove(studies, CHECKS, reserve_us)
    report = _report(studies, timed, proof)
    lines = _lines_of(source)
    findings = tuple(replace(one, source=lines[one.place.line - 1]) for one in report.findings)
    return replace(report, findings=findings), Studied(machine, studies, proof.broken)


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


def _report(studies: Sequence[Study], timed: TimedStates, proof: Proof) -> Report:
    typical, machine = studies[0], studies[0].machine
    findings = tuple(one.finding for one in proof.broken)
    times = times_of(studies, timed)
    accepted = any(one.accepted is not None and one.diverts and not one.certain for one in findings)
    return Report(
        file=machine.file,
        machine=machine.name,
        findings=findings,
        sheets=machine.sheets,
        assumptions=assumptions(typical, accepted, proof.strays),
        cycles=times.cycles,
        choices=times.choices,
        states=shown_states(timed),
        runs=shown_runs(timed),
        steps=times.steps,
        critical_path=critical_path(typical),
        handovers=tightest_handovers(handovers(study) for study in studies),
        margins=proof.margins,
    )
