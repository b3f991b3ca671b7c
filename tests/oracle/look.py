"""What the tests look up in a run."""

from __future__ import annotations

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
