"""From the records of a play to the lines of a chart, before anything is timed.

Takes a study; gives for each row the events of the graph at which its line changes, from the start of the run on.
May add events to the graph.
"""

from __future__ import annotations

from collections.abc import Iterator

from seqcheck.chart.bits import flag_changes, follower_starts_on, outside_line
from seqcheck.chart.changes import Change, words
from seqcheck.chart.model import HIGH, LOW, RowKind
from seqcheck.chart.shifts import ends_of, level_of, shift_changes, valves_of
from seqcheck.checks.study import Study
from seqcheck.engine.trace import Choice, Stroke, Visit
from seqcheck.machine.devices import Cylinder, FollowingSignal, OutsideSignal, Sensor
from seqcheck.machine.model import items_of, steps_of
from seqcheck.machine.records import record
from seqcheck.machine.steps import Choose, Sequence
from seqcheck.machine.time import WHOLE_SHARE

_OFF_ON = ("off", "on")


@record
class Line:
    """A device's row over the whole run; it starts at ``start``. ``ends`` as in ``model.Row``."""

    kind: RowKind
    name: str
    label: str | None
    address: str | None
    start: int
    changes: tuple[Change, ...]
    ends: tuple[str, str] = _OFF_ON


@record
class Sequenced:
    """The steps of one sequence over the whole run, and its choices as they were taken."""

    sequence: Sequence
    visits: tuple[Visit, ...]
    choices: tuple[Choice, ...]


def sequences(study: Study) -> Iterator[Sequenced]:
    for sequence in study.machine.sequences:
        names = {step.name for step in steps_of(sequence)}
        chooses = {item.place for item in items_of(sequence.items) if isinstance(item, Choose)}
        yield Sequenced(
            sequence,
            tuple(visit for visit in study.trace.visits if visit.step.name in names),
            tuple(one for one in study.trace.choices if one.choose.place in chooses and one.left is not None),
        )


def lines(study: Study) -> Iterator[Line]:
    """Every device in the order of the text, valve by valve along the way of a command: coils, valve, what it moves
    (below the last of several valves), with its sensors; then what stands alone."""
    machine = study.machine
    below = {cylinder.name: _last_valve(study, cylinder) for cylinder in machine.cylinders.values()}
    for valve in machine.valves.values():
        for name in valve.coils:
            coil = machine.coils[name]
            yield Line(RowKind.COIL, name, coil.label, coil.address, LOW, tuple(_switchings(study, name)))
        shifts = tuple(shift_changes(study, valve))
        start = level_of(valve, valve.starts)
        yield Line(RowKind.VALVE, valve.name, valve.label, None, start, shifts, ends_of(valve))
        for cylinder in machine.cylinders.values():
            if below[cylinder.name] == valve.name:
                yield from _cylinder_lines(study, cylinder)
    for output in machine.outputs.values():
        switchings = tuple(_switchings(study, output.name))
        yield Line(RowKind.OUTPUT, output.name, output.label, output.address, LOW, switchings)
    for signal in machine.signals.values():
        yield _signal_line(study, signal)
    for flag in machine.flags.values():
        yield Line(RowKind.FLAG, flag.name, flag.label, None, LOW, tuple(flag_changes(study, flag.name)))


def _last_valve(study: Study, cylinder: Cylinder) -> str:
    """The valve below which a cylinder stands: its own, or the last of those whose positions drive it."""
    driving = valves_of(cylinder)
    return [name for name in study.machine.valves if name in driving][-1]


def _cylinder_lines(study: Study, cylinder: Cylinder) -> Iterator[Line]:
    moves = tuple(_moves(study, cylinder.name))
    ends = ("in", "out")
    yield Line(RowKind.CYLINDER, cylinder.name, cylinder.label, None, cylinder.start, moves, ends)
    for name in cylinder.sensors:
        sensor = study.machine.sensors[name]
        start = HIGH if study.starts_on(name) else LOW
        yield Line(RowKind.SENSOR, name, sensor.label, sensor.address, start, tuple(_senses(study, sensor)))


def _signal_line(study: Study, signal: OutsideSignal | FollowingSignal) -> Line:
    if isinstance(signal, FollowingSignal):
        changes = tuple(_senses(study, signal))
        start = HIGH if follower_starts_on(study, signal) else LOW
    else:
        start, changes = outside_line(study, signal.name)
    return Line(RowKind.SIGNAL, signal.name, signal.label, signal.address, start, changes)


def _switchings(study: Study, target: str) -> Iterator[Change]:
    for spell in study.trace.spells.get(target, ()):
        yield Change(spell.on, HIGH, words(study, spell.on))
        if spell.off is not None:
            yield Change(spell.off, LOW, words(study, spell.off))


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


def _senses(study: Study, source: Sensor | FollowingSignal) -> Iterator[Change]:
    """The own switching of a sensor, or of a signal that follows the machine, its delay included. What is taken back
    before the input filter has let it through is no edge of its own: it comes back with what takes it back."""
    for edge in study.trace.edges.get(source.name, ()):
        detail = "on" if edge.value else "off"
        lost = edge.lost_to is not None
        level = HIGH if edge.value else LOW
        own = study.trace.graph.arcs[edge.arrived][0].cause
        if isinstance(source, Sensor) and source.via is not None:
            own = study.trace.graph.arcs[own][0].cause
        yield Change(own, level, f"{source.name} switches {detail}", not lost)
        if edge.lost_to is not None and edge.seen is None:
            back = f"{source.name} switches {'off' if edge.value else 'on'} again, before the input takes it"
            yield Change(edge.lost_to, HIGH - level, back, lasting=False)
