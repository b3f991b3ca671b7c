"""What a play leaves behind: the records from which the checks state their obligations.

The player fills them in as the run goes on; nobody changes them afterwards. A number is always an event of the
graph.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from enum import Enum

from seqcheck.engine.conditions import Alternatives, Aspect, Literal, literals_of
from seqcheck.engine.graph import EventGraph
from seqcheck.engine.strokes import Region
from seqcheck.machine.devices import Position
from seqcheck.machine.places import Place
from seqcheck.machine.steps import Choose, CommandKind, Step, Watchdog
from seqcheck.machine.time import Span


@dataclass(slots=True, eq=False)
class Read:
    """A read of the inputs at which steps were left or entered, or a pulse ended. ``reader`` names its delays."""

    event: int
    reader: str
    write: int
    floor: int
    left: list[Visit] = field(default_factory=list)
    entered: list[Visit] = field(default_factory=list)
    chosen: list[Choice] = field(default_factory=list)
    #: A signal that steps entered here begin to wait for comes once for all of them: (name, on or off) to the events
    #: at which it holds at the input and is seen.
    signals: dict[tuple[str, bool], tuple[int, int]] = field(default_factory=dict)
    #: For each island that this read's write switches outputs of, the event at which its update is over.
    updates: dict[str, int] = field(default_factory=dict)


@dataclass(slots=True, eq=False)
class Origin:
    """The command that brings a change about: the step, the place in the text, the read."""

    step: str
    place: Place
    kind: CommandKind
    duration: int | None
    read: Read

    def at(self, read: Read) -> Origin:
        """The same command, as it comes to bear at another read."""
        return Origin(self.step, self.place, self.kind, self.duration, read)


class Effect(Enum):
    """What a touch does to a command: it begins to hold it, ends its own hold, or resets what is stored."""

    BEGINS = "begins"
    ENDS = "ends"
    RESETS = "resets"


@dataclass(slots=True, eq=False)
class Touch:
    """``event``: the read at which it happens; for a pulse that a reset has ended, when it would have ended."""

    event: int
    origin: Origin
    effect: Effect

    def conflicts_with(self, other: Touch) -> bool:
        """One begins what the other ends, at different reads."""
        return (self.effect is Effect.BEGINS) != (other.effect is Effect.BEGINS) and self.event != other.event


@dataclass(slots=True, eq=False)
class Edge:
    """A sensor, as it changes: physically ``at``, at the input ``arrived``, in the controller ``seen``. Taken back by
    event ``lost_to`` before it was seen: at the sensor (``arrived`` then never came) or at the input. The same for
    what a read commands or activates, which is known to the next read."""

    sensor: str
    value: bool
    at: int
    arrived: int
    seen: int | None = None
    lost_to: int | None = None


@dataclass(slots=True, eq=False)
class Answer:
    """What made one part of an exit true: known to the controller since ``seen``, true at the input since ``held``.
    ``edge`` for a sensor that has changed since the start."""

    literal: Literal
    seen: int
    held: int
    edge: Edge | None = None


@dataclass(slots=True, eq=False)
class Alarm:
    """A watchdog that leads to another step: its time is ``over`` at one event, noticed at another. ``expired``: that
    was before the wait had come to hold."""

    watchdog: Watchdog
    over: int
    noticed: int
    expired: bool = False


@dataclass(slots=True, eq=False, kw_only=True)
class Wait:
    """What a thread waits for since the read that ``entered`` it: one of ``alternatives`` to hold. Not ``left`` (yet):
    None. ``answers``: what made true the alternative that held. ``missing``: without which nothing else lets it end,
    as it was asked last; None where that is not one thing alone."""

    entered: Read
    alternatives: Alternatives
    cycle: int
    signals: dict[Literal, tuple[int, int]] = field(default_factory=dict)
    alarm: Alarm | None = None
    dwell_over: int | None = None
    dwell_seen: int | None = None
    steady_over: int | None = None
    steady_seen: int | None = None
    left: Read | None = None
    answers: tuple[Answer, ...] = ()
    missing: Literal | None = None

    @property
    def literals(self) -> tuple[Literal, ...]:
        return literals_of(self.alternatives)

    @property
    def expired(self) -> bool:
        """Whether its watchdog has ended it, or is to."""
        return self.alarm is not None and self.alarm.expired


@dataclass(slots=True, eq=False, kw_only=True)
class Visit(Wait):
    """A step, active from the read that ``entered`` it."""

    step: Step


@dataclass(slots=True, eq=False, kw_only=True)
class Choice(Wait):
    """A ``choose`` to which a thread has come at the read that ``entered`` it, behind step ``after`` in the text;
    ``taken``, by the number of its branch, at the read ``left``. ``conditions``: those of its branches. ``asked``:
    whether each signal from outside was on at the first of these reads; ``told``: how much of what is known of each
    other term (``Trace.known``) was known by then."""

    choose: Choose
    after: str | None
    conditions: tuple[Alternatives, ...]
    asked: dict[str, bool] = field(default_factory=dict)
    told: dict[Aspect, int] = field(default_factory=dict)
    taken: int | None = None


@dataclass(slots=True, eq=False)
class Spell:
    """A coil or output commanded from one read to another, and when it switched physically."""

    target: str
    begun: Origin
    on: int
    ended: Origin | None = None
    off: int | None = None


@dataclass(slots=True, eq=False)
class CoilChange:
    coil: str
    energized: bool
    event: int
    origin: Origin


@dataclass(slots=True, eq=False)
class Known:
    """What the controller knows of a term: its value, since which event, and since when it holds at the input."""

    value: bool
    seen: int
    held: int
    edge: Edge | None = None


@dataclass(slots=True, eq=False)
class Change:
    """What an aspect of the machine has become, and the event that brought it."""

    value: bool
    event: int


@dataclass(slots=True, eq=False)
class Shift:
    """A valve on its way since ``asked``, after the valve's ``previous`` shift and before its ``following`` one.
    ``called_off`` by a coil change before it got there; ``taken_over`` where that was the other coil during a return
    to centre. ``time``: the span of the way. ``parts``: where a cylinder follows several valves, their shifts, which
    this one stands for."""

    valve: str
    to: Position
    asked: int
    reached: int
    by: CoilChange
    time: Span
    previous: Shift | None = None
    following: Shift | None = None
    called_off: CoilChange | None = None
    taken_over: bool = False
    parts: tuple[Shift, ...] = ()


@dataclass(slots=True, eq=False)
class Stroke:
    """A cylinder under way since ``shift`` reached its position; the cylinder's ``number``-th stroke, from where it
    ``started``. ``leaves``: it comes off its end. ``marks`` in the direction of travel: (index of the mark, event),
    the last is the end; ``passed`` of them were reached. ``away``: the shift that first drove it otherwise, after
    which it ``stands`` at that event unless it is done before; ``cut``: it was not."""

    cylinder: str
    out: bool
    number: int
    shift: Shift
    started: Region
    leaves: int | None = None
    marks: tuple[tuple[int, int], ...] = ()
    passed: int = 0
    away: Shift | None = None
    stands: int | None = None
    cut: bool = False
    stood: Region | None = None

    @property
    def end(self) -> int:
        return self.marks[-1][1]


@dataclass(slots=True, eq=False)
class Trace:
    """One play. ``cycles``: the reads at which the first sequence began anew, the first one included. ``finished``:
    nothing was due any more. ``stepless``: the sequence that goes round and round at one read and enters no step.
    ``too_long``: given up for its sheer number of events, so that nothing is proved."""

    graph: EventGraph
    times: list[int]
    marks: dict[str, tuple[int, ...]]
    happened: set[int] = field(default_factory=set)
    reads: list[Read] = field(default_factory=list)
    visits: list[Visit] = field(default_factory=list)
    spells: dict[str, list[Spell]] = field(default_factory=dict)
    touches: dict[str, list[Touch]] = field(default_factory=dict)
    #: For the read event that ends a pulse, the event at which its time is over.
    pulses_over: dict[int, int] = field(default_factory=dict)
    shifts: list[Shift] = field(default_factory=list)
    strokes: list[Stroke] = field(default_factory=list)
    strokes_of: dict[str, list[Stroke]] = field(default_factory=dict)
    edges: dict[str, list[Edge]] = field(default_factory=dict)
    #: What the controller knew of each term that anybody asks, from the start on and as it came to know it.
    known: dict[Aspect, list[Known]] = field(default_factory=dict)
    #: How the machine itself changed, for each of its aspects that a rule, a signal or a drive looks at.
    changes: dict[Aspect, list[Change]] = field(default_factory=dict)
    choices: list[Choice] = field(default_factory=list)
    cycles: list[Read] = field(default_factory=list)
    #: For each sequence the reads at which it began anew, the first one included.
    rounds: dict[str, list[Read]] = field(default_factory=dict)
    finished: bool = False
    stepless: str | None = None
    too_long: bool = False
