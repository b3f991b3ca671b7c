"""Valves: from coils energized to positions reached.

Takes coil changes; gives shifts to the trace and positions reached to whoever follows the valve. One coil alone asks
for its position; none asks for rest, or for staying; both leave the valve as it was going. A change of what is asked
before the position is reached calls the shift off.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable
from dataclasses import dataclass, field

from seqcheck.engine.graph import Event
from seqcheck.engine.timeline import Order, Timeline
from seqcheck.engine.trace import CoilChange, Origin, Shift, Trace
from seqcheck.machine.devices import Position, Valve
from seqcheck.machine.model import Machine

#: Told of a position reached: the valve, by which shift.
Reached = Callable[[str, Shift], None]


@dataclass(slots=True)
class _State:
    reached: Position
    shift: Shift | None = None
    latest: Shift | None = None
    energized: set[str] = field(default_factory=set)


class Valves:
    def __init__(self, machine: Machine, timeline: Timeline, trace: Trace, reached: Reached) -> None:
        self._machine = machine
        self._timeline = timeline
        self._trace = trace
        self._reached = reached
        self._states = {name: _State(valve.starts) for name, valve in machine.valves.items()}
        self._changes: dict[tuple[str, bool], CoilChange] = {}
        self._count: Counter[tuple[str, bool]] = Counter()

    @property
    def state(self) -> tuple[object, ...]:
        return tuple(
            (name, state.reached.value, state.shift.to.value if state.shift else None, tuple(sorted(state.energized)))
            for name, state in self._states.items()
        )

    def switch(self, target: str, on: bool, event: int, origin: Origin) -> None:
        """A coil will be energized or released at ``event``; plain outputs move nothing."""
        if target in self._machine.coils:
            change = CoilChange(target, on, event, origin)
            self._timeline.at(event, Order.COIL, lambda: self._change(change))

    def _change(self, change: CoilChange) -> None:
        valve = self._machine.valves[self._machine.coils[change.coil].valve]
        state = self._states[valve.name]
        self._changes[change.coil, change.energized] = change
        self._count[change.coil, change.energized] += 1
        if change.energized:
            state.energized.add(change.coil)
        else:
            state.energized.discard(change.coil)
        if len(state.energized) == 2:
            return
        asked = self._asked(valve, state)
        going_to = state.shift.to if state.shift else state.reached
        if asked == going_to:
            return
        if state.shift is not None:
            self._call_off(state, change)
        if asked != state.reached:
            self._begin(valve, state, asked, change)

    def _asked(self, valve: Valve, state: _State) -> Position:
        for coil in state.energized:
            return self._machine.coils[coil].to
        return valve.rest or state.reached

    def _call_off(self, state: _State, change: CoilChange) -> None:
        shift, state.shift = state.shift, None
        assert shift is not None
        shift.called_off = change
        shift.taken_over = shift.to is Position.CENTRE and change.energized and change.coil != shift.by.coil
        self._timeline.call_off(shift.reached)

    def _begin(self, valve: Valve, state: _State, to: Position, change: CoilChange) -> None:
        """The valve sets out once the coil that moves it is alone: its own energizing and the other's release, in
        whichever order the two come."""
        timeline = self._timeline
        if state.energized:
            (sole,) = state.energized
            by, number = self._changes[sole, True], self._count[sole, True] - 1
            span, name = self._machine.coils[sole].on, f"{sole} on"
        else:
            by, number = change, self._count[change.coil, False] - 1
            span, name = self._machine.coils[change.coil].off, f"{change.coil} off"
        causes = [by.event]
        causes += [
            released.event
            for coil in valve.coils
            if coil != by.coil and (released := self._changes.get((coil, False))) is not None
        ]
        asked = timeline.last_of(Event("asked", valve.name, to.value), causes)
        reached = timeline.event(
            Event("valve", valve.name, to.value), timeline.delay(asked, span, "valve", name, number)
        )
        shift = Shift(valve.name, to, asked, reached, by, state.latest)
        if state.latest is not None:
            state.latest.following = shift
        state.shift = state.latest = shift
        self._trace.shifts.append(shift)
        timeline.at(reached, Order.VALVE, lambda: self._arrive(shift))

    def _arrive(self, shift: Shift) -> None:
        state = self._states[shift.valve]
        state.reached, state.shift = shift.to, None
        self._reached(shift.valve, shift)
