"""The devices of a machine: controller, valves and their coils, outputs, cylinders and their sensors, signals."""

from __future__ import annotations

from enum import Enum

from seqcheck.machine.conditions import Condition
from seqcheck.machine.places import Place
from seqcheck.machine.records import record
from seqcheck.machine.time import NO_TIME, WHOLE_SHARE, Span


class ControllerKind(Enum):
    SCAN = "scan"
    TASK = "task"
    IDEAL = "ideal"


@record
class Controller:
    """``round`` is one scan, the interval of a task, or no time (ideal); ``run`` is from a task's read to its write."""

    kind: ControllerKind = ControllerKind.IDEAL
    round: Span = NO_TIME
    run: Span = NO_TIME
    input_on: Span = NO_TIME
    input_off: Span = NO_TIME
    output_on: Span = NO_TIME
    output_off: Span = NO_TIME
    place: Place | None = None

    @property
    def wait(self) -> Span:
        """From a change to the read that notices it: up to the longest round."""
        longest = self.round.greatest
        return Span(0, longest // 2, longest)


@record
class Island:
    """A remote I/O or valve island on a bus (``io``)."""

    name: str
    label: str | None
    update: Span
    input_on: Span
    input_off: Span
    output_on: Span
    output_off: Span
    place: Place


class Position(Enum):
    A = "a"
    B = "b"
    CENTRE = "centre"

    # Part of keys; by name it takes a call for every look.
    __hash__ = object.__hash__


class ValveReturn(Enum):
    SPRING = "spring"
    BISTABLE = "bistable"
    CLOSED_CENTRE = "closed centre"
    EXHAUST_CENTRE = "exhaust centre"
    PRESSURE_CENTRE = "pressure centre"
    TANDEM_CENTRE = "tandem centre"
    FLOAT_CENTRE = "float centre"
    OPEN_CENTRE = "open centre"
    MOTOR = "motor"


@record
class Coil:
    """``on``: energized to position reached. ``off``: released to rest reached, NO_TIME where the valve has no rest.
    For a motor valve ``on`` is its travel. ``decay``: how long it still pulls after its output went off."""

    name: str
    address: str | None
    label: str | None
    valve: str
    to: Position
    on: Span
    off: Span
    decay: Span
    via: str | None
    place: Place


@record
class Valve:
    name: str
    label: str | None
    ports: int
    positions: int
    kind: ValveReturn
    coils: tuple[str, ...]
    gap: int | None
    normally_open: bool
    starts: Position
    place: Place

    @property
    def rest(self) -> Position | None:
        """Where the valve goes with no coil energized; None where it keeps its position."""
        if self.kind is ValveReturn.SPRING:
            return Position.B
        if self.kind in (ValveReturn.BISTABLE, ValveReturn.MOTOR):
            return None
        return Position.CENTRE


@record
class Output:
    name: str
    address: str | None
    label: str | None
    on: Span
    off: Span
    via: str | None
    place: Place


@record
class Sensor:
    """On while the piston is at ``low..high``, shares of the stroke in millionths (0 retracted, 1000000 extended)."""

    name: str
    address: str | None
    label: str | None
    cylinder: str
    low: int
    high: int
    delay: Span
    via: str | None
    place: Place

    def covers(self, position: int) -> bool:
        """Whether the sensor is on while the piston stands there."""
        return self.low <= position <= self.high


@record
class Stroke:
    """A full stroke: from valve position reached (or from coil energized) to end reached."""

    time: Span
    from_coil: bool


@record
class OnValve:
    """Out while the valve stands at ``a``, in at ``b``; ``reverse`` swaps the two."""

    valve: str
    reverse: bool

    def sends_out(self, position: Position) -> bool | None:
        """Out, or in (False); None where the cylinder stops."""
        return None if position is Position.CENTRE else (position is Position.A) != self.reverse


@record
class OnConditions:
    """Out and in while a condition on valves holds."""

    out: Condition
    back: Condition


@record
class Cylinder:
    """``uneven`` is a share in millionths; sensors stand in the order of the text."""

    name: str
    label: str | None
    drive: OnValve | OnConditions
    extend: Stroke
    retract: Stroke
    lag: Span
    uneven: int
    overrun: Span
    starts_extended: bool
    sensors: tuple[str, ...]
    place: Place

    @property
    def start(self) -> int:
        """Where the piston stands at first, in millionths of the stroke."""
        return WHOLE_SHARE if self.starts_extended else 0


@record
class OutsideSignal:
    """Comes from outside, ``after`` a step begins to wait for it; at any time where that is None."""

    name: str
    address: str | None
    label: str | None
    after: Span | None
    place: Place


@record
class FollowingSignal:
    name: str
    address: str | None
    label: str | None
    follows: Condition
    on: Span
    off: Span
    place: Place


Signal = OutsideSignal | FollowingSignal


@record
class Flag:
    name: str
    label: str | None
    place: Place
