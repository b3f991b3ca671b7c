"""Cylinders: from valve positions reached to marks passed.

Takes positions that valves reach; gives strokes and stops to the trace and sensor changes to the inputs. Where a
piston that was stopped between its ends may stand at one of several places, depending on times, and nobody looks,
its region says so (by cylinder and number of the stroke that was stopped); the next stroke then takes any of them
as its start. Where nobody knows them yet, they are found as each piston stops.
"""

from __future__ import annotations

from collections.abc import Callable, Container, Mapping
from dataclasses import dataclass, field, replace
from functools import partial

from seqcheck.engine.conditions import Alternatives, Aspect, Literal, alternatives_of, holding
from seqcheck.engine.graph import Event
from seqcheck.engine.regions import Placing, place
from seqcheck.engine.strokes import Region, marks_of, reached_by
from seqcheck.engine.timeline import Order, Timeline
from seqcheck.engine.trace import Shift, Stroke, Trace
from seqcheck.engine.travel import LEAVING, START, Reach, Travel
from seqcheck.machine.conditions import Term, TermKind
from seqcheck.machine.devices import Cylinder, OnValve, Position, Valve
from seqcheck.machine.model import Machine
from seqcheck.machine.records import record
from seqcheck.machine.time import NO_TIME, Span

#: Told of a sensor's own change: the sensor, on or off, at which event.
Sense = Callable[[str, bool, int], None]

Regions = Mapping[tuple[str, int], Region]


@record
class Placed:
    """Where pistons stand once they have been stopped: ``regions`` says it of the first so many ``stops`` (None: of
    all), and a piston of which it says nothing stands where it was played to; of later ones nobody knows it yet."""

    regions: Regions
    stops: int | None = None

    def knows(self, stop: int) -> bool:
        return self.stops is None or stop < self.stops


NOT_PLACED = Placed({}, 0)

#: Told what aspects of a cylinder have become by an event.
Notice = Callable[[int, Mapping[Aspect, bool]], None]


@dataclass(slots=True)
class _Piston:
    """``drives``: for out (True) and in, when the valves ask for it."""

    cylinder: Cylinder
    drives: Mapping[bool, Alternatives]
    #: Those that its drives ask.
    valves: tuple[str, ...]
    marks: tuple[int, ...]
    #: What events at the marks are told by.
    details: tuple[str, ...]
    region: Region
    #: Where the run that is being played has it, within ``region``.
    stood: Region
    sent: bool | None
    stroke: Stroke | None = None
    strokes: int = 0
    #: Off its end, or started between its marks, and not yet standing again.
    moving: bool = False
    #: The event at which a stopped piston stands still; None unless it is running on.
    runs_on_until: int | None = None

    #: What lies ahead of it has been worked out for these strokes, from these places.
    plans: dict[tuple[bool, Span, Region, Region], tuple[Reach, ...]] = field(default_factory=dict)
    #: Where its valves in these positions send it, and what makes that so.
    sent_by: dict[tuple[Position, ...], tuple[bool | None, tuple[Literal, ...]]] = field(default_factory=dict)

    @property
    def last(self) -> int:
        return len(self.marks) - 1

    def plan(self, travel: Travel) -> tuple[Reach, ...]:
        """The marks ahead of the piston where it is now."""
        key = travel.out, travel.valve, self.region, self.stood
        plan = self.plans.get(key)
        if plan is None:
            from_end = self.region.low == self.region.high
            plan = travel.from_end(self.region.low) if from_end else travel.from_between(self.region, self.stood)
            self.plans[key] = plan
        return plan


class Cylinders:
    def __init__(
        self,
        machine: Machine,
        timeline: Timeline,
        trace: Trace,
        placed: Placed,
        sense: Sense,
        notice: Notice,
        looked_at: Container[str],
    ) -> None:
        self._machine = machine
        self._timeline = timeline
        self._trace = trace
        self._placed = placed
        #: Those that strokes were started from, or would be.
        self.regions: dict[tuple[str, int], Region] = {}
        #: The strokes that have been stopped, one after the other.
        self.stops: list[tuple[str, int]] = []
        #: As they were found on the way.
        self.placings: dict[Stroke, Placing] = {}
        self._sense = sense
        self._notice = notice
        self._looked_at = looked_at
        self._pistons: dict[str, _Piston] = {}
        self._on_valve: dict[str, list[_Piston]] = {}
        #: For each valve the position that it has reached last, and by which shift.
        self._reached = {name: valve.starts for name, valve in machine.valves.items()}
        self._shifts: dict[str, Shift] = {}
        self._sensor_on: dict[str, bool] = {}
        for name, cylinder in machine.cylinders.items():
            marks = trace.marks[name] = marks_of(machine, cylinder)
            start = Region.exactly(marks.index(cylinder.start))
            drives = drives_of(machine, cylinder)
            valves = sorted({literal.term.subject for either in drives.values() for one in either for literal in one})
            piston = _Piston(cylinder, drives, tuple(valves), marks, tuple(map(str, marks)), start, start, None)
            piston.sent = self._sent(piston)[0]
            self._pistons[name] = piston
            for valve in valves:
                self._on_valve.setdefault(valve, []).append(piston)
            for sensor_name in cylinder.sensors:
                sensor = machine.sensors[sensor_name]
                self._sensor_on[sensor_name] = sensor.covers(cylinder.start)

    @property
    def sensors_on(self) -> Mapping[str, bool]:
        return self._sensor_on

    @property
    def aspects(self) -> Mapping[Aspect, bool]:
        """All of them, as they are."""
        return {aspect: value for piston in self._pistons.values() for aspect, value in _aspects_of(piston).items()}

    @property
    def state(self) -> tuple[object, ...]:
        pistons = tuple(
            (
                name,
                piston.region.low,
                piston.region.high,
                tuple(sorted(piston.region.rests)),
                piston.stroke is not None and piston.stroke.out,
                piston.stroke is not None,
                piston.sent,
                piston.moving,
            )
            for name, piston in self._pistons.items()
        )
        return pistons, tuple(sorted(self._sensor_on.items()))

    def follow(self, valve: str, shift: Shift) -> None:
        """The valve has reached a position: what it feeds sets out, turns or stops."""
        self._reached[valve] = shift.to
        self._shifts[valve] = shift
        for piston in self._on_valve.get(valve, ()):
            sent, reason = self._sent(piston)
            if sent == piston.sent:
                continue
            piston.sent = sent
            drive = self._drive(piston, shift, reason)
            self._part_from(piston, drive, sent)
            at_end = piston.region == Region.exactly(piston.last if sent else 0)
            if sent is not None and piston.stroke is None and not at_end:
                self._begin(piston, sent, drive)
            self._tell(piston, drive.reached)

    def _sent(self, piston: _Piston) -> tuple[bool | None, tuple[Literal, ...]]:
        """Out, in (False) or nowhere, and which positions of valves make it so."""
        reached = tuple([self._reached[valve] for valve in piston.valves])
        sent = piston.sent_by.get(reached)
        if sent is None:
            sent = piston.sent_by[reached] = self._sent_now(piston)
        return sent

    def _sent_now(self, piston: _Piston) -> tuple[bool | None, tuple[Literal, ...]]:
        held = {out: holding(piston.drives[out], self._is_so) for out in (True, False)}
        asked = [out for out, reason in held.items() if reason is not None]
        if len(asked) == 1:
            return asked[0], held[asked[0]] or ()
        return None, tuple(literal for reason in held.values() for literal in reason or ())

    def _is_so(self, literal: Literal) -> bool:
        valve = self._machine.valves[literal.term.subject]
        return stands(valve, self._reached[valve.name], literal.term) == literal.wanted

    def _drive(self, piston: _Piston, shift: Shift, reason: tuple[Literal, ...]) -> Shift:
        """The shift that drives the piston otherwise; where it takes several valves, the last of theirs."""
        valves = {literal.term.subject for literal in reason} | {shift.valve}
        if len(valves) == 1:
            return shift
        shifts = [self._shifts[valve] for valve in sorted(valves) if valve in self._shifts]
        last = self._timeline.graph.without_idle(one.reached for one in shifts)
        if last == (shift.reached,):
            return shift
        reached = self._timeline.last_of(Event("drive", piston.cylinder.name), last)
        return replace(shift, reached=reached, parts=tuple(one for one in shifts if one.reached in last))

    # Ending a stroke -------------------------------------------------------------------------------------------

    def _part_from(self, piston: _Piston, shift: Shift, out: bool | None) -> None:
        """The valve no longer drives the piston as before: a stroke under way ends, one that is done is over."""
        stroke = self._latest(piston)
        if stroke is None:
            return
        if stroke.away is None and out != stroke.out:
            stroke.away = shift
            stroke.stands = shift.reached
            overrun = piston.cylinder.overrun
            if out is None and overrun != NO_TIME:
                arc = self._timeline.delay(shift.reached, overrun, "overrun", stroke.cylinder, stroke.number)
                stroke.stands = self._timeline.event(Event("stands", stroke.cylinder), arc)
                if piston.stroke is not None:
                    piston.runs_on_until = stroke.stands
                    self._timeline.at(stroke.stands, Order.STOP, lambda: self._run_out(piston, stroke))
                    return
            self._stand_still(piston)
        elif piston.runs_on_until is not None and out is not None:
            stroke.stands = shift.reached
            self._stand_still(piston)

    def _latest(self, piston: _Piston) -> Stroke | None:
        strokes = self._trace.strokes_of.get(piston.cylinder.name)
        return strokes[-1] if strokes else None

    def _run_out(self, piston: _Piston, stroke: Stroke) -> None:
        assert stroke.stands is not None
        self._stand_still(piston)
        self._tell(piston, stroke.stands)

    def _stand_still(self, piston: _Piston) -> None:
        stroke = self._latest(piston)
        assert stroke is not None
        if piston.runs_on_until is not None:
            self._timeline.call_off(piston.runs_on_until)
            piston.runs_on_until = None
        if piston.stroke is not None:
            for _, event in stroke.marks[stroke.passed :]:
                self._timeline.call_off(event)
            if stroke.leaves is not None:
                self._timeline.call_off(stroke.leaves)
            stroke.cut = True
            piston.stroke = None
            piston.moving = False
        piston.stood = stroke.stood = piston.region
        key = stroke.cylinder, stroke.number
        known = self._placed.knows(len(self.stops))
        region = self._placed.regions.get(key) if known else self._found(stroke)
        self.stops.append(key)
        if region is not None:
            piston.region = self.regions[key] = region

    def _found(self, stroke: Stroke) -> Region | None:
        placing = self.placings[stroke] = place(self._trace, stroke)
        return None if placing.region == stroke.stood else placing.region

    # Beginning one ---------------------------------------------------------------------------------------------

    def _begin(self, piston: _Piston, out: bool, shift: Shift) -> None:
        name = piston.cylinder.name
        stroke = Stroke(name, out, piston.strokes, shift, piston.region)
        piston.strokes += 1
        piston.stroke = stroke
        self._trace.strokes.append(stroke)
        self._trace.strokes_of.setdefault(name, []).append(stroke)
        self._leave_end(piston, stroke)
        piston.moving = stroke.leaves is None or piston.stood != Region.exactly(0 if out else piston.last)
        stroke.marks = self._plan(piston, stroke)
        for index, event in stroke.marks:
            self._timeline.at(event, Order.MARK, partial(self._pass, piston, index, event))

    def _leave_end(self, piston: _Piston, stroke: Stroke) -> None:
        """The piston comes off the end at which it stands, or may stand."""
        start = 0 if stroke.out else piston.last
        if start in piston.region.rests:
            arc = self._timeline.delay(stroke.shift.reached, piston.cylinder.lag, "lag", stroke.cylinder, stroke.number)
            leaves = self._timeline.event(Event("leaves", stroke.cylinder, piston.details[start]), arc)
            stroke.leaves = leaves
            self._timeline.at(leaves, Order.MARK, partial(self._come_off, piston, start, leaves))

    def _come_off(self, piston: _Piston, start: int, event: int) -> None:
        if piston.region == Region.exactly(start):
            piston.region = Region(0, 1) if start == 0 else Region(start - 1, start)
        piston.moving = True
        for name in piston.cylinder.sensors:
            sensor = self._machine.sensors[name]
            if sensor.low == sensor.high == piston.marks[start]:
                self._set_sensor(name, False, event)
        self._tell(piston, event)

    def _plan(self, piston: _Piston, stroke: Stroke) -> tuple[tuple[int, int], ...]:
        """The events at which the marks ahead will be reached, in the order of travel."""
        timeline, shift, region = self._timeline, stroke.shift, piston.region
        travel = Travel(piston.cylinder, piston.marks, stroke.out, shift.time)
        plan = piston.plan(travel)
        since = {START: shift.reached}
        if region.low == region.high:
            assert stroke.leaves is not None
            since = {START: shift.asked if travel.timed_from_coil else shift.reached, LEAVING: stroke.leaves}
        marks: list[tuple[int, int]] = []
        for number, reach in enumerate(plan):
            position = piston.details[reach.mark]
            name = f"{stroke.cylinder} {position}"
            arcs = [
                timeline.delay(since[part.since], part.span, part.drawn, name, stroke.number)
                if part.drawn
                else timeline.loose(since[part.since], part.span)
                for part in reach.parts
            ]
            event = Event("may pass" if reach.only_if else "mark", stroke.cylinder, position)
            since[number] = timeline.event(event, *arcs)
            if not reach.only_if:
                marks.append((reach.mark, since[number]))
        return tuple(marks)

    # Passing marks ---------------------------------------------------------------------------------------------

    def _pass(self, piston: _Piston, index: int, event: int) -> None:
        stroke = piston.stroke
        assert stroke is not None
        stroke.passed += 1
        if event == stroke.end:
            piston.region = Region.exactly(index)
            piston.stroke = None
            piston.moving = False
        elif stroke.out:
            piston.region = Region(index, max(index + 1, piston.region.high))
        else:
            piston.region = Region(min(index - 1, piston.region.low), index)
        for name in piston.cylinder.sensors:
            value = reached_by(self._machine.sensors[name], piston.marks[index], stroke.out)
            if value is not None:
                self._set_sensor(name, value, event)
        self._tell(piston, event)

    def _tell(self, piston: _Piston, event: int) -> None:
        if piston.cylinder.name in self._looked_at:
            self._notice(event, _aspects_of(piston))

    def _set_sensor(self, name: str, value: bool, event: int) -> None:
        if self._sensor_on[name] != value:
            self._sensor_on[name] = value
            self._sense(name, value, event)


def drives_of(machine: Machine, cylinder: Cylinder) -> Mapping[bool, Alternatives]:
    """When the cylinder is sent out (True) and in."""
    drive = cylinder.drive
    if not isinstance(drive, OnValve):
        return {True: alternatives_of(drive.out), False: alternatives_of(drive.back)}
    valve = machine.valves[drive.valve]
    found = {}
    for position in (Position.A, Position.B):
        term = Term(TermKind.VALVE, valve.name, position.value, cylinder.place)
        found[drive.sends_out(position) is True] = ((Literal(term, True),),)
    return found


def stands(valve: Valve, reached: Position, term: Term) -> bool:
    """Whether an aspect of the valve holds by the position that it has reached last."""
    if term.aspect == "shifting":
        return False
    closed = Position.A if valve.normally_open else Position.B
    if term.aspect in ("open", "closed"):
        return (reached is closed) == (term.aspect == "closed")
    return reached.value == term.aspect


def _aspects_of(piston: _Piston) -> Mapping[Aspect, bool]:
    name = piston.cylinder.name
    resting = not piston.moving
    extended = resting and piston.region == Region.exactly(piston.last)
    retracted = resting and piston.region == Region.exactly(0)
    values = {
        "extended": extended,
        "retracted": retracted,
        "moving": piston.moving,
        "between": not extended and not retracted,
    }
    return {(TermKind.CYLINDER, name, aspect): value for aspect, value in values.items()}
