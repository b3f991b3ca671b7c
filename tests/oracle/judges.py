"""What goes wrong around a step: opposed coils, dwells too short, signals that are stale or missed."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Protocol

from seqcheck.machine.conditions import TermKind, terms_of
from seqcheck.machine.devices import FollowingSignal, OutsideSignal, Position
from seqcheck.machine.model import Machine
from seqcheck.machine.steps import CommandKind
from seqcheck.machine.time import WHOLE_SHARE
from tests.oracle.clock import Clock, Turn
from tests.oracle.conditions import Literal, is_conjunction
from tests.oracle.inputs import InputLine
from tests.oracle.pistons import CylinderPlay, direction, start_of, valves_of
from tests.oracle.reads import Cause, Past
from tests.oracle.visits import ActiveVisit, Wait


class UnderWay(Protocol):
    """The controller, as far as it is asked here."""

    active: list[ActiveVisit]

    def waits(self) -> Iterator[Wait]: ...


class StepJudge:
    """``_asked`` is where each valve was last sent by commands, ``_course`` likewise each cylinder: True out, False in,
    None stopped."""

    def __init__(
        self,
        clock: Clock,
        machine: Machine,
        cylinders: dict[str, CylinderPlay],
        lines: dict[str, InputLine],
        under_way: UnderWay,
    ) -> None:
        self._clock = clock
        self._machine = machine
        self._cylinders = cylinders
        self._lines = lines
        self._under_way = under_way
        self._judged: list[ActiveVisit] = []
        self._opposed: frozenset[str] = frozenset()
        self._asked = {name: start_of(valve) for name, valve in machine.valves.items()}
        self._course = {name: direction(machine, play.cylinder, self._asked) for name, play in cylinders.items()}

    # --- commands ---

    def commanded(
        self,
        entered: tuple[ActiveVisit, ...],
        before: frozenset[str],
        after: frozenset[str],
        causes: dict[str, Cause],
    ) -> None:
        self._judge_opposed(after, causes)
        asked = {name: self._asked_of(name, after) for name in self._machine.valves}
        course = {name: direction(self._machine, play.cylinder, asked) for name, play in self._cylinders.items()}
        for visit in entered:
            self._note_moves(visit, before, after, course)
            for name in self._cylinders:
                self._judge_overshoot(visit, name)
        self._asked, self._course = asked, course

    def _asked_of(self, name: str, after: frozenset[str]) -> Position:
        valve = self._machine.valves[name]
        match [coil for coil in valve.coils if coil in after]:
            case []:
                return valve.rest or self._asked[name]
            case [only]:
                return self._machine.coils[only].to
            case _:
                return self._asked[name]

    def _judge_opposed(self, after: frozenset[str], causes: dict[str, Cause]) -> None:
        opposed = frozenset(
            name for name, valve in self._machine.valves.items() if len(after.intersection(valve.coils)) > 1
        )
        for name in sorted(opposed - self._opposed):
            coils = self._machine.valves[name].coils
            step = next((causes[coil].step for coil in coils if coil in causes and coil in after), None)
            self._clock.incident("opposed-coils", name, step, f"{' and '.join(coils)} are commanded at once")
        self._opposed = opposed

    def _note_moves(
        self, visit: ActiveVisit, before: frozenset[str], after: frozenset[str], course: dict[str, bool | None]
    ) -> None:
        for command in visit.step.commands:
            coil = self._machine.coils.get(command.target)
            if coil is None or (coil.name in before) is (coil.name in after):
                continue
            if (command.kind is not CommandKind.RESET) is not (coil.name in after):
                continue
            for name, play in self._cylinders.items():
                out = course[name]
                if coil.valve in valves_of(play.cylinder) and out is not None and self._is_move(name, play, out):
                    visit.sent[name] = out

    def _is_move(self, name: str, play: CylinderPlay, out: bool) -> bool:
        """A command is no move where the cylinder was sent there before, or is stopped and stands there already."""
        course = self._course[name]
        return course is not out if course is not None else play.end != _end(out)

    # --- what the plant and the inputs tell ---

    def arrived(self, cylinder: str, out: bool) -> None:
        for visit in (*self._under_way.active, *self._judged):
            visit.arrived.add((cylinder, out))

    def entered_range(self, sensor: str, out: bool) -> None:
        for visit in (*self._under_way.active, *self._judged):
            visit.entered_range.add((sensor, out))

    def seen(self, line: str, on: bool) -> None:
        """An input is seen to change."""
        for wait in self._under_way.waits():
            for literal in wait.literals:
                if literal.subject != line:
                    continue
                if literal.wanted is on:
                    wait.came.add(literal)
                elif literal in wait.came:
                    wait.came.discard(literal)
                    self._miss(wait, line, f"it is seen to come and to go before {wait.name} is left", lone=True)

    def vanished(self, line: str, on: bool, came: int) -> None:
        for wait in self._under_way.waits():
            for literal in wait.literals:
                if literal.subject == line and literal.wanted is on and wait.entered < came:
                    self._miss(wait, line, f"it comes and goes unseen while {wait.name} waits for it", lone=False)

    def _miss(self, wait: Wait, line: str, text: str, lone: bool) -> None:
        """What is missed where it is all that a step waits for, or (not ``lone``) is needed, is an incident. Else the
        step may be left all the same: parts need not come together, and bounces are what steady is for."""
        hard = isinstance(wait, ActiveVisit) and is_conjunction(wait.step.until)
        if hard and lone:
            hard = isinstance(wait, ActiveVisit) and len(wait.literals) == 1 and wait.step.steady is None
        if hard:
            self._clock.incident("missed-signal", line, wait.name, text)
        else:
            self._clock.bounce(line, wait.name, text)

    def spoils(self, line: str, on: bool) -> bool:
        """Whether a step loses what it waits for. One whose own commands move the piston there is only rid of what is
        on from before."""
        return any(
            literal.subject == line and literal.wanted is not on and not self._is_from_before(wait, line)
            for wait in self._under_way.waits()
            for literal in wait.literals
        )

    def _is_from_before(self, wait: Wait, line: str) -> bool:
        sensor = self._machine.sensors.get(line)
        if sensor is None or not isinstance(wait, ActiveVisit):
            return False
        out = wait.sent.get(sensor.cylinder)
        return out is not None and (line, out) not in wait.entered_range

    def stands(self, cylinder: str) -> None:
        """A piston has been stopped or turned."""
        for wait in self._under_way.waits():
            self._judge_overshoot(wait, cylinder)

    def _judge_overshoot(self, wait: Wait, cylinder: str) -> None:
        for literal in wait.literals:
            if literal.kind is TermKind.SENSOR and literal.subject in self._cylinders[cylinder].overshot:
                text = f"{cylinder} has run past an edge of {literal.subject}, which {wait.name} asks"
                self._clock.incident("overshoot", cylinder, self._cylinders[cylinder].stopped_by, text)

    # --- leaving ---

    def leaves(self, wait: Wait) -> Past:
        """Judges the step, and gives the strokes that a sensor, or a signal that follows the cylinder, has ended."""
        if isinstance(wait, ActiveVisit):
            self._judge_leaving(wait)
        past: Past = frozenset()
        for literal in wait.grounds():
            past |= self._strokes_behind(literal)
        return past

    def _strokes_behind(self, literal: Literal) -> Past:
        if literal.kind is TermKind.SENSOR:
            cylinder = self._machine.sensors[literal.subject].cylinder
            return self._cylinders[cylinder].waited_for(literal.subject, literal.wanted)
        past: Past = frozenset()
        signal = self._machine.signals.get(literal.subject)
        if literal.kind is TermKind.SIGNAL and isinstance(signal, FollowingSignal):
            for name in self._cylinders_of(signal):
                past |= self._cylinders[name].waited_for_follower(self._lines[signal.name].physical_came)
        return past

    def _cylinders_of(self, signal: FollowingSignal) -> Iterator[str]:
        """The cylinders that a signal follows, by themselves, their sensors, or another signal."""
        for term in terms_of(signal.follows):
            match term.kind:
                case TermKind.CYLINDER:
                    yield term.subject
                case TermKind.SENSOR:
                    yield self._machine.sensors[term.subject].cylinder
                case TermKind.SIGNAL:
                    other = self._machine.signals[term.subject]
                    if not isinstance(other, OutsideSignal):
                        yield from self._cylinders_of(other)
                case _:
                    pass

    def _judge_leaving(self, visit: ActiveVisit) -> None:
        """At the end of the instant: a piston that comes as the step is left has come."""
        early = self._early(visit)
        stale = self._stale(visit) & {literal.subject for literal in visit.literals if visit.needs(literal)}
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
        for literal in visit.literals:
            if literal.kind is not TermKind.SENSOR or not literal.wanted:
                continue
            sensor = self._machine.sensors[literal.subject]
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
