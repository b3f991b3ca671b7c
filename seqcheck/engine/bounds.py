"""Exact greatest separations between events.

Takes an event graph and pairs of events; gives ``S[i, j]``, the exact greatest value of ``t(j) - t(i)`` over all
delays. Refuses nothing; a separation that nothing limits comes out at or over ``OPEN / 2``.

For one source ``i``, events in the order of the graph::

    S[i, j] = min( max over causes k of j of S[i, k] + greatest(k, j),  -L[j, i] )

with ``L[j, i]`` the longest chain from ``j`` to ``i`` over the least delays (none: no such term). McMillan & Dill,
ICCD 1992; Hulgaard, Burns, Amon, Borriello, IEEE Trans. Computers 44(11), 1995.

Only a part of the graph can matter to a pair. Let ``x`` be the last event that dominates both: what lies before it
moves both alike. From an event one may go up its chain of dominators towards ``x``, to ``y``, as long as the other
event of the pair has no cause that ``y`` dominates: the delays behind ``y`` then belong to this event alone, are drawn
independently of all else, and simply add their greatest (forward) or least (backward) sum. What is left is the
separation of the two events so found, within their causes since ``x``.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Sequence
from typing import TYPE_CHECKING

import numpy

from seqcheck.engine.graph import OPEN, EventGraph
from seqcheck.machine.time import Span

_NO_CHAIN = -(1 << 60)

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Table = NDArray[numpy.int64]

#: For every member but the first, the positions of its causes with the spans of the delays.
_Arcs = Sequence[Sequence[tuple[int, Span]]]

#: ``S`` by pair of (source, event).
Rows = dict[tuple[int, int], int]


def greatest_separations(graph: EventGraph, pairs: Iterable[tuple[int, int]]) -> Rows:
    """``S[i, j]`` for every pair ``(i, j)``: how much later than ``i`` can ``j`` be? Microseconds."""
    rows: Rows = {}
    left: dict[int, list[tuple[int, int]]] = {}
    for source, event in set(pairs):
        common = graph.common_dominator(source, event)
        if source != common != event or graph.assumes_below(common):
            left.setdefault(common, []).append((source, event))
        elif source == common:
            rows[source, event] = graph.latest[event] - graph.latest[source]
        else:
            rows[source, event] = graph.earliest[event] - graph.earliest[source]
    for common, group in left.items():
        rows.update(_Below(graph, common).separations(group))
    return rows


class _Below:
    """What lies behind one event that dominates both of each pair that is asked."""

    def __init__(self, graph: EventGraph, common: int) -> None:
        self._graph = graph
        self._common = common
        self._assumed = [pair for pair in graph.assumed if all(graph.dominates(common, number) for number in pair)]
        self._ordered = sorted({number for pair in self._assumed for number in pair})
        self._causes: dict[int, list[int]] = {}

    def separations(self, pairs: Sequence[tuple[int, int]]) -> Rows:
        graph = self._graph
        reduced = [(source, event, *self._reduce(source, event)) for source, event in pairs]
        near = self._table({(near_source, near_event) for _, _, near_source, near_event in reduced})
        return {
            (source, event): graph.latest[event]
            - graph.latest[near_event]
            + near[near_source, near_event]
            - (graph.earliest[source] - graph.earliest[near_source])
            for source, event, near_source, near_event in reduced
        }

    def _reduce(self, source: int, event: int) -> tuple[int, int]:
        """The dominators of the two from which on each has its delays to itself."""
        graph, common = self._graph, self._common
        near_source, near_event = graph.below(common, source), graph.below(common, event)
        while True:
            lower_event = self._own_from(near_event, event, self._causes_of(near_source))
            lower_source = self._own_from(near_source, source, self._causes_of(lower_event))
            if (lower_source, lower_event) == (near_source, near_event):
                return near_source, near_event
            near_source, near_event = lower_source, lower_event

    def _causes_of(self, number: int) -> list[int]:
        if number not in self._causes:
            self._causes[number] = causes_since(self._graph, self._common, [number])
        return self._causes[number]

    def _own_from(self, near: int, event: int, others: Sequence[int]) -> int:
        """From ``near`` down towards ``event``: the first dominator behind which none of the ``others`` lies, nor any
        event of an assumed order."""
        graph = self._graph
        graph.work += len(others)
        for causes in (others, self._ordered):
            for other in reversed(causes):
                if other <= near:
                    break
                if graph.dominates(near, other):
                    near = graph.below(graph.common_dominator(other, event), event)
        return near

    def _table(self, pairs: set[tuple[int, int]]) -> Rows:
        members = causes_since(
            self._graph, self._common, {number for pair in (*pairs, *self._assumed) for number in pair}
        )
        sources = sorted({source for source, _ in pairs})
        table = separation_table(self._graph, members, sources)
        position = {number: index for index, number in enumerate(members)}
        column = {number: index for index, number in enumerate(sources)}
        return {(source, event): int(table[position[event], column[source]]) for source, event in pairs}


def greatest_separation(graph: EventGraph, source: int, event: int) -> int:
    return greatest_separations(graph, [(source, event)])[source, event]


def longest_least_chain(graph: EventGraph, cause: int, event: int) -> int:
    """The longest chain of causes from one event to another over the least delays: what the one alone makes sure of."""
    common = graph.common_dominator(cause, event)
    chain = {event: 0}
    for number in reversed(causes_since(graph, common, [event])[1:]):
        if number in chain:
            for arc in graph.arcs[number]:
                chain[arc.cause] = max(chain.get(arc.cause, _NO_CHAIN), chain[number] + arc.span.least)
    return chain[cause]


def both_ways(pairs: Iterable[tuple[int, int]]) -> Iterator[tuple[int, int]]:
    """Each pair, and the same turned round: what it takes to know how far apart two events are at most and at least."""
    for one, other in pairs:
        yield one, other
        yield other, one


def is_open(separation: int) -> bool:
    return separation >= OPEN // 2


def closed(separation: int) -> int | None:
    """A separation as it is shown: None where nothing limits it."""
    return None if is_open(separation) else separation


def greatest_of(span: Span, open_us: int) -> int:
    """The greatest time of a span, and ``open_us`` where nothing limits it."""
    return open_us if is_open(span.greatest) else span.greatest


def causes_since(graph: EventGraph, common: int, events: Iterable[int]) -> list[int]:
    """The events and all their causes back to ``common``, which dominates them, in the order of the graph."""
    found = {common}
    waiting = list(events)
    while waiting:
        number = waiting.pop()
        if number not in found:
            found.add(number)
            waiting.extend(arc.cause for arc in graph.arcs[number])
    return sorted(found)


def separation_table(graph: EventGraph, members: Sequence[int], sources: Sequence[int], open_us: int = OPEN) -> Table:
    """``S`` for every source, shape ``(members, sources)``, microseconds. ``members`` are closed under causes but for
    the first, which dominates the others; the sources are among them. ``open_us`` stands in for open delays."""
    graph.work += len(members) * len(sources)
    index = {number: position for position, number in enumerate(members)}
    arcs = [[(index[arc.cause], arc.span) for arc in graph.arcs[number]] for number in members[1:]]
    assumed = [(index[one], index[other]) for one, other in graph.assumed if one in index and other in index]
    chain = numpy.full((len(members), len(sources)), _NO_CHAIN, dtype=numpy.int64)
    for position, source in enumerate(sources):
        chain[index[source], position] = 0
    _settle(lambda: _chains(chain, arcs, assumed), chain, bool(assumed))
    table = -chain
    _settle(lambda: _latest(table, arcs, assumed, open_us), table, bool(assumed))
    return table


def _settle(once: Callable[[], None], values: Table, repeat: bool) -> None:
    """One pass does where causes come first; an assumed order may run against that, and takes until nothing moves."""
    once()
    while repeat:
        before = values.copy()
        once()
        repeat = not numpy.array_equal(before, values)


def _chains(chain: Table, arcs: _Arcs, assumed: Sequence[tuple[int, int]]) -> None:
    for position in range(len(chain) - 1, 0, -1):
        for cause, span in arcs[position - 1]:
            numpy.maximum(chain[cause], chain[position] + span.least, out=chain[cause])
    for one, other in assumed:
        numpy.maximum(chain[one], chain[other], out=chain[one])


def _latest(table: Table, arcs: _Arcs, assumed: Sequence[tuple[int, int]], open_us: int) -> None:
    for position, incoming in enumerate(arcs, start=1):
        cause, span = incoming[0]
        latest = table[cause] + greatest_of(span, open_us)
        for cause, span in incoming[1:]:
            numpy.maximum(latest, table[cause] + greatest_of(span, open_us), out=latest)
        numpy.minimum(table[position], latest, out=table[position])
    for one, other in assumed:
        numpy.minimum(table[one], table[other], out=table[one])
