"""Cylinders in time: positions that their valves reach go in, marks passed and sensors changed come out."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from functools import partial
from typing import NamedTuple

from seqcheck.machine.conditions import TermKind
from seqcheck.machine.devices import Cylinder, OnValve, Position, Valve
from seqcheck.machine.model import Machine
from seqcheck.machine.time import WHOLE_SHARE, Span
from tests.oracle.clock import Clock, Ticket, Turn
from tests.oracle.conditions import Literal, holds, literals_of, stands_at
from tests.oracle.inputs import InputLine
from tests.oracle.reads import Cause, Past
from tests.oracle.strokes import Pace, full_stroke, marks_of, rest_of_stroke


@dataclass(frozen=True, slots=True)
class Shift:
    """A valve on its way: asked for when, drawn from which span, by what. ``past``: what led to that, or to the release
    of a coil before."""

    asked_at: int
    span: Span
    cause: Cause
    past: Past


def direction(machine: Machine, cylinder: Cylinder, positions: Mapping[str, Position]) -> bool | None:
    """True for out, False for in, None for stop, where the valves stand at these positions."""
    drive = cylinder.drive
    if isinstance(drive, OnValve):
        return drive.sends_out(positions[drive.valve])

    def stands(literal: Literal) -> bool:
        at = positions[literal.subject]
        return stands_at(machine.valves[literal.subject], literal.aspect, at) is literal.wanted

    out, back = holds(drive.out, stands), holds(drive.back, stands)
    return None if out is back else out


def valves_of(cylinder: Cylinder) -> tuple[str, ...]:
    """The valves that the cylinder looks at."""
    if isinstance(cylinder.drive, OnValve):
        return (cylinder.drive.valve,)
    literals = literals_of(cylinder.drive.out) + literals_of(cylinder.drive.back)
    return tuple(dict.fromkeys(literal.subject for literal in literals if literal.kind is TermKind.VALVE))


def start_of(valve: Valve) -> Position:
    return valve.starts if valve.rest is None else valve.rest


@dataclass(frozen=True, slots=True)
class Watcher:
    """Whom the plant tells: ``arrived(cylinder, out)`` at an end, ``entered(sensor, out)`` when a stroke in that
    direction brings the piston into the sensor's range, ``stands(cylinder)`` as its valve has stopped or turned it."""

    arrived: Callable[[str, bool], None]
    entered: Callable[[str, bool], None]
    stands: Callable[[str], None]


class _Edge(NamedTuple):
    """Of a ``sensor`` that a piston has passed at a ``mark``: there it comes ``on``, or goes off."""

    mark: int
    sensor: str
    on: bool
    time: int


class CylinderPlay:
    """``end`` is the end the piston stands at (also while it has not left it yet), else None and ``between`` counts.
    ``strokes`` have begun so far; what is drawn of a stroke is numbered by how many came before it. ``overshot`` are
    the sensors whose edges a piston that was stopped on another edge of its own has run past, until it moves again;
    ``stopped_by`` is the step that did it."""

    def __init__(
        self, clock: Clock, machine: Machine, cylinder: Cylinder, lines: dict[str, InputLine], watcher: Watcher
    ) -> None:
        self.cylinder = cylinder
        self.end: int | None = WHOLE_SHARE if cylinder.starts_extended else 0
        self.moves: bool | None = None
        self.strokes = 0
        self.overshot: frozenset[str] = frozenset()
        self.stopped_by: str | None = None
        self._clock = clock
        self._machine = machine
        self._sensors = tuple(machine.sensors[name] for name in cylinder.sensors)
        self._lines = lines
        self._watcher = watcher
        self._marks = marks_of(self._sensors)
        self._between = (0, 0)
        self._tickets: list[Ticket] = []
        self._halting = False
        self._driven: bool | None = None
        self._goes: bool | None = None
        self._waited = False
        self._led_to: Past = frozenset()
        self._changed: set[tuple[str, bool]] = set()
        self._passed: list[_Edge] = []
        self._started = 0

    def begin(self, driven: bool | None) -> None:
        """How its valves drive it at the start, where it stands already."""
        self._driven = driven

    def shows(self, aspect: str | None) -> bool:
        """What a rule sees."""
        match aspect:
            case "extended":
                return self.end == WHOLE_SHARE
            case "retracted":
                return self.end == 0
            case "moving":
                return self.end is None and self.moves is not None
            case _:
                return self.end is None

    @property
    def _stroke(self) -> tuple[str, int]:
        return self.cylinder.name, self.strokes - 1

    def waited_for(self, sensor: str, wanted: bool) -> Past:
        """A step is left that has waited for one of the sensors: what lies up to its edge is as it should be. Gives
        the stroke, if it has changed the sensor to what was wanted, and what led to it."""
        if (sensor, wanted) not in self._changed:
            return frozenset()
        marks = [edge.mark for edge in self._passed if (edge.sensor, edge.on) == (sensor, wanted)]
        if marks:
            last = max(number for number, edge in enumerate(self._passed) if edge.mark == marks[-1])
            del self._passed[: last + 1]
        return self._led_to | {self._stroke}

    def waited_for_follower(self, changed_at: int) -> Past:
        """Likewise, where the step has waited for a signal that follows this cylinder and last changed then."""
        if not self.strokes or changed_at < self._started:
            return frozenset()
        self._passed = [edge for edge in self._passed if edge.time > changed_at]
        return self._led_to | {self._stroke}

    def follow(self, wanted: bool | None, shift: Shift) -> None:
        """A valve has reached another position, and the cylinder is driven so."""
        if wanted is self._driven:
            return
        self._driven = wanted
        driven_off = self._goes is not None and wanted is not self._goes
        if driven_off:
            self._goes, self.stopped_by = None, shift.cause.step
        if self.moves is not None and not self._halting:
            self._judge_cut(wanted, shift)
            if wanted is None:
                self._halt()
        if driven_off:
            self._waited = self._stroke in shift.past
            if not self._halting:
                self._stand_where_it_is()
        if wanted is None:
            return
        self._clock.call_off(*self._tickets)
        self._tickets.clear()
        self.moves, self._halting = None, False
        if self.end != (WHOLE_SHARE if wanted else 0):
            self._start(wanted, shift)

    def _judge_cut(self, wanted: bool | None, shift: Shift) -> None:
        if self._stroke not in shift.past:
            text = "stopped" if wanted is None else "reversed"
            self._clock.incident("cut-stroke", self.cylinder.name, shift.cause.step, f"{text} before its end")

    def _halt(self) -> None:
        self._halting = True
        overrun = self._clock.draw("overrun", self.cylinder.name, self.cylinder.overrun, self.strokes - 1)
        self._tickets.append(self._clock.at(self._clock.now + overrun, Turn.HALT, self._stand))

    def _stand(self) -> None:
        self._clock.call_off(*self._tickets)
        self._tickets.clear()
        self.moves, self._halting = None, False
        self._clock.log(f"cylinder {self.cylinder.name} stands")
        self._stand_where_it_is()

    def _stand_where_it_is(self) -> None:
        if self._waited:
            self.overshot = frozenset(edge.sensor for edge in self._passed)
            self._watcher.stands(self.cylinder.name)

    def _start(self, out: bool, shift: Shift) -> None:
        clock, now, name, number = self._clock, self._clock.now, self.cylinder.name, self.strokes
        self.strokes += 1
        self.moves = self._goes = out
        self._led_to, self._changed, self._passed, self.overshot = shift.past, set(), [], frozenset()
        self._started = now
        clock.log(f"cylinder {name} starts {_word(out)}")

        def choose(mark: int, span: Span) -> int:
            return clock.draw("mark", f"{name} {mark}", span, number)

        pace = Pace(self.cylinder, out, shift.span)
        if self.end is None:
            low, high = self._between
            behind = low if out else high
            times = rest_of_stroke(pace, behind, self._ahead(behind, out), now, choose)
        else:
            leaves = now + clock.draw("lag", name, self.cylinder.lag, number)
            timed_from = shift.asked_at if pace.stroke.from_coil else now
            times = full_stroke(pace, self._ahead(self.end, out), timed_from, leaves, choose)
            self._tickets.append(clock.at(leaves, Turn.MARK, lambda: self._leave_end(out)))
        for mark, time in times:
            self._tickets.append(clock.at(time, Turn.MARK, partial(self._reach, mark, out)))

    def _ahead(self, behind: int, out: bool) -> tuple[int, ...]:
        if out:
            return tuple(mark for mark in self._marks if mark > behind)
        return tuple(mark for mark in reversed(self._marks) if mark < behind)

    def _leave_end(self, out: bool) -> None:
        left = 0 if out else WHOLE_SHARE
        self.end = None
        self._settle_between(left, out)
        self._clock.log(f"cylinder {self.cylinder.name} leaves {left}")
        for sensor in self._sensors:
            if sensor.low == sensor.high == left:
                self._changed.add((sensor.name, False))
                self._lines[sensor.name].change(False)

    def _reach(self, mark: int, out: bool) -> None:
        self._clock.log(f"cylinder {self.cylinder.name} at {mark}")
        was_halting = self._halting
        if mark == (WHOLE_SHARE if out else 0):
            self.end, self.moves, self._halting = mark, None, False
            self._clock.call_off(*self._tickets)
            self._tickets.clear()
            self._watcher.arrived(self.cylinder.name, out)
        else:
            self._settle_between(mark, out)
        for sensor in self._sensors:
            near, far = (sensor.low, sensor.high) if out else (sensor.high, sensor.low)
            comes, goes = mark == near, mark == far and mark != near and self.end is None
            if comes or goes:
                self._changed.add((sensor.name, comes))
                self._passed.append(_Edge(mark, sensor.name, comes, self._clock.now))
                if comes:
                    self._watcher.entered(sensor.name, out)
                self._lines[sensor.name].change(comes)
        if was_halting and not self._halting:
            self._stand_where_it_is()

    def _settle_between(self, mark: int, out: bool) -> None:
        following = self._ahead(mark, out)[0]
        self._between = (min(mark, following), max(mark, following))


def _word(out: bool) -> str:
    return "out" if out else "in"
