"""From the records of a play to the lines of a chart, before anything is timed.

Takes a study; gives for each row the events of the graph at which its line changes, from the start of the run on.
May add events to the graph.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from seqcheck.chart.model import HIGH, LOW, MIDDLE, RowKind
from seqcheck.checks.narrate import describe
from seqcheck.checks.study import Study
from seqcheck.engine.graph import Event
from seqcheck.engine.trace import Shift, Stroke, Visit
from seqcheck.machine.conditions import TermKind, terms_of
from seqcheck.machine.devices import Cylinder, OnValve, Position, Sensor, Valve
from seqcheck.machine.model import steps_of
from seqcheck.machine.steps import Sequence
from seqcheck.machine.time import NO_TIME, WHOLE_SHARE

_LEVELS = {Position.A: HIGH, Position.B: LOW, Position.CENTRE: MIDDLE}


@dataclass(frozen=True, slots=True)
class Change:
    """An event of the graph at which a row comes to a level; ``lasting`` as in ``model.Edge``."""

    event: int
    level: int
    text: str
    lasting: bool = True


@dataclass(frozen=True, slots=True)
class Line:
    """A device's row over the whole run; it starts at ``start``."""

    kind: RowKind
    name: str
    label: str | None
    address: str | None
    start: int
    changes: tuple[Change, ...]


@dataclass(frozen=True, slots=True)
class Sequenced:
    """The steps of one sequence over the whole run."""

    sequence: Sequence
    visits: tuple[Visit, ...]


def sequences(study: Study) -> Iterator[Sequenced]:
    for sequence in study.machine.sequences:
        names = {step.name for step in steps_of(sequence)}
        yield Sequenced(sequence, tuple(visit for visit in study.trace.visits if visit.step.name in names))


def lines(study: Study) -> Iterator[Line]:
    """Every device in the order of the text, valve by valve along the way of a command: coils, valve, what it moves,
    with its sensors; then what stands alone."""
    machine = study.machine
    for valve in machine.valves.values():
        for name in valve.coils:
            coil = machine.coils[name]
            yield Line(RowKind.COIL, name, coil.label, coil.address, LOW, tuple(_switchings(study, name)))
        shifts = tuple(_shifts(study, valve))
        yield Line(RowKind.VALVE, valve.name, valve.label, None, _LEVELS[valve.starts], shifts)
        for cylinder in machine.cylinders.values():
            if _first_valve(cylinder) == valve.name:
                yield from _cylinder_lines(study, cylinder)
    for output in machine.outputs.values():
        switchings = tuple(_switchings(study, output.name))
        yield Line(RowKind.OUTPUT, output.name, output.label, output.address, LOW, switchings)
    for signal in machine.signals.values():
        changes = tuple(_comings(study, signal.name))
        start = LOW if not changes or changes[0].level == HIGH else HIGH
        yield Line(RowKind.SIGNAL, signal.name, signal.label, signal.address, start, changes)


def _first_valve(cylinder: Cylinder) -> str:
    """The valve below which a cylinder stands: its own, or the first of those whose positions drive it."""
    if isinstance(cylinder.drive, OnValve):
        return cylinder.drive.valve
    return next(term.subject for term in terms_of(cylinder.drive.out) if term.kind is TermKind.VALVE)


def _cylinder_lines(study: Study, cylinder: Cylinder) -> Iterator[Line]:
    moves = tuple(_moves(study, cylinder.name))
    yield Line(RowKind.CYLINDER, cylinder.name, cylinder.label, None, cylinder.start, moves)
    for name in cylinder.sensors:
        sensor = study.machine.sensors[name]
        start = HIGH if study.starts_on(name) else LOW
        yield Line(RowKind.SENSOR, name, sensor.label, sensor.address, start, tuple(_senses(study, sensor)))


def words(study: Study, event: int) -> str:
    return describe(study, study.trace.graph.events[event]) or ""


def _switchings(study: Study, target: str) -> Iterator[Change]:
    for spell in study.trace.spells.get(target, ()):
        yield Change(spell.on, HIGH, words(study, spell.on))
        if spell.off is not None:
            yield Change(spell.off, LOW, words(study, spell.off))


def _shifts(study: Study, valve: Valve) -> Iterator[Change]:
    """Each shift from where it sets out to where it gets; one that is called off falls back to where it was."""
    level = _LEVELS[valve.starts]
    for shift in study.trace.shifts:
        if shift.valve != valve.name:
            continue
        to = _LEVELS[shift.to]
        yield Change(shift.asked, level, f"{valve.name} sets out for {shift.to.value}")
        if shift.called_off is None:
            yield Change(shift.reached, to, words(study, shift.reached))
            level = to
        else:
            yield from _called_off(study, shift, level)


def _called_off(study: Study, shift: Shift, level: int) -> Iterator[Change]:
    assert shift.called_off is not None
    event = shift.called_off.event
    asked, due = study.time(shift.asked), study.time(shift.reached)
    there = level + (_LEVELS[shift.to] - level) * (study.time(event) - asked) // max(due - asked, 1)
    if shift.taken_over:
        yield Change(event, there, f"{shift.valve} is taken over on its way to {shift.to.value}")
    else:
        yield Change(event, there, f"{shift.valve} is called off on its way to {shift.to.value}", lasting=False)
    yield Change(event, level, f"{shift.valve} is where it was", lasting=shift.taken_over)


def _moves(study: Study, cylinder: str) -> Iterator[Change]:
    position = study.machine.cylinders[cylinder].start
    for stroke in study.trace.strokes_of.get(cylinder, ()):
        passed = stroke.marks[: stroke.passed] if stroke.cut else stroke.marks
        begins = stroke.leaves if stroke.leaves is not None else stroke.shift.reached
        yield from _setting_out(study, stroke, begins, position)
        for mark, event in passed:
            position = study.trace.marks[cylinder][mark]
            yield Change(event, position, words(study, event))
        if stroke.cut and stroke.stands is not None:
            position = _stopped_at(study, stroke, begins, position)
            percent = f"{position * 100 / WHOLE_SHARE:.3g} %"
            yield Change(stroke.stands, position, f"{cylinder} is stopped or turned at about {percent}")


def _setting_out(study: Study, stroke: Stroke, begins: int, position: int) -> Iterator[Change]:
    """Where a first mark is so near to the end that it is typically passed within the lag, the line is drawn from the
    moment at which the valve lets the piston go."""
    text = f"{stroke.cylinder} sets out on its way {'out' if stroke.out else 'in'}"
    mark, first = stroke.marks[0]
    if study.time(first) < study.time(begins):
        yield Change(stroke.shift.reached, position, f"{stroke.shift.valve} drives {stroke.cylinder}")
        yield Change(begins, study.trace.marks[stroke.cylinder][mark], text)
    else:
        yield Change(begins, position, text)


def _stopped_at(study: Study, stroke: Stroke, begins: int, position: int) -> int:
    """Where the piston typically is once its stroke was cut: in proportion between the marks before and behind."""
    assert stroke.stands is not None
    if stroke.passed == len(stroke.marks):
        return position
    mark, due = stroke.marks[stroke.passed]
    since = study.time(stroke.marks[stroke.passed - 1][1] if stroke.passed else begins)
    gone = min(max(study.time(stroke.stands) - since, 0), study.time(due) - since)
    ahead = study.trace.marks[stroke.cylinder][mark] - position
    return position + ahead * gone // max(study.time(due) - since, 1)


def _senses(study: Study, sensor: Sensor) -> Iterator[Change]:
    """The sensor's own switching, its delay included. What is taken back before the input filter has let it through
    is no edge of its own: it comes back with the mark that takes it back."""
    graph = study.trace.graph
    for edge in study.trace.edges.get(sensor.name, ()):
        detail = "on" if edge.value else "off"
        lost = edge.lost_to is not None
        level = HIGH if edge.value else LOW
        yield Change(graph.arcs[edge.arrived][0].cause, level, f"{sensor.name} switches {detail}", not lost)
        if edge.lost_to is not None and edge.seen is None:
            back = f"{sensor.name} switches {'off' if edge.value else 'on'} again, before the input takes it"
            yield Change(edge.lost_to, HIGH - level, back, lasting=False)


def _comings(study: Study, signal: str) -> Iterator[Change]:
    """A signal from outside comes, and stays until every step that waits for it is left."""
    graph = study.trace.graph
    for read in study.trace.reads:
        for (name, wanted), (held, _) in read.signals.items():
            if name != signal:
                continue
            level = HIGH if wanted else LOW
            comes = graph.arcs[held][0].cause
            yield Change(comes, level, words(study, comes))
            lefts = [visit.left.event for visit in read.entered if _waits(visit, name) and visit.left is not None]
            if lefts:
                last = study.last_of(Event("all left", signal), lefts)
                over = study.later(Event("signal over", signal), last, NO_TIME)
                yield Change(over, HIGH - level, f"signal {signal} may {'go' if wanted else 'come'} again")


def _waits(visit: Visit, signal: str) -> bool:
    return any(literal.term.subject == signal for literal in visit.literals)
