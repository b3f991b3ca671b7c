"""What goes wrong around a step: opposed coils, dwells too short, signals that are stale or missed."""

from __future__ import annotations

from seqcheck.machine.conditions import TermKind
from seqcheck.machine.devices import Cylinder, OnValve, Position, Valve
from seqcheck.machine.model import Machine
from seqcheck.machine.steps import CommandKind
from seqcheck.machine.time import WHOLE_SHARE
from tests.oracle.clock import Clock, Turn
from tests.oracle.inputs import InputLine
from tests.oracle.pistons import CylinderPlay, direction, start_of
from tests.oracle.visits import ActiveVisit, Cause, Past


class StepJudge:
    """``active`` is the controller's own list of the steps under way. ``_course`` is where each cylinder was last
    sent by commands: True out, False in, None stopped."""

    def __init__(
        self,
        clock: Clock,
        machine: Machine,
        cylinders: dict[str, CylinderPlay],
        lines: dict[str, InputLine],
        active: list[ActiveVisit],
    ) -> None:
        self._clock = clock
        self._machine = machine
        self._cylinders = cylinders
        self._lines = lines
        self._active = active
        self._judged: list[ActiveVisit] = []
        self._opposed: frozenset[str] = frozenset()
        self._course = {
            name: direction(play.cylinder, start_of(self._valve_of(play.cylinder))) for name, play in cylinders.items()
        }

    # --- commands ---

    def commanded(
        self,
        entered: tuple[ActiveVisit, ...],
        before: frozenset[str],
        after: frozenset[str],
        causes: dict[str, Cause],
    ) -> None:
        self._judge_opposed(after, causes)
        for visit in entered:
            self._note_moves(visit, before, after)
            for name in self._cylinders:
                self._judge_overshoot(visit, name)
        for name, play in self._cylinders.items():
            self._follow_course(name, play.cylinder, after)

    def _judge_opposed(self, after: frozenset[str], causes: dict[str, Cause]) -> None:
        opposed = frozenset(
            name for name, valve in self._machine.valves.items() if len(after.intersection(valve.coils)) > 1
        )
        for name in sorted(opposed - self._opposed):
            coils = self._machine.valves[name].coils
            step = next((causes[coil].step for coil in coils if coil in causes and coil in after), None)
            self._clock.incident("opposed-coils", name, step, f"{' and '.join(coils)} are commanded at once")
        self._opposed = opposed

    def _note_moves(self, visit: ActiveVisit, before: frozenset[str], after: frozenset[str]) -> None:
        for command in visit.step.commands:
            coil = self._machine.coils.get(command.target)
            if coil is None or (coil.name in before) is (coil.name in after):
                continue
            if (command.kind is not CommandKind.RESET) is not (coil.name in after):
                continue
            valve = self._machine.valves[coil.valve]
            position: Position | None = coil.to if coil.name in after else valve.rest
            if position is None:
                continue
            for name, play in self._cylinders.items():
                out = direction(play.cylinder, position)
                if self._valve_of(play.cylinder) is valve and out is not None and self._is_move(name, play, out):
                    visit.sent[name] = out

    def _is_move(self, name: str, play: CylinderPlay, out: bool) -> bool:
        """A command is no move where the cylinder was sent there before, or is stopped and stands there already."""
        course = self._course[name]
        return course is not out if course is not None else play.end != _end(out)

    def _follow_course(self, name: str, cylinder: Cylinder, after: frozenset[str]) -> None:
        valve = self._valve_of(cylinder)
        on = [coil for coil in valve.coils if coil in after]
        if len(on) == 1:
            self._course[name] = direction(cylinder, self._machine.coils[on[0]].to)
        elif not on and valve.rest is not None:
            self._course[name] = direction(cylinder, valve.rest)

    def _valve_of(self, cylinder: Cylinder) -> Valve:
        assert isinstance(cylinder.drive, OnValve)
        return self._machine.valves[cylinder.drive.valve]

    # --- what the plant and the inputs tell ---

    def arrived(self, cylinder: str, out: bool) -> None:
        for visit in (*self._active, *self._judged):
            visit.arrived.add((cylinder, out))

    def entered_range(self, sensor: str, out: bool) -> None:
        for visit in (*self._active, *self._judged):
            visit.entered_range.add((sensor, out))

    def seen(self, sensor: str, on: bool) -> None:
        for visit in self._active:
            for part in visit.parts:
                if part.subject != sensor or part.kind is not TermKind.SENSOR:
                    continue
                if part.wanted is on:
                    visit.came.add(part)
                elif part in visit.came:
                    visit.came.discard(part)
                    text = f"it is seen to come and to go before {visit.step.name} is left"
                    if len(visit.parts) > 1 or visit.step.steady is not None:
                        # Parts need not come together, and bounces are what steady is for.
                        self._clock.bounce(sensor, visit.step.name, text)
                    else:
                        self._clock.incident("missed-signal", sensor, visit.step.name, text)

    def vanished(self, sensor: str, on: bool, came: int) -> None:
        for visit in self._active:
            for part in visit.parts:
                if part.subject == sensor and part.wanted is on and visit.entered < came:
                    text = f"it comes and goes unseen while {visit.step.name} waits for it"
                    self._clock.incident("missed-signal", sensor, visit.step.name, text)

    def spoils(self, sensor: str, on: bool) -> bool:
        """Whether a step loses what it waits for. One whose own commands move the piston there is only rid of what is
        on from before."""
        return any(
            part.subject == sensor and part.wanted is not on and not self._is_from_before(visit, sensor)
            for visit in self._active
            for part in visit.parts
        )

    def _is_from_before(self, visit: ActiveVisit, sensor: str) -> bool:
        out = visit.sent.get(self._machine.sensors[sensor].cylinder)
        return out is not None and (sensor, out) not in visit.entered_range

    def stands(self, cylinder: str) -> None:
        """A piston has been stopped or turned."""
        for visit in self._active:
            self._judge_overshoot(visit, cylinder)

    def _judge_overshoot(self, visit: ActiveVisit, cylinder: str) -> None:
        for part in visit.parts:
            if part.kind is TermKind.SENSOR and part.subject in self._cylinders[cylinder].overshot:
                text = f"{cylinder} has run past an edge of {part.subject}, which {visit.step.name} asks"
                self._clock.incident("overshoot", cylinder, self._cylinders[cylinder].stopped_by, text)

    # --- leaving ---

    def leaves(self, visit: ActiveVisit) -> Past:
        """Judges the step, and gives the strokes of which it has waited for a sensor."""
        self._judge_leaving(visit)
        past: Past = frozenset()
        for part in visit.parts:
            if part.kind is TermKind.SENSOR:
                cylinder = self._cylinders[self._machine.sensors[part.subject].cylinder]
                past |= cylinder.waited_for(part.subject, part.wanted)
        return past

    def _judge_leaving(self, visit: ActiveVisit) -> None:
        """At the end of the instant: a piston that comes as the step is left has come."""
        early = self._early(visit)
        stale = self._stale(visit)
        if not early and not stale:
            return
        self._judged.append(visit)

        def judge() -> None:
            self._judged.remove(visit)
            for name in sorted(early & self._early(visit)):
                text = f"left before {name} has reached its end"
                self._clock.incident("early-dwell", visit.step.name, visit.step.name, text)
            for name in sorted(stale & self._stale(visit)):
                text = f"{visit.step.name} is left on it before the piston has come there"
                self._clock.incident("stale-signal", name, visit.step.name, text)

        self._clock.at(self._clock.now, Turn.VERDICT, judge)

    def _early(self, visit: ActiveVisit) -> set[str]:
        """Cylinders on their way, where the step has nothing but a dwell."""
        if visit.step.until is not None or visit.step.dwell is None:
            return set()
        return {
            name
            for name, out in visit.sent.items()
            if (name, out) not in visit.arrived
            and not (self._cylinders[name].end == _end(out) and self._cylinders[name].moves is None)
        }

    def _stale(self, visit: ActiveVisit) -> set[str]:
        """Sensors at the end of a move that the step waited for, the piston not having come there by that move; and
        sensors on the way that the piston has left, and not come to again."""
        stale: set[str] = set()
        for part in visit.parts:
            if part.kind is not TermKind.SENSOR or not part.wanted:
                continue
            sensor = self._machine.sensors[part.subject]
            out = visit.sent.get(sensor.cylinder)
            if out is None:
                continue
            if not sensor.low <= _end(out) <= sensor.high and self._lines[sensor.name].physical:
                continue
            if (sensor.name, out) not in visit.entered_range:
                stale.add(sensor.name)
        return stale


def _end(out: bool) -> int:
    return WHOLE_SHARE if out else 0
