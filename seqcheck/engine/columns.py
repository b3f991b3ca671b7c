"""The recurrence of ``bounds`` over a part of the event graph, source by source or for many sources at once.

Takes the events of the part, closed under causes but for the first, which dominates the others, and sources among them;
gives ``S`` from each source to every event of the part, microseconds. A few sources are quickest one by one; numpy is
loaded once there are many.
"""

from __future__ import annotations

from bisect import bisect_left
from collections.abc import Callable, Collection, Mapping, Sequence
from typing import TYPE_CHECKING

from seqcheck.engine.graph import OPEN, EventGraph

if TYPE_CHECKING:
    import numpy
    from numpy.typing import NDArray

    Table = NDArray[numpy.int64]

#: From so many sources on a table of all of them is quicker.
_MANY = 24
#: In a table so many separations cost what one does by itself.
_AT_ONCE = 100
#: A table has no more separations than so many, so that it takes little memory.
_MOST_OF_A_TABLE = 4_000_000
_NO_CHAIN = -(1 << 60)

#: ``S`` by pair of (source, event).
Rows = dict[tuple[int, int], int]
#: ``S`` from one source by event.
Column = Mapping[int, int]
#: For every member but the first, the positions of its causes with the least and the greatest delay.
_Arcs = Sequence[Sequence[tuple[int, int, int]]]


def separations_within(graph: EventGraph, members: Sequence[int], pairs: Collection[tuple[int, int]]) -> Rows:
    """``S`` for each of the pairs."""
    sources = sorted({source for source, _ in pairs})
    if len(sources) >= _MANY:
        graph.work += len(members) * (_MANY + len(sources) // _AT_ONCE)
        rows: Rows = {}
        together = max(_MANY, _MOST_OF_A_TABLE // len(members))
        for first in range(0, len(sources), together):
            some = sources[first : first + together]
            rows |= _by_table(graph, members, some, [pair for pair in pairs if some[0] <= pair[0] <= some[-1]])
        return rows
    graph.work += len(members) * len(sources)
    columns = {source: _column(graph, members, source, OPEN) for source in sources}
    return {(source, event): columns[source][event] for source, event in pairs}


def separation_column(graph: EventGraph, members: Sequence[int], source: int, open_us: int = OPEN) -> Column:
    """The column of one source. ``open_us`` stands in for open delays."""
    graph.work += len(members)
    return _column(graph, members, source, open_us)


def _column(graph: EventGraph, members: Sequence[int], source: int, open_us: int) -> Column:
    assumed = _assumed_within(graph, members)
    chain = {source: 0}
    highest: int | None = source
    while highest is not None:
        _least_chains(graph, members, chain, highest)
        highest = _carried_over(chain, assumed)
        graph.work += len(members) if highest is not None else 0
    latest = {number: -length for number, length in chain.items()}
    lowest: int | None = members[0]
    while lowest is not None:
        _greatest_times(graph, members, latest, open_us, lowest)
        lowest = _brought_forward(latest, assumed)
        graph.work += len(members) if lowest is not None else 0
    return latest


def _assumed_within(graph: EventGraph, members: Sequence[int]) -> list[tuple[int, int]]:
    between = graph.assumed_between(members[0] - 1, members[-1])
    if not between:
        return []
    within = set(members)
    return [(one, other) for one, other in between if one in within and other in within]


def _least_chains(graph: EventGraph, members: Sequence[int], chain: dict[int, int], highest: int) -> None:
    """Lengthens ``chain``, the longest chain over the least delays from an event to the source, from the ``highest``
    down that has become longer."""
    all_arcs = graph.arcs
    for position in range(bisect_left(members, highest), 0, -1):
        number = members[position]
        length = chain.get(number)
        if length is not None:
            for arc in all_arcs[number]:
                longer = length + arc.span.least
                if longer > chain.get(arc.cause, _NO_CHAIN):
                    chain[arc.cause] = longer


def _carried_over(chain: dict[int, int], assumed: Sequence[tuple[int, int]]) -> int | None:
    """Carries chains over to events that are taken to come before; the highest that this made longer."""
    longer = []
    for one, other in assumed:
        length = chain.get(other, _NO_CHAIN)
        if length > chain.get(one, _NO_CHAIN):
            chain[one] = length
            longer.append(one)
    return max(longer, default=None)


def _greatest_times(
    graph: EventGraph, members: Sequence[int], latest: dict[int, int], open_us: int, lowest: int
) -> None:
    """Lowers ``latest`` to what the causes allow, of all that lies behind the ``lowest`` that has become earlier."""
    all_arcs, unlimited = graph.arcs, OPEN // 2
    for position in range(bisect_left(members, lowest) + 1, len(members)):
        number = members[position]
        time = -OPEN << 8
        for arc in all_arcs[number]:
            greatest = arc.span.greatest
            comes = latest[arc.cause] + (greatest if greatest < unlimited else open_us)
            if comes > time:
                time = comes
        if time < latest.get(number, time + 1):
            latest[number] = time


def _brought_forward(latest: dict[int, int], assumed: Sequence[tuple[int, int]]) -> int | None:
    """Holds events that are taken to come before others to that; the lowest of which any had been later."""
    earlier = []
    for one, other in assumed:
        if latest[other] < latest[one]:
            latest[one] = latest[other]
            earlier.append(one)
    return min(earlier, default=None)


# Many at once ----------------------------------------------------------------------------------------------------


def _by_table(
    graph: EventGraph, members: Sequence[int], sources: Sequence[int], pairs: Collection[tuple[int, int]]
) -> Rows:
    import numpy

    index = {number: position for position, number in enumerate(members)}
    arcs = [
        [(index[arc.cause], arc.span.least, _closed(arc.span.greatest)) for arc in graph.arcs[number]]
        for number in members[1:]
    ]
    assumed = [(index[one], index[other]) for one, other in _assumed_within(graph, members)]
    chain = numpy.full((len(members), len(sources)), _NO_CHAIN, dtype=numpy.int64)
    for position, source in enumerate(sources):
        chain[index[source], position] = 0
    _settle(lambda: _chains(chain, arcs, assumed), chain, bool(assumed))
    table = -chain
    _settle(lambda: _latest(table, arcs, assumed), table, bool(assumed))
    column = {source: position for position, source in enumerate(sources)}
    return {(source, event): int(table[index[event], column[source]]) for source, event in pairs}


def _closed(greatest: int) -> int:
    """No open delay longer than another, so that sums stay within 64 bits."""
    return greatest if greatest < OPEN // 2 else OPEN


def _settle(once: Callable[[], None], values: Table, repeat: bool) -> None:
    """One pass does where causes come first; an assumed order may run against that, and takes until nothing moves."""
    import numpy

    once()
    while repeat:
        before = values.copy()
        once()
        repeat = not numpy.array_equal(before, values)


def _chains(chain: Table, arcs: _Arcs, assumed: Sequence[tuple[int, int]]) -> None:
    import numpy

    for position in range(len(chain) - 1, 0, -1):
        for cause, least, _ in arcs[position - 1]:
            numpy.maximum(chain[cause], chain[position] + least, out=chain[cause])
    for one, other in assumed:
        numpy.maximum(chain[one], chain[other], out=chain[one])


def _latest(table: Table, arcs: _Arcs, assumed: Sequence[tuple[int, int]]) -> None:
    import numpy

    for position, incoming in enumerate(arcs, start=1):
        cause, _, greatest = incoming[0]
        latest = table[cause] + greatest
        for cause, _, greatest in incoming[1:]:
            numpy.maximum(latest, table[cause] + greatest, out=latest)
        numpy.minimum(table[position], latest, out=table[position])
    for one, other in assumed:
        numpy.minimum(table[one], table[other], out=table[one])
