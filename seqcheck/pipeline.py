"""The whole story: from a text and its timing sheets to a report.

Takes the name of a text and those of sheets; gives a report, in which everything that is wrong with the input is a
problem and everything that is wrong with the machine a finding.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from seqcheck.checks.assumptions import assumptions
from seqcheck.checks.catalogue import CHECKS
from seqcheck.checks.opposed_coils import handovers
from seqcheck.checks.prove import Proof, prove
from seqcheck.checks.study import Study
from seqcheck.checks.times import critical_path, cycle_times, step_times
from seqcheck.engine.player import MOST_EVENTS
from seqcheck.engine.scope import outside_scope
from seqcheck.engine.settle import settle
from seqcheck.language.read import read_machine
from seqcheck.language.source import Source, read_source
from seqcheck.machine.findings import Problem, Report
from seqcheck.machine.model import Machine


def examine(name: str, sheets: Sequence[str] = ()) -> Report:
    """Read, play, prove. ``name`` is a path, or ``-`` for standard input."""
    source = read_source(name)
    if isinstance(source, Problem):
        return Report(name, None, problems=(source,))
    return examine_source(source, sheets)


def examine_source(source: Source, sheets: Sequence[str] = ()) -> Report:
    machine = read_machine(source, sheets)
    if not isinstance(machine, Machine):
        return Report(source.name, None, problems=machine)
    refused = outside_scope(machine)
    if refused:
        return _refused(source, machine, refused)
    settlement = settle(machine)
    if settlement.trace.too_long:
        return _refused(source, machine, (_too_long(machine),))
    study = Study(machine, settlement)
    return _report(study, prove(study, CHECKS))


def _refused(source: Source, machine: Machine, problems: Sequence[Problem]) -> Report:
    lines = source.text.split("\n")
    shown = tuple(replace(one, source=lines[one.place.line - 1].rstrip("\r")) for one in problems)
    return Report(source.name, machine.name, problems=shown)


def _too_long(machine: Machine) -> Problem:
    return Problem(
        machine.sequences[0].place,
        f"one cycle of sequence {machine.sequences[0].name} is too long to examine (over {MOST_EVENTS:,} events)",
        advice="fewer repetitions show the same faults",
    )


def _report(study: Study, proof: Proof) -> Report:
    machine = study.machine
    return Report(
        file=machine.file,
        machine=machine.name,
        findings=tuple(one.finding for one in proof.broken),
        sheets=machine.sheets,
        assumptions=assumptions(study),
        cycles=cycle_times(study),
        steps=step_times(study),
        critical_path=critical_path(study),
        handovers=handovers(study),
        margins=proof.margins,
    )
