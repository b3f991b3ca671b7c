"""Valves in time: coils energized and released go in, positions reached come out to the cylinders."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable

from seqcheck.machine.devices import Coil, Position, Valve, ValveReturn
from seqcheck.machine.model import Machine
from seqcheck.machine.time import Span
from tests.oracle.clock import Clock, Ticket, Turn
from tests.oracle.conditions import stands_at
from tests.oracle.pistons import Shift, start_of
from tests.oracle.reads import Cause


class ValvePlay:
    """``reached`` is the position it was at last; a shift under way is ``pending``. A motor valve that has been stopped
    or turned on its way is ``between`` its ends. ``tells(shift)`` whom a position reached concerns."""

    def __init__(self, clock: Clock, machine: Machine, valve: Valve, tells: Callable[[Shift], None]) -> None:
        self.valve = valve
        self.reached = start_of(valve)
        self.energized: set[str] = set()
        self._asked: Position | None = self.reached
        self._between = False
        self._clock = clock
        self._coils = {name: machine.coils[name] for name in valve.coils}
        self._tells = tells
        self._ended: dict[str, int] = {}
        self._releases: dict[str, Cause] = {}
        self._switched: Counter[tuple[str, bool]] = Counter()
        self._pending: tuple[Position, str, Ticket] | None = None

    def shows(self, aspect: str | None) -> bool:
        """What a rule sees: a position reached with no shift under way, or a shift."""
        if aspect == "shifting":
            return self._pending is not None
        if aspect == "open":
            return not self.shows("closed")
        return self._pending is None and not self._between and stands_at(self.valve, aspect, self.reached)

    def switch(self, name: str, on: bool, cause: Cause) -> None:
        """A coil is energized or released at the valve."""
        coil = self._coils[name]
        if on is (name in self.energized):
            return
        self._clock.log(f"coil {name} {'energized' if on else 'released'}")
        number = self._switched[name, on]
        self._switched[name, on] += 1
        if on:
            self._judge_handover(coil, cause)
            self.energized.add(name)
        else:
            self.energized.discard(name)
            self._releases[name] = cause
            self._ended[name] = self._clock.now + self._clock.draw("decay", name, coil.decay, number)
        self._ask(coil, cause)

    def _ask(self, changed: Coil, cause: Cause) -> None:
        motor = self.valve.kind is ValveReturn.MOTOR
        wanted: Position | None
        match sorted(self.energized):
            case []:
                wanted, mover, on = (None if motor else self.valve.rest or self.reached), changed, False
            case [only]:
                mover, on = self._coils[only], True
                wanted = mover.to
            case _:
                return
        if wanted is self._asked:
            return
        self._call_off(changed, cause)
        self._asked = wanted
        if wanted is not None and (self._between or wanted is not self.reached):
            self._shift(wanted, mover, on, changed, cause)

    def _shift(self, wanted: Position, mover: Coil, on: bool, changed: Coil, cause: Cause) -> None:
        """Set out. A shift belongs to the coil that moves the valve, by its energizing or by its release, and is
        numbered by how often that coil was energized or released before. The rest of a motor valve's way takes
        anything up to the whole."""
        past = cause.past.union(*(release.past for release in self._releases.values()))
        span = mover.on if on else mover.off
        if self._between:
            span = Span(0, span.greatest // 2, span.greatest)
        name, number = f"{mover.name} {'on' if on else 'off'}", self._switched[mover.name, on] - 1
        shift = Shift(self._clock.now, span, cause, past)
        time = self._clock.now + self._clock.draw("valve", name, span, number)
        ticket = self._clock.at(time, Turn.VALVE, lambda: self._reach(wanted, shift))
        self._pending = (wanted, changed.name, ticket)
        self._clock.log(f"valve {self.valve.name} asked for {wanted.value}")

    def _call_off(self, changed: Coil, cause: Cause) -> None:
        if self._pending is None:
            return
        position, mover, ticket = self._pending
        self._clock.call_off(ticket)
        self._pending = None
        self._between = self.valve.kind is ValveReturn.MOTOR
        if position is Position.CENTRE and changed.name != mover:
            return
        text = f"{changed.name} changes before {position.value} is reached"
        self._clock.incident("short-pulse", self.valve.name, cause.step, text)

    def _reach(self, position: Position, shift: Shift) -> None:
        self._pending, self._between = None, False
        self.reached = position
        self._clock.log(f"valve {self.valve.name} at {position.value}")
        self._tells(shift)

    def _judge_handover(self, coil: Coil, cause: Cause) -> None:
        if self.valve.gap is None:
            return
        for opposed in self.valve.coils:
            if opposed == coil.name:
                continue
            ended = self._ended.get(opposed)
            if opposed in self.energized:
                text = f"{coil.name} is energized while {opposed} still is"
            elif ended is not None and self._clock.now - ended < self.valve.gap:
                text = f"{coil.name} is energized {self._clock.now - ended} us after {opposed} ended"
            else:
                continue
            self._clock.incident("coil-handover", self.valve.name, cause.step, text)
