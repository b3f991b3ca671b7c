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
separation of the two events so found, within their causes since ``x``. Two that have no other causes than ``x`` in
common are independent of each other, so that the sums are all there is to it.
"""

from __future__ import annotations

from collections.abc import Collection, Iterable, Iterator, Sequence

from seqcheck.engine.columns import Rows as Rows
from seqcheck.engine.columns import separations_within
from seqcheck.engine.graph import OPEN, EventGraph
from seqcheck.machine.time import Span

#: What it costs to look at a pair, and how many causes are found, or looked through, for the cost of one separation.
_WORK_OF_A_PAIR = 8
_FOUND_AT_ONCE = 3
_IN_A_SET = 40


def greatest_separations(graph: EventGraph, pairs: Iterable[tuple[int, int]]) -> Rows:
    """``S[i, j]`` for every pair ``(i, j)``: how much later than ``i`` can ``j`` be? Microseconds."""
    rows: Rows = {}
    left: dict[int, list[tuple[int, int]]] = {}
    dominators: dict[tuple[int, int], int] = {}
    latest, earliest = graph.latest, graph.earliest
    for pair in set(pairs):
        source, event = pair
        known = dominators.get((event, source))
        common = dominators[pair] = graph.common_dominator(source, event) if known is None else known
        if source != common != event or graph.assumed_between(common, max(pair)):
            left.setdefault(common, []).append(pair)
        elif source == common:
            rows[pair] = latest[event] - latest[source]
        else:
            rows[pair] = earliest[event] - earliest[source]
    for common, group in left.items():
        rows.update(_Below(graph, common, group).separations(group))
    return rows


class _Below:
    """What lies behind one event that dominates both of each pair that is asked."""

    def __init__(self, graph: EventGraph, common: int, pairs: Sequence[tuple[int, int]]) -> None:
        self._graph = graph
        self._common = common
        self._assumed = _assumed_about(graph, common, {number for pair in pairs for number in pair})
        self._above_ordered = _above(graph, common, {number for pair in self._assumed for number in pair})
        self._causes: dict[int, set[int]] = {}
        self._dominating: dict[int, set[int]] = {}

    def separations(self, pairs: Sequence[tuple[int, int]]) -> Rows:
        graph, common = self._graph, self._common
        latest, earliest = graph.latest, graph.earliest
        rows: Rows = {}
        reduced: dict[tuple[int, int], tuple[int, int]] = {}
        graph.work += _WORK_OF_A_PAIR * len(pairs)
        for source, event in pairs:
            near_source, near_event = graph.below(common, source), graph.below(common, event)
            if not self._assumed and (common in (source, event) or self._are_independent(near_source, near_event)):
                rows[source, event] = latest[event] - latest[common] - (earliest[source] - earliest[common])
            else:
                reduced[source, event] = self._reduce(source, event, near_source, near_event)
        near = self._table(set(reduced.values())) if reduced else {}
        for (source, event), (near_source, near_event) in reduced.items():
            rows[source, event] = (
                latest[event]
                - latest[near_event]
                + near[near_source, near_event]
                - (earliest[source] - earliest[near_source])
            )
        return rows

    def _are_independent(self, near_source: int, near_event: int) -> bool:
        """Whether the two, right under the common dominator, have no other cause in common."""
        source_causes, event_causes = self._causes_of(near_source), self._causes_of(near_event)
        self._graph.work += (len(source_causes) + len(event_causes)) // _IN_A_SET
        if near_source in event_causes or near_event in source_causes:
            return False
        return len(source_causes & event_causes) == 1

    def _reduce(self, source: int, event: int, near_source: int, near_event: int) -> tuple[int, int]:
        """The dominators of the two from which on each has its delays to itself; ``near`` ones to begin with."""
        while True:
            lower_event = self._own_from(near_event, event, near_source)
            lower_source = self._own_from(near_source, source, lower_event)
            if (lower_source, lower_event) == (near_source, near_event):
                return near_source, near_event
            near_source, near_event = lower_source, lower_event

    def _causes_of(self, number: int) -> set[int]:
        """The causes of an event since the common one, both included."""
        found = self._causes.get(number)
        if found is None:
            found = self._causes[number] = _causes(self._graph, self._common, (number,))
        return found

    def _dominating_causes_of(self, number: int) -> set[int]:
        """Those that dominate others of them."""
        found = self._dominating.get(number)
        if found is None:
            dominator, common = self._graph.dominator, self._common
            found = self._dominating[number] = {dominator[one] for one in self._causes_of(number) if one != common}
        return found

    def _own_from(self, near: int, event: int, other: int) -> int:
        """From ``near`` down towards ``event``: the first dominator behind which none of the causes of ``other`` lies,
        nor any event of an assumed order. What dominates a cause is a cause itself, so that the way up from ``event``
        meets them where it comes to the first that dominates one of them."""
        graph = self._graph
        graph.work += len(self._causes_of(other)) // _IN_A_SET
        for dominating in (self._dominating_causes_of(other), self._above_ordered):
            if dominating:
                met = graph.first_among(dominating, self._common, event)
                if met >= near:
                    near = graph.below(met, event)
        return near

    def _table(self, pairs: set[tuple[int, int]]) -> Rows:
        members = causes_since(
            self._graph, self._common, {number for pair in (*pairs, *self._assumed) for number in pair}
        )
        return separations_within(self._graph, members, pairs)


def greatest_separation(graph: EventGraph, source: int, event: int) -> int:
    return greatest_separations(graph, [(source, event)])[source, event]


def longest_least_chain(graph: EventGraph, cause: int, event: int) -> int:
    """The longest chain of causes from one event to another over the least delays: what the one alone makes sure of."""
    common = graph.common_dominator(cause, event)
    chain = {event: 0}
    for number in reversed(causes_since(graph, common, [event])[1:]):
        if number in chain:
            for arc in graph.arcs[number]:
                chain[arc.cause] = max(chain.get(arc.cause, 0), chain[number] + arc.span.least)
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
    return sorted(_causes(graph, common, events))


def _assumed_about(graph: EventGraph, common: int, events: Collection[int]) -> list[tuple[int, int]]:
    """The orders taken for granted below ``common`` that have anything to do with these events: one of their two is a
    cause of an event, or of what such an order brings in."""
    found: list[tuple[int, int]] = []
    since, last = common, max(events)
    left: list[tuple[int, int]] = []
    causes: set[int] | None = None
    while further := [*left, *graph.assumed_between(since, last)]:
        causes = _causes(graph, common, events) if causes is None else causes
        about = {pair for pair in further if pair[0] in causes or pair[1] in causes}
        left = [pair for pair in further if pair not in about]
        about = {pair for pair in about if graph.is_below(common, pair)}
        if not about:
            break
        found += sorted(about)
        brought = {number for pair in about for number in pair}
        causes |= _causes(graph, common, brought)
        since, last = last, max(last, *brought)
    return found


def _above(graph: EventGraph, common: int, events: Collection[int]) -> set[int]:
    """The events and what dominates any of them, back to ``common``, which dominates them all."""
    found = {common} if events else set()
    for event in events:
        while event not in found:
            found.add(event)
            event = graph.dominator[event]
    return found


def _causes(graph: EventGraph, common: int, events: Iterable[int]) -> set[int]:
    found = {common}
    waiting = list(events)
    all_causes = graph.causes
    while waiting:
        number = waiting.pop()
        if number not in found:
            found.add(number)
            waiting += all_causes[number]
    graph.work += len(found) // _FOUND_AT_ONCE
    return found
