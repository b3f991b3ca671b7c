"""Every move of a machine with its times, for the table that is filled in at the machine.

Takes studies (the ways in which a machine was played); gives, for each stroke that the text starts at one place, how
long it takes from the coil switching to the input of the sensor that the sequence then waits for, over all runs. Where
nothing waits for a sensor of the cylinder, the time is that of the whole stroke. Valves that move no cylinder (process
valves) make moves of their own, from the coil switching to the position reached.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from seqcheck.chart.shifts import valves_of, way_of
from seqcheck.checks.study import Study
from seqcheck.engine.bounds import both_ways, closed, greatest_separations
from seqcheck.engine.trace import Edge, Stroke, Visit
from seqcheck.machine.findings import Duration
from seqcheck.machine.model import Machine, steps_of
from seqcheck.machine.records import record
from seqcheck.machine.steps import Step


@record
class Move:
    """``coil`` switches (``energized``, or released), ``sensor`` (or a signal that follows the piston) comes or goes
    (``sensor_on``): None where nothing waits for one. ``waiting`` is the step that waits for it, which need not be the
    one that started the move. ``way``: out or in; of a valve to which position, or that it opens or closes."""

    step: str
    device: str
    way: str
    coil: str
    energized: bool
    sensor: str | None
    sensor_on: bool
    waiting: str


#: Where a step makes both, this comes before its opposite.
_FIRST = ("out", "opens", "to a")

#: None: the stroke is cut short before it comes to an end or to a sensor that is waited for.
MoveTimes = tuple[tuple[Move, Duration | None], ...]


def move_times(machine: Machine, studies: Sequence[Study]) -> MoveTimes:
    """In the order of the text."""
    found: dict[Move, Duration | None] = {}
    for study in studies:
        for move, time in _timed(study):
            found[move] = _widened(found.get(move), time)
    order = {step.name: place for place, step in enumerate(_steps(machine))}
    return tuple(sorted(found.items(), key=lambda one: (order[one[0].step], one[0].device, one[0].way not in _FIRST)))


def _steps(machine: Machine) -> Iterator[Step]:
    for sequence in machine.sequences:
        yield from steps_of(sequence)


def _widened(known: Duration | None, other: Duration | None) -> Duration | None:
    """The typical time is that of the first, which was played at typical times."""
    if known is None or other is None:
        return known or other
    return known.widened(other)


def _timed(study: Study) -> Iterator[tuple[Move, Duration | None]]:
    strokes = [*_strokes(study), *_shifts(study)]
    whole = ((begin, end) for _, begin, end in strokes if end is not None)
    rows = greatest_separations(study.trace.graph, both_ways(whole))
    for move, begin, end in strokes:
        if end is None:
            yield move, None
            continue
        typical = study.time(end) - study.time(begin)
        yield move, Duration(-rows[end, begin], typical, closed(rows[begin, end]))


def _strokes(study: Study) -> Iterator[tuple[Move, int, int | None]]:
    """Each stroke with the events from which and to which it is timed; None where it does not come to that."""
    waiting: dict[Edge, Visit] = {}
    for visit in study.trace.visits:
        for answer in visit.answers:
            if answer.edge is not None:
                waiting.setdefault(answer.edge, visit)
    for visit in study.trace.visits:
        for stroke in study.moves_of(visit):
            edges = {edge for _, edge in study.waits_within(stroke)}
            # Others are passed on the way to the last.
            last = max(edges, key=lambda edge: study.time(edge.arrived), default=None)
            if last is not None:
                yield _move(stroke, visit, last, waiting[last]), stroke.shift.by.event, last.arrived
            else:
                yield _move(stroke, visit, None, visit), stroke.shift.by.event, None if stroke.cut else stroke.end


def _shifts(study: Study) -> Iterator[tuple[Move, int, int | None]]:
    """Of valves that move no cylinder."""
    machine = study.machine
    moving = {valve for cylinder in machine.cylinders.values() for valve in valves_of(cylinder)}
    for shift in study.trace.shifts:
        if shift.valve not in moving:
            step, by = shift.by.origin.step, shift.by
            way = way_of(machine.valves[shift.valve], shift.to)
            move = Move(step, shift.valve, way, by.coil, by.energized, None, True, step)
            yield move, by.event, None if shift.called_off else shift.reached


def _move(stroke: Stroke, visit: Visit, edge: Edge | None, waiting: Visit) -> Move:
    by = stroke.shift.by
    sensor, on = (None, True) if edge is None else (edge.sensor, edge.value)
    way = "out" if stroke.out else "in"
    return Move(visit.step.name, stroke.cylinder, way, by.coil, by.energized, sensor, on, waiting.step.name)
