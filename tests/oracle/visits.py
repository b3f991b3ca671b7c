"""A step while it is active: what it waits for, what of it has come, what its own commands have moved."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, field

from seqcheck.machine.conditions import TermKind
from seqcheck.machine.steps import Item, Repeat, Step, Together
from tests.oracle.clock import Ticket
from tests.oracle.refusals import Part, parts_of

Past = frozenset[tuple[str, int]]
"""The strokes, by cylinder and number, of which a sensor has been waited for before something and by its causes."""


@dataclass(frozen=True, slots=True)
class Cause:
    """Of a coil's change: the step whose command or exit it is, None where none is by itself, and what led to it."""

    step: str | None
    past: Past


@dataclass(slots=True, eq=False)
class Read:
    """One read. ``passed``: its floor is over, what it changed is known. ``write`` is when its changes go out."""

    number: int
    time: int
    past: Past = frozenset()
    passed: bool = False
    write: int = 0


@dataclass(slots=True, eq=False)
class Join:
    """The end of a ``together``: ``open`` branches are still under way, ``ends`` are the reads the others ended at."""

    together: Together
    thread: Thread
    open: int
    ends: list[Read] = field(default_factory=list)

    @property
    def name(self) -> str:
        return f"join {self.together.place.line}:{self.together.place.column}"

    def ready(self) -> bool:
        return self.open == 0 and all(read.passed for read in self.ends)


@dataclass(slots=True, eq=False)
class Thread:
    """One line of steps under way: the whole sequence, or a branch that ends in ``join``."""

    route: Iterator[Step | Together]
    join: Join | None


def route_of(items: tuple[Item, ...]) -> Iterator[Step | Together]:
    for item in items:
        if isinstance(item, Repeat):
            for _ in range(item.times):
                yield from route_of(item.items)
        elif isinstance(item, Step | Together):
            yield item
        else:
            raise NotImplementedError(type(item).__name__)


@dataclass(slots=True)
class Arrival:
    """An outside signal on its way to one step: as an input, and as seen (since when)."""

    level: bool = False
    seen_since: int | None = None


@dataclass(slots=True, eq=False)
class ActiveVisit:
    """``known`` gives (value, since when) of anything but outside signals as the controller knows it, ``level``
    likewise the value at the input, seen or not."""

    step: Step
    thread: Thread
    read: Read
    cycle: int
    outside: dict[str, Arrival]
    known: Callable[[Part], tuple[bool, int]]
    level: Callable[[Part], bool]
    left: int | None = None
    dwell_over: bool = False
    steady_since: int | None = None
    steady_over: bool = False
    steady_end: Ticket | None = None
    watchdog: Ticket | None = None
    came: set[Part] = field(default_factory=set)
    sent: dict[str, bool] = field(default_factory=dict)
    arrived: set[tuple[str, bool]] = field(default_factory=set)
    entered_range: set[tuple[str, bool]] = field(default_factory=set)
    parts: tuple[Part, ...] = field(init=False)

    def __post_init__(self) -> None:
        self.parts = parts_of(self.step.until)

    @property
    def entered(self) -> int:
        return self.read.time

    def holds_since(self) -> int | None:
        """Since when the whole condition is seen to hold; None while it does not."""
        since = 0
        for part in self.parts:
            arrival = self.arrival_of(part)
            if arrival is not None:
                if arrival.seen_since is None:
                    return None
                since = max(since, arrival.seen_since)
                continue
            value, changed = self.known(part)
            if value is not part.wanted:
                return None
            since = max(since, changed)
        return since

    def ready(self) -> bool:
        """Whether the step is left now."""
        if not self.read.passed or not self.dwell_over or self.holds_since() is None:
            return False
        return self.step.steady is None or self.steady_over

    def has_come_to_hold(self, by: int) -> bool:
        """Whether the exit holds as a watchdog judges it: inputs changed, seen or not, the times over."""
        for part in self.parts:
            arrival = self.arrival_of(part)
            if not (arrival.level if arrival is not None else self.level(part) is part.wanted):
                return False
        if self.step.dwell is not None and self.entered + self.step.dwell > by:
            return False
        if self.step.steady is None:
            return True
        return self.steady_since is not None and self.steady_since + self.step.steady <= by

    def arrival_of(self, part: Part) -> Arrival | None:
        return self.outside[part.subject] if part.kind is TermKind.SIGNAL else None

    def waits_for(self, subject: str) -> bool:
        return any(part.subject == subject for part in self.parts)
