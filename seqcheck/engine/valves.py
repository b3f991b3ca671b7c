"""Valves: from coils energized to positions reached.

Takes coil changes; gives shifts to the trace and positions reached to whoever follows the valve. One coil alone asks
for its position; none asks for rest, or for staying; both leave the valve as it was going. A change of what is asked
before the position is reached calls the shift off; a motor valve then stands between its ends.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Container, Mapping
from dataclasses import dataclass, field

from seqcheck.engine.conditions import Aspect
from seqcheck.engine.graph import Event
from seqcheck.engine.timeline import Order, Timeline
from seqcheck.engine.trace import CoilChange, Shift, Trace
from seqcheck.machine.conditions import TermKind
from seqcheck.machine.devices import Position, Valve, ValveReturn
from seqcheck.machine.model import Machine
from seqcheck.machine.time import Span

#: Told of a position reached: the valve, by which shift.
Reached = Callable[[str, Shift], None]

#: Told what aspects of a valve have become by an event.
Notice = Callable[[int, Mapping[Aspect, bool]], None]


@dataclass(slots=True)
class _State:
    """``between``: a motor valve that was switched off, or turned, on its way."""

    reached: Position
    between: bool = False
    shift: Shift | None = None
    latest: Shift | None = None
    energized: set[str] = field(default_factory=set)


class Valves:
    def __init__(
        self,
        machine: Machine,
        timeline: Timeline,
        trace: Trace,
        reached: Reached,
        notice: Notice,
        looked_at: Container[str],
    ) -> None:
        self._machine = machine
        self._timeline = timeline
        self._trace = trace
        self._reached = reached
        self._notice = notice
        self._looked_at = looked_at
        self._states = {name: _State(valve.starts) for name, valve in machine.valves.items()}
        self._changes: dict[tuple[str, bool], CoilChange] = {}
        self._count: Counter[tuple[str, bool]] = Counter()

    @property
    def state(self) -> tuple[object, ...]:
        return tuple(
            (
                name,
                state.reached.value,
                state.between,
                state.shift.to.value if state.shift else None,
                tuple(sorted(state.energized)),
            )
            for name, state in self._states.items()
        )

    @property
    def aspects(self) -> Mapping[Aspect, bool]:
        """All of them, as they are."""
        return {
            aspect: value
            for name, state in self._states.items()
            for aspect, value in _aspects(self._machine.valves[name], state).items()
        }

    def change(self, change: CoilChange) -> None:
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
        going_to = state.shift.to if state.shift else None if state.between else state.reached
        if asked == going_to:
            return
        event = change.event
        if state.shift is not None:
            self._call_off(valve, state, change)
        if asked is not None and (asked != state.reached or state.between):
            event = self._begin(valve, state, asked, change)
        self._tell(event, valve, state)

    def _asked(self, valve: Valve, state: _State) -> Position | None:
        """None where the valve is to stand still wherever it is."""
        for coil in state.energized:
            return self._machine.coils[coil].to
        if valve.kind is ValveReturn.MOTOR and (state.shift is not None or state.between):
            return None
        return valve.rest or state.reached

    def _call_off(self, valve: Valve, state: _State, change: CoilChange) -> None:
        shift, state.shift = state.shift, None
        assert shift is not None
        shift.called_off = change
        shift.taken_over = shift.to is Position.CENTRE and change.energized and change.coil != shift.by.coil
        self._timeline.call_off(shift.reached)
        state.between = valve.kind is ValveReturn.MOTOR

    def _begin(self, valve: Valve, state: _State, to: Position, change: CoilChange) -> int:
        """The valve sets out once the coil that moves it is alone: its own energizing and the other's release, in
        whichever order the two come. A motor valve that stands between its ends takes any part of its travel."""
        timeline = self._timeline
        if state.energized:
            (sole,) = state.energized
            by, number = self._changes[sole, True], self._count[sole, True] - 1
            span, name = self._machine.coils[sole].on, f"{sole} on"
        else:
            by, number = change, self._count[change.coil, False] - 1
            span, name = self._machine.coils[change.coil].off, f"{change.coil} off"
        if state.between:
            span = Span(0, span.greatest // 2, span.greatest)
        causes = [by.event]
        causes += [
            released.event
            for coil in valve.coils
            if coil != by.coil and (released := self._changes.get((coil, False))) is not None
        ]
        detail = to.value
        asked = timeline.last_of(Event("asked", valve.name, detail), causes)
        reached = timeline.event(Event("valve", valve.name, detail), timeline.delay(asked, span, "valve", name, number))
        shift = Shift(valve.name, to, asked, reached, by, span, state.latest)
        if state.latest is not None:
            state.latest.following = shift
        state.shift = state.latest = shift
        self._trace.shifts.append(shift)
        timeline.at(reached, Order.VALVE, lambda: self._arrive(valve, shift))
        return asked

    def _arrive(self, valve: Valve, shift: Shift) -> None:
        state = self._states[shift.valve]
        state.reached, state.between, state.shift = shift.to, False, None
        self._tell(shift.reached, valve, state)
        self._reached(shift.valve, shift)

    def _tell(self, event: int, valve: Valve, state: _State) -> None:
        if valve.name in self._looked_at:
            self._notice(event, _aspects(valve, state))


def _aspects(valve: Valve, state: _State) -> Mapping[Aspect, bool]:
    stands = None if state.shift is not None or state.between else state.reached
    values = {position.value: stands is position for position in Position}
    values["shifting"] = state.shift is not None
    values["closed"] = stands is (Position.A if valve.normally_open else Position.B)
    values["open"] = not values["closed"]
    return {(TermKind.VALVE, valve.name, aspect): value for aspect, value in values.items()}
