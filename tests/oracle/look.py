"""What the tests look up in a run."""

from __future__ import annotations

from seqcheck.language.read import read_machine
from seqcheck.language.source import Source
from seqcheck.machine.model import Machine
from tests.oracle.records import Run

LONG = 1_000_000_000
"""Longer than any run of the tests, in microseconds."""


def entered(run: Run, name: str) -> list[int]:
    return [visit.entered for visit in run.visits if visit.step == f"main.{name}"]


def left(run: Run, name: str) -> list[int]:
    return [visit.left for visit in run.visits if visit.step == f"main.{name}" and visit.left is not None]


def times_of(run: Run, text: str) -> list[int]:
    return [line.time for line in run.log if line.text == text]


def kinds(run: Run) -> list[str]:
    return [incident.kind for incident in run.incidents]


def machine_of(text: str) -> Machine:
    """The machine of a text, which has to be right."""
    machine = read_machine(Source("hand.steps", text))
    if not isinstance(machine, Machine):
        raise AssertionError("\n".join([*map(str, machine), text]))
    return machine


def branches(run: Run) -> list[int | None]:
    """Which branch each choice has taken, in the order of time."""
    return [taken.index for taken in run.choices]


def measured(run: Run, kind: str = "") -> list[tuple[int | None, int | None]]:
    """The shortest and the longest of what each rule measures."""
    return [(rule.shortest, rule.longest) for rule in run.rules if rule.kind.startswith(kind)]
