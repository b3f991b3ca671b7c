"""One concrete run for an order that does not hold, and whether the player really plays it so.

Takes a trace and two events of which the first ought to come before the second; gives the delays of the run in which
it comes as late as it can. Setting ``t(j) = S[i, j]`` for the second event ``i`` is itself a possible run (McMillan &
Dill, ICCD 1992). Replaying plays the machine again with these delays: what leads to the pair must come exactly when
the witness says, and nothing of it before its time, or something else has got in its way.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from seqcheck.engine.bounds import causes_since, separation_table
from seqcheck.engine.graph import OPEN, DelayName, EventGraph
from seqcheck.engine.player import Player
from seqcheck.engine.settle import Settlement
from seqcheck.engine.timeline import given
from seqcheck.engine.trace import Trace
from seqcheck.machine.model import Machine

#: How long a wait that nothing limits lasts in a concrete run.
_LONG_US = 60_000_000


@dataclass(frozen=True, slots=True)
class Witness:
    """``times`` of the pair's events and of all their causes since the event that dominates both; ``delays`` by name,
    all others typical. ``chain``: the events on the way to the pair whose delays make its times, in order."""

    times: Mapping[int, int]
    delays: Mapping[DelayName, int]
    chain: tuple[int, ...]


def witness(trace: Trace, first: int, second: int) -> Witness:
    """The run in which ``first`` comes as long after ``second`` as it can."""
    graph = trace.graph
    common = graph.common_dominator(first, second)
    members = causes_since(graph, common, {first, second})
    column = separation_table(graph, members, [second], open_us=_LONG_US)[:, 0].tolist()
    start = trace.times[common] - column[0]
    times = {number: start + offset for number, offset in zip(members, column, strict=True)}
    delays = {}
    for number in members[1:]:
        for arc in graph.arcs[number]:
            if arc.delay is not None:
                delays[arc.delay] = min(times[number] - times[arc.cause], _capped(arc.span.greatest))
    chain = _binding(graph, times, common, first) | _binding(graph, times, common, second)
    return Witness(times, delays, tuple(sorted(chain, key=lambda number: (times[number], number))))


def _capped(time: int) -> int:
    return min(time, _LONG_US) if time >= OPEN // 2 else time


def _binding(graph: EventGraph, times: Mapping[int, int], common: int, event: int) -> set[int]:
    """From the event back to the common one along the causes that made it as late as it is."""
    chain = {event}
    while event != common:
        time = times[event]
        event = max(graph.arcs[event], key=lambda arc: min(times[arc.cause] + _capped(arc.span.greatest), time)).cause
        chain.add(event)
    return chain


def replays(machine: Machine, settlement: Settlement, run: Witness, first: int, second: int) -> bool:
    """Whether playing the witness's delays shows the first event not having come by when the second does."""
    trace = settlement.trace
    horizon = min(run.times[first], run.times[second])
    cycles = len(trace.cycles) + 1
    limit = horizon + horizon // 10 + 1_000_000
    draw = given({**settlement.delays, **run.delays})
    player = Player(machine, lambda player, _: len(player.trace.cycles) < cycles, draw, until_us=limit)
    replayed = player.play()
    came = {
        arc.delay: replayed.times[number]
        for number in replayed.happened
        for arc in replayed.graph.arcs[number]
        if arc.delay is not None
    }
    due = [
        (time, came.get(arc.delay))
        for number, time in run.times.items()
        if number in trace.happened
        for arc in trace.graph.arcs[number]
        if arc.delay is not None
    ]
    offsets = {None if at is None else at - time for time, at in due if time <= horizon}
    if len(offsets) > 1 or None in offsets:
        return False
    offset = next(iter(offsets), 0) or 0
    return all(at is None or at - offset > horizon for time, at in due if time > horizon)
