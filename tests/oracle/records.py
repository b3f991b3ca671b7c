"""What a played run gives back. Plain records, all times in whole microseconds."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from seqcheck.machine.time import Span


@dataclass(frozen=True, slots=True)
class Visit:
    """``left`` is None while the step is still active at the end of the run; ``cycle`` counts from 0, in its own
    sequence. ``expired``: its watchdog has run out, and it is left for the step that the watchdog names."""

    step: str
    entered: int
    left: int | None
    cycle: int
    expired: bool = False


@dataclass(frozen=True, slots=True)
class Taken:
    """What came of a ``choose`` in the text at ``line`` and ``column``, the ``occasion``-th time it was come to (from
    0), at ``arrived``. ``index`` counts its branches from 0, and is None where its watchdog has run out. ``stood``: it
    was not taken at the read that came to it, though perhaps at the same instant. ``asked`` are the signals from
    outside as they were at the arrival."""

    sequence: str
    line: int
    column: int
    occasion: int
    index: int | None
    arrived: int
    time: int
    stood: bool
    asked: tuple[tuple[str, bool], ...] = ()

    @property
    def name(self) -> str:
        return f"choose {self.line}:{self.column}"


@dataclass(frozen=True, slots=True)
class Cycle:
    """From ``start`` to ``end`` of one cycle; what counts begins at ``begin``, which is later where the first step
    waits for a signal from outside."""

    start: int
    begin: int
    end: int


@dataclass(frozen=True, slots=True)
class RuleTold:
    """What a run says of a rule, which stands at ``line``: the shortest and the longest of what it measures, None where
    there was nothing to measure. The longest may be of something that still lasted as the run ended."""

    kind: str
    text: str
    line: int
    shortest: int | None
    longest: int | None
    broken: bool


@dataclass(frozen=True, slots=True)
class LogLine:
    time: int
    text: str


@dataclass(frozen=True, slots=True)
class Incident:
    """``kind`` is spelled as the finding of that name; ``step`` is None where no step brings it about by itself. Where
    it ``diverts`` the machine, what follows is not what was meant; a broken rule, or a watchdog whose text says how to
    go on, does not."""

    time: int
    kind: str
    subject: str
    step: str | None
    text: str
    diverts: bool = True


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
    ``bounces``: what a step with ``steady`` or with several parts to its exit, or a choice, has seen come and go again
    before it was left. That is no incident by itself, and told of as a missed signal would be."""

    visits: tuple[Visit, ...]
    cycle_starts: Mapping[str, tuple[int, ...]]
    cycles: Mapping[str, tuple[Cycle, ...]]
    choices: tuple[Taken, ...]
    rules: tuple[RuleTold, ...]
    log: tuple[LogLine, ...]
    incidents: tuple[Incident, ...]
    bounces: tuple[Incident, ...]
    draws: tuple[Drawn, ...]

    @property
    def first_diversion(self) -> Incident | None:
        return next((incident for incident in self.incidents if incident.diverts), None)
