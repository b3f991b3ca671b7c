"""What a played run gives back. Plain records, all times in whole microseconds."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from seqcheck.machine.time import Span


@dataclass(frozen=True, slots=True)
class Visit:
    """``left`` is None while the step is still active at the end of the run; ``cycle`` counts from 0."""

    step: str
    entered: int
    left: int | None
    cycle: int


@dataclass(frozen=True, slots=True)
class LogLine:
    time: int
    text: str


@dataclass(frozen=True, slots=True)
class Incident:
    """``kind`` is spelled as the finding of that name; ``step`` is None where no step brings it about by itself."""

    time: int
    kind: str
    subject: str
    step: str | None
    text: str


@dataclass(frozen=True, slots=True)
class Drawn:
    """One delay as it was drawn, and when."""

    time: int
    what: str
    name: str
    n: int
    span: Span
    value: int


@dataclass(frozen=True, slots=True)
class Run:
    """``cycle_starts``: for each sequence, when it entered its first step (the last one ends the last cycle).
    ``bounces``: what a step with ``steady`` or with several parts to its exit has seen come and go again before it was
    left. That is no incident by itself, and told of as a missed signal would be."""

    visits: tuple[Visit, ...]
    cycle_starts: Mapping[str, tuple[int, ...]]
    log: tuple[LogLine, ...]
    incidents: tuple[Incident, ...]
    bounces: tuple[Incident, ...]
    draws: tuple[Drawn, ...]
