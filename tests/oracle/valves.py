"""Valves in time: coils energized and released go in, positions reached come out to the cylinders."""

from __future__ import annotations

from collections import Counter

from seqcheck.machine.devices import Coil, Position, Valve
from seqcheck.machine.model import Machine
from tests.oracle.clock import Clock, Ticket, Turn
from tests.oracle.pistons import CylinderPlay, Shift, start_of
from tests.oracle.visits import Cause


class ValvePlay:
    """``reached`` is the position it stands at; a shift under way is ``pending``."""

    def __init__(self, clock: Clock, machine: Machine, valve: Valve, cylinders: tuple[CylinderPlay, ...]) -> None:
        self.valve = valve
        self.reached = self.asked = start_of(valve)
        self._clock = clock
        self._coils = {name: machine.coils[name] for name in valve.coils}
        self._cylinders = cylinders
        self._energized: set[str] = set()
        self._ended: dict[str, int] = {}
        self._releases: dict[str, Cause] = {}
        self._switched: Counter[tuple[str, bool]] = Counter()
        self._pending: tuple[Position, str, Ticket] | None = None

    def switch(self, name: str, on: bool, cause: Cause) -> None:
        """A coil is energized or released at the valve."""
        coil = self._coils[name]
        if on is (name in self._energized):
            return
        self._clock.log(f"coil {name} {'energized' if on else 'released'}")
        number = self._switched[name, on]
        self._switched[name, on] += 1
        if on:
            self._judge_handover(coil, cause)
            self._energized.add(name)
        else:
            self._energized.discard(name)
            self._releases[name] = cause
            self._ended[name] = self._clock.now + self._clock.draw("decay", name, coil.decay, number)
        self._ask(coil, cause)

    def _ask(self, changed: Coil, cause: Cause) -> None:
        match sorted(self._energized):
            case []:
                wanted, mover, on = self.valve.rest or self.reached, changed, False
            case [only]:
                mover, on = self._coils[only], True
                wanted = mover.to
            case _:
                return
        if wanted is self.asked:
            return
        self._call_off(changed, cause)
        self.asked = wanted
        if wanted is not self.reached:
            self._shift(wanted, mover, on, changed, cause)

    def _shift(self, wanted: Position, mover: Coil, on: bool, changed: Coil, cause: Cause) -> None:
        """Set out. A shift belongs to the coil that moves the valve, by its energizing or by its release, and is
        numbered by how often that coil was energized or released before."""
        past = cause.past.union(*(release.past for release in self._releases.values()))
        shift = Shift(self._clock.now, mover.on if on else mover.off, cause, past)
        name, number = f"{mover.name} {'on' if on else 'off'}", self._switched[mover.name, on] - 1
        time = self._clock.now + self._clock.draw("valve", name, shift.span, number)
        ticket = self._clock.at(time, Turn.VALVE, lambda: self._reach(wanted, shift))
        self._pending = (wanted, changed.name, ticket)
        self._clock.log(f"valve {self.valve.name} asked for {wanted.value}")

    def _call_off(self, changed: Coil, cause: Cause) -> None:
        if self._pending is None:
            return
        position, mover, ticket = self._pending
        self._clock.call_off(ticket)
        self._pending = None
        if position is Position.CENTRE and changed.name != mover:
            return
        text = f"{changed.name} changes before {position.value} is reached"
        self._clock.incident("short-pulse", self.valve.name, cause.step, text)

    def _reach(self, position: Position, shift: Shift) -> None:
        self._pending = None
        self.reached = position
        self._clock.log(f"valve {self.valve.name} at {position.value}")
        for cylinder in self._cylinders:
            cylinder.follow(position, shift)

    def _judge_handover(self, coil: Coil, cause: Cause) -> None:
        if self.valve.gap is None:
            return
        for opposed in self.valve.coils:
            if opposed == coil.name:
                continue
            ended = self._ended.get(opposed)
            if opposed in self._energized:
                text = f"{coil.name} is energized while {opposed} still is"
            elif ended is not None and self._clock.now - ended < self.valve.gap:
                text = f"{coil.name} is energized {self._clock.now - ended} us after {opposed} ended"
            else:
                continue
            self._clock.incident("coil-handover", self.valve.name, cause.step, text)
