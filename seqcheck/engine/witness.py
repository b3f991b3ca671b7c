"""One concrete run for an order that does not hold.

Takes a trace and two events of which the first ought to come before the second; gives the delays of the run in which
it comes as late as it can. Setting ``t(j) = S[i, j]`` for the second event ``i`` is itself a possible run (McMillan &
Dill, ICCD 1992). Replaying plays the machine again with these delays: whoever claims that the run shows something must
find it in what was really played.
"""

from __future__ import annotations

from collections.abc import Mapping

from seqcheck.engine.bounds import causes_since, greatest_of
from seqcheck.engine.columns import separation_column
from seqcheck.engine.graph import Arc, DelayName, EventGraph
from seqcheck.engine.trace import Trace
from seqcheck.machine.records import record

#: How long a wait that nothing limits lasts in a concrete run.
_LONG_US = 60_000_000


@record
class Witness:
    """``times`` of the pair's events, of those that are taken to come before or behind them, and of all their causes
    since the event that dominates the pair; ``delays`` by name, all others typical. ``chain``: the events on the way to
    the pair whose delays make its times, in order."""

    times: Mapping[int, int]
    delays: Mapping[DelayName, int]
    chain: tuple[int, ...]


def witness(trace: Trace, first: int, second: int) -> Witness:
    """The run in which ``first`` comes as long after ``second`` as it can."""
    graph = trace.graph
    common = graph.common_dominator(first, second)
    members = _members(graph, common, {first, second})
    column = separation_column(graph, members, second, _LONG_US)
    start = trace.times[common] - column[common]
    times = {number: start + column[number] for number in members}
    delays = {}
    for number in members[1:]:
        for arc in graph.arcs[number]:
            if arc.delay is not None:
                delays[arc.delay] = min(times[number] - times[arc.cause], greatest_of(arc.span, _LONG_US))
    chain = _binding(graph, times, common, first) | _binding(graph, times, common, second)
    return Witness(times, delays, tuple(sorted(chain, key=lambda number: (times[number], number))))


def _members(graph: EventGraph, common: int, pair: set[int]) -> list[int]:
    """The causes of the pair, and those of whatever is taken to come before one of these, or behind it."""
    assumed = graph.assumed_below(common)
    members = causes_since(graph, common, pair)
    while True:
        within = set(members)
        beside = {number for one in assumed if not within.isdisjoint(one) for number in one}
        if beside <= within:
            return members
        members = causes_since(graph, common, pair | beside)


def _binding(graph: EventGraph, times: Mapping[int, int], common: int, event: int) -> set[int]:
    """From the event back to the common one along the causes that made it as late as it is."""
    chain = {event}
    while event != common:
        event = max(graph.arcs[event], key=lambda arc: _brings(times, arc, event)).cause
        chain.add(event)
    return chain


def _brings(times: Mapping[int, int], arc: Arc, event: int) -> int:
    """How late this cause lets the event be."""
    return min(times[arc.cause] + greatest_of(arc.span, _LONG_US), times[event])
