"""A played machine, with what several checks look up in it.

Takes a settlement; gives the trace's records by what connects them. Adds events of its own to the graph: moments that
nothing in the machine marks but that an obligation has to be held against.
"""

from __future__ import annotations

from bisect import bisect_left, bisect_right
from collections.abc import Iterator, Sequence
from functools import cached_property
from itertools import pairwise

from seqcheck.checks.chases import Chase, chases_of
from seqcheck.engine.graph import OPEN, Arc, DelayName, Event, after
from seqcheck.engine.order import Order
from seqcheck.engine.settlement import Settlement, StateGraph
from seqcheck.engine.timeline import Draw, typical
from seqcheck.engine.trace import Edge, Read, Shift, Spell, Stroke, Trace, Visit
from seqcheck.machine.conditions import TermKind
from seqcheck.machine.model import Machine
from seqcheck.machine.records import record
from seqcheck.machine.time import Span


@record
class _Wait:
    """A visit that waits for a sensor, in the order of entering; ``latest_left``: of this one and all before it."""

    entered: int
    left: int
    latest_left: int
    visit: Visit


@record
class Turned:
    """An order of a play, with the ``trace`` of one that has it the other way round and else is the same, and the one
    behind both, ``unturned``, that has turned no order from there on."""

    order: Order
    trace: Trace
    unturned: Trace


class Study:
    def __init__(
        self,
        machine: Machine,
        settlement: Settlement,
        draw: Draw = typical,
        entered: frozenset[str] = frozenset(),
        left: frozenset[str] = frozenset(),
        whole: bool = True,
        chases: Sequence[Chase] = (),
    ) -> None:
        """``draw``: how the delays of the events that the study adds are drawn. ``entered``: the steps that any play
        has entered; ``left``: those that any play has left; ``whole``: all ways were played, and come round;
        ``chases``: where any play can go round without time passing."""
        self.machine = machine
        self.entered = entered
        self.left = left
        self.whole = whole
        self.chases = chases
        self._draw = draw
        self.settlement = settlement
        self.trace = settlement.trace
        self._played = len(self.trace.times)
        self.turned: list[Turned] = []
        #: Of the play from which this one has come by orders turned.
        self.unturned: Study = self

    def alike(self, settlement: Settlement) -> Study:
        """A study of another play of the same machine."""
        return Study(self.machine, settlement, self._draw, self.entered, self.left, self.whole, self.chases)

    def time(self, event: int) -> int:
        """The typical time of an event, in microseconds from the start."""
        return self.trace.times[event]

    @property
    def for_ever(self) -> tuple[int, int] | None:
        """From which event to which the play shows what goes on for ever: a round that comes again, or the last event
        of all, twice. None where it shows neither."""
        around = self.settlement.path.round
        if self.trace.finished:
            last = max(self.trace.happened, key=self.time)
            return last, last
        if around is None:
            return None
        begin, end = (self.settlement.path.passages[number].at for number in around)
        return begin, end

    # Events that only obligations need -------------------------------------------------------------------------

    def comes(self, event: int) -> bool:
        """Whether an event really came in the play; those that the study adds do. (A read of several causes comes with
        the last of them.)"""
        return event >= self._played or event in self.trace.happened or event in self.reads_by_event

    def later(self, event: Event, cause: int, span: Span, delay: DelayName | None = None) -> int:
        """The moment this long after another one; ``delay`` is its name where the machine draws it."""
        time = span.typical if delay is None else self._draw(*delay, span)
        return self._make(event, (Arc(cause, span, delay),), self.trace.times[cause] + time)

    def noticed_after(self, time: int) -> Span:
        """A time, and the wait for the read that notices that it is over."""
        wait = self.machine.controller.wait
        return Span(time + wait.least, time + wait.typical, time + wait.greatest)

    def last_of(self, event: Event, causes: Sequence[int]) -> int:
        """The moment at which all of these have come."""
        kept = self.trace.graph.without_idle(causes)
        if len(kept) == 1:
            return kept[0]
        times = self.trace.times
        return self._make(event, tuple(after(cause) for cause in kept), max(times[cause] for cause in kept))

    def _make(self, event: Event, arcs: tuple[Arc, ...], time: int) -> int:
        self.trace.times.append(time)
        return self.trace.graph.add(event, arcs)

    @cached_property
    def reads_by_event(self) -> dict[int, Read]:
        return {read.event: read for read in self.trace.reads}

    @cached_property
    def _visits_by_step(self) -> dict[str, list[Visit]]:
        found: dict[str, list[Visit]] = {}
        for visit in self.trace.visits:
            found.setdefault(visit.step.name, []).append(visit)
        return found

    def visits_of(self, step: str) -> Sequence[Visit]:
        """The visits of a step, by its qualified name, in the order of the play."""
        return self._visits_by_step.get(step, ())

    # Records by what connects them -----------------------------------------------------------------------------

    @cached_property
    def _spell_by_event(self) -> dict[int, tuple[Spell, Spell | None]]:
        """For each coil switching: its spell, and the next one of the same coil."""
        found: dict[int, tuple[Spell, Spell | None]] = {}
        for spells in self.trace.spells.values():
            for spell, following in zip(spells, [*spells[1:], None], strict=True):
                found[spell.on] = (spell, following)
                if spell.off is not None:
                    found[spell.off] = (spell, following)
        return found

    @cached_property
    def spell_number(self) -> dict[Spell, int]:
        """How many spells of the same coil or output came before."""
        return {spell: number for spells in self.trace.spells.values() for number, spell in enumerate(spells)}

    def spell_at(self, switching: int) -> tuple[Spell, Spell | None]:
        return self._spell_by_event[switching]

    @cached_property
    def _times_energized(self) -> dict[str, list[int]]:
        return {coil: sorted(self.time(spell.on) for spell in spells) for coil, spells in self.trace.spells.items()}

    def energized_within(self, coil: str, begin: int, end: int) -> bool:
        """Whether a coil or output switches on from one typical time to another, both included."""
        times = self._times_energized.get(coil, ())
        return bisect_left(times, begin) < bisect_right(times, end)

    @cached_property
    def _strokes_by_shift(self) -> dict[Shift, list[Stroke]]:
        found: dict[Shift, list[Stroke]] = {}
        for stroke in self.trace.strokes:
            for shift in stroke.shift.parts or (stroke.shift,):
                found.setdefault(shift, []).append(stroke)
        return found

    @cached_property
    def _shift_by_event(self) -> dict[int, Shift]:
        return {shift.by.event: shift for shift in self.trace.shifts}

    @cached_property
    def _switchings_by_visit(self) -> dict[Visit, list[int]]:
        """The coil switchings that a step's own commands have brought about as it was entered."""
        found: dict[Visit, list[int]] = {}
        for spells in self.trace.spells.values():
            for spell in spells:
                for origin, event in ((spell.begun, spell.on), (spell.ended, spell.off)):
                    if origin is not None and event is not None:
                        for visit in origin.read.entered:
                            if visit.step.name == origin.step:
                                found.setdefault(visit, []).append(event)
        return found

    def shifts_of(self, visit: Visit) -> Iterator[Shift]:
        """The valve shifts that a step's own commands have asked for as it was entered."""
        for event in self._switchings_by_visit.get(visit, ()):
            shift = self._shift_by_event.get(event)
            if shift is not None:
                yield shift

    def moves_of(self, visit: Visit) -> Iterator[Stroke]:
        """The strokes that a step's own commands have started."""
        for shift in self.shifts_of(visit):
            yield from self._strokes_by_shift.get(shift, ())

    def stands_at_end(self, cylinder: str, extended: bool, time: int) -> bool:
        """Whether the played run has the cylinder at this end at that time."""
        at_end = self.machine.cylinders[cylinder].starts_extended == extended
        for stroke in self.trace.strokes_of.get(cylinder, ()):
            if self.time(stroke.shift.reached) > time:
                break
            at_end = stroke.out == extended and self.time(stroke.end) <= time and not stroke.cut
        return at_end

    @cached_property
    def _strokes_by_event(self) -> dict[int, list[Stroke]]:
        found: dict[int, list[Stroke]] = {}
        for stroke in self.trace.strokes:
            events = [event for _, event in stroke.marks] + ([stroke.leaves] if stroke.leaves is not None else [])
            for event in events:
                found.setdefault(event, []).append(stroke)
        return found

    def strokes_through(self, event: int) -> list[Stroke]:
        """The stroke, if any, in which the piston comes to this mark or leaves this end."""
        return self._strokes_by_event.get(event, [])

    @cached_property
    def _seen_edges(self) -> dict[str, list[Edge]]:
        return {
            sensor: [edge for edge in edges if edge.seen is not None and edge.lost_to is None]
            for sensor, edges in self.trace.edges.items()
        }

    @cached_property
    def _edge_number(self) -> dict[Edge, int]:
        return {edge: number for edges in self._seen_edges.values() for number, edge in enumerate(edges)}

    def edge_before(self, edge: Edge) -> Edge | None:
        number = self._edge_number[edge]
        return self._seen_edges[edge.sensor][number - 1] if number else None

    @cached_property
    def _next_change(self) -> dict[Edge, Edge]:
        """The next physical change of the sensor after an edge that was seen, lost ones included."""
        found: dict[Edge, Edge] = {}
        for edges in self.trace.edges.values():
            for edge, following in pairwise(edges):
                found[edge] = following
        return found

    def edge_after(self, sensor: str, edge: Edge | None) -> Edge | None:
        """The next change behind this one; the very first where ``edge`` is None."""
        if edge is None:
            edges = self.trace.edges.get(sensor)
            return edges[0] if edges else None
        return self._next_change.get(edge)

    def edges_between(self, sensor: str, begin: int, end: int | None) -> Iterator[Edge]:
        """The sensor's own changes from one typical time to another, both included."""
        edges = self.trace.edges.get(sensor, [])
        times = self._edge_times.get(sensor, [])
        last = len(edges) if end is None else bisect_right(times, end)
        yield from edges[bisect_left(times, begin) : last]

    @cached_property
    def _edge_times(self) -> dict[str, list[int]]:
        return {sensor: [self.time(edge.at) for edge in edges] for sensor, edges in self.trace.edges.items()}

    def waiting_for(self, sensor: str, begin: int, end: int | None) -> Iterator[Visit]:
        """The visits of steps that wait for the sensor at some typical time after ``begin`` and before ``end``."""
        waits = self._waits.get(sensor, [])
        number = len(waits) if end is None else bisect_left(waits, end, key=lambda wait: wait.entered)
        while number and waits[number - 1].latest_left > begin:
            number -= 1
            if waits[number].left > begin:
                yield waits[number].visit

    @cached_property
    def _waits(self) -> dict[str, list[_Wait]]:
        found: dict[str, list[_Wait]] = {}
        for visit in self.trace.visits:
            left = self.time(visit.left.event) if visit.left is not None else OPEN
            for literal in visit.literals:
                if literal.term.kind is not TermKind.SIGNAL:
                    waits = found.setdefault(literal.term.subject, [])
                    latest = max(left, waits[-1].latest_left) if waits else left
                    waits.append(_Wait(self.time(visit.entered.event), left, latest, visit))
        return found

    def starts_on(self, sensor: str) -> bool:
        """Whether the sensor is on before anything has moved."""
        device = self.machine.sensors[sensor]
        return device.covers(self.machine.cylinders[device.cylinder].start)

    def stopped_by_own_sensor(self, stroke: Stroke) -> bool:
        """Whether the sequence had waited for one of the cylinder's own sensors in this stroke before it ended it: at
        the read that switched the valve, at one that always comes before that, or at the one that ended the command
        of the coil that drove the stroke."""
        if stroke.away is None:
            return False
        reads = {stroke.away.by.origin.read}
        spell, _ = self.spell_at(stroke.shift.by.event)
        if stroke.shift.by.energized and spell.ended is not None:
            reads.add(spell.ended.read)
        leads_to = self.trace.graph.leads_to
        return any(leads_to(left.event, read.event) for left, _ in self.waits_within(stroke) for read in reads)

    def waits_within(self, stroke: Stroke) -> list[tuple[Read, Edge]]:
        """The reads that left a step on a sensor that this stroke had brought on or off, with its change."""
        return self._waits_by_stroke.get(stroke, [])

    @cached_property
    def _waits_by_stroke(self) -> dict[Stroke, list[tuple[Read, Edge]]]:
        found: dict[Stroke, list[tuple[Read, Edge]]] = {}
        for visit in self.trace.visits:
            for answer in visit.answers:
                if visit.left is not None and answer.edge is not None:
                    for stroke in self._strokes_by_event.get(answer.edge.at, ()):
                        found.setdefault(stroke, []).append((visit.left, answer.edge))
        return found


def studies_of(machine: Machine, graph: StateGraph) -> list[Study]:
    """A study of each play; all know which steps any of them has entered and left, and what becomes of their orders the
    other way round."""
    visits = [visit for one in graph.settlements for visit in one.trace.visits]
    entered = frozenset(visit.step.name for visit in visits)
    left = frozenset(visit.step.name for visit in visits if visit.left is not None)
    whole = graph.complete and all(one.settled for one in graph.settlements)
    chases = chases_of(machine, graph.settlements)
    studies = [Study(machine, one, typical, entered, left, whole, chases) for one in graph.settlements]
    for one in studies:
        turn = one.settlement.recipe.turn
        if turn is not None:
            one.unturned = studies[graph.unturned(one.settlement.recipe)]
            studies[turn.play].turned.append(Turned(turn.order, one.trace, one.unturned.trace))
    return studies
