"""Orders that are a matter of time and nobody's fault: the machine played both ways.

Takes a machine; gives the settlements that together stand for all runs. Where a pulse may end before or after another
command of its coil, or either of two commands that hold a coil may be the last to end, no rule is broken by the one
or the other, yet what follows differs. Each such order that the bounds leave open is played the other way round too;
in every settlement the orders are assumed as it was played.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import pairwise

from seqcheck.engine.bounds import greatest_separations
from seqcheck.engine.branches import Branches
from seqcheck.engine.graph import DelayName
from seqcheck.engine.settle import Settlement, settle
from seqcheck.engine.trace import Effect, Touch, Trace
from seqcheck.engine.witness import witness
from seqcheck.machine.model import Machine
from seqcheck.machine.places import Place
from seqcheck.machine.steps import CommandKind

#: More ways than this are not played; the report then says so.
MOST_WORLDS = 16

#: What the text says of an order: the coil, and the two commands with what becomes of them.
_Key = tuple[str, frozenset[tuple[Place, Effect]]]


@dataclass(frozen=True, slots=True)
class _Order:
    key: _Key
    first: int
    second: int


@dataclass(frozen=True, slots=True)
class Worlds:
    """The first is the typical one. ``complete``: every order left open was played both ways."""

    settlements: tuple[Settlement, ...]
    complete: bool


def play_worlds(machine: Machine) -> Worlds:
    branches = Branches(machine)
    found: list[Settlement] = []
    waiting: list[tuple[frozenset[_Key], dict[DelayName, int]]] = [(frozenset(), {})]
    planned = {frozenset[_Key]()}
    while waiting and len(found) < MOST_WORLDS:
        turned, delays = waiting.pop(0)
        settlement = settle(machine, delays)
        found.append(settlement)
        orders = _open_orders(settlement.trace, branches)
        for order in orders:
            both = turned ^ {order.key}
            if both not in planned and order.key not in turned:
                planned.add(both)
                run = witness(settlement.trace, order.first, order.second)
                waiting.append((both, {**delays, **run.delays}))
        settlement.trace.graph.assumed += [(order.first, order.second) for order in orders]
    return Worlds(tuple(found), not waiting)


def _open_orders(trace: Trace, branches: Branches) -> list[_Order]:
    """The orders of touches that differ in what follows and that can be the other way round."""
    orders = list(_orders(trace, branches))
    rows = greatest_separations(trace.graph, ((order.second, order.first) for order in orders))
    return [order for order in orders if rows[order.second, order.first] > 0]


def _orders(trace: Trace, branches: Branches) -> Iterator[_Order]:
    """All but those that are a fault in themselves: branches that race for a coil."""
    for target, touches in trace.touches.items():
        in_order = sorted(touches, key=lambda touch: (trace.times[touch.event], touch.event))
        for first, second in pairwise(in_order):
            races = first.conflicts_with(second) and branches.parallel(first.origin.step, second.origin.step)
            if first.event != second.event and _differs(first, second) and not races:
                named = frozenset((touch.origin.place, touch.effect) for touch in (first, second))
                yield _Order((target, named), first.event, second.event)


def _differs(first: Touch, second: Touch) -> bool:
    """The end of a pulse, against anything; the ends of two commands that hold the coil together."""
    ends = [touch.effect is Effect.ENDS for touch in (first, second)]
    pulses = [touch.origin.kind is CommandKind.PULSE for touch in (first, second)]
    return all(ends) or (ends[0] and pulses[0]) or (ends[1] and pulses[1])
