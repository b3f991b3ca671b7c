"""Orders that decide what follows and are nobody's fault in themselves.

Takes a trace and a window of its time; gives the pairs of events that came in one order and would lead elsewhere in the
other: the end of a pulse against another command of its coil, the ends of two commands that hold a coil together, the
alternatives of a condition of which the first to hold counts, a watchdog that leads to another step against what it
waits for, what a choice asks against the read at which it is taken, and what makes true the conditions between which a
rule limits the time.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from itertools import pairwise

from seqcheck.engine.bounds import greatest_separations
from seqcheck.engine.branches import Branches
from seqcheck.engine.choice_orders import ChoiceOrders
from seqcheck.engine.condition_orders import (
    condition_orders,
    driven,
    followed,
    limit_orders,
    limited,
    reached_positions,
    stroke_orders,
    watched,
)
from seqcheck.engine.order import Order
from seqcheck.engine.trace import Effect, Touch, Trace, Visit, Wait
from seqcheck.engine.wait_orders import alarm_orders, visit_orders
from seqcheck.machine.model import Machine
from seqcheck.machine.steps import CommandKind


class Waits:
    """The waits of a play that may still have orders that are open: what was over before some time has had them
    found."""

    def __init__(self) -> None:
        self.visits: list[Visit] = []
        self.choices: list[ChoiceOrders] = []
        self._begun = [0, 0]

    def follow(self, trace: Trace, since: int) -> None:
        """Take in what has begun, and let go what was over before ``since``, which never goes back."""
        visits, choices = self._begun
        self.visits += trace.visits[visits:]
        self.choices += map(ChoiceOrders, trace.choices[choices:])
        self._begun = [len(trace.visits), len(trace.choices)]
        self.visits = [visit for visit in self.visits if _is_of_late(trace, visit, since)]
        self.choices = [one for one in self.choices if _is_of_late(trace, one.choice, since)]


class Orders:
    def __init__(self, machine: Machine) -> None:
        self._machine = machine
        self._branches = Branches(machine)
        self._followed = list(followed(machine))
        self._driven = list(driven(machine))
        self._limited = list(limited(machine))
        self._watched = watched(machine)

    def open(self, trace: Trace, since: int, begin: int, end: int, waits: Waits | None = None) -> list[Order]:
        """Those whose second event came from ``begin`` to before ``end`` and that can be the other way round. What was
        over before ``since`` has had its orders found; ``waits``: of the same play, as they were left last time."""
        waits = Waits() if waits is None else waits
        waits.follow(trace, since)
        found = [
            one
            for one in self._all(trace, waits, begin)
            if one.first != one.second
            and trace.times[one.first] <= trace.times[one.second]
            and begin <= trace.times[one.second] < end
        ]
        rows = greatest_separations(trace.graph, ((one.second, one.first) for one in found))
        return [one for one in found if rows[one.second, one.first] >= (0 if one.strict else 1)]

    def assume(self, trace: Trace, since: int, begin: int, end: int, waits: Waits | None = None) -> list[Order]:
        """The same, from now on taken in the bounds to be as they were played."""
        found = self.open(trace, since, begin, end, waits)
        trace.graph.assumed += tuple((order.first, order.second) for order in found)
        return found

    def _all(self, trace: Trace, waits: Waits, begin: int) -> Iterator[Order]:
        yield from self._of_commands(trace, begin)
        for visit in waits.visits:
            if len(visit.alternatives) > 1 or visit.alarm is not None:
                yield from visit_orders(trace, visit)
        for one in waits.choices:
            yield from one.open(trace, begin)
            choice = one.choice
            if choice.left is not None and choice.alarm is not None:
                yield from alarm_orders(trace, choice, ("choose", choice.choose.place))
        for name, condition in self._followed:
            yield from condition_orders(trace, trace.changes, name, condition, begin)
        for cylinder in self._watched:
            yield from stroke_orders(trace, cylinder)
        for text, start, goal in self._limited:
            yield from limit_orders(trace, text, start, goal, begin)
        if self._driven:
            reached = reached_positions(self._machine, trace, self._driven)
            for name, condition in self._driven:
                yield from condition_orders(trace, reached, name, condition, begin)

    def _of_commands(self, trace: Trace, begin: int) -> Iterator[Order]:
        """All but those that are a fault in themselves: branches that race for a coil."""
        for target, touches in trace.touches.items():
            for first, second in _in_order_since(trace, touches, begin):
                if first.event == second.event or not _differs(first, second):
                    continue
                races = first.conflicts_with(second) and self._branches.parallel(first.origin.step, second.origin.step)
                if not races:
                    named = frozenset((touch.origin.place, touch.effect) for touch in (first, second))
                    yield Order((target, named), first.event, second.event)


def _in_order_since(trace: Trace, touches: Sequence[Touch], begin: int) -> Iterator[tuple[Touch, Touch]]:
    """Each touch that came since, with the one before it, in the order of the play. (A pulse that a reset has ended is
    noted with when it would have ended: touches are only nearly in order.)"""
    late = [touch for touch in touches if trace.times[touch.event] >= begin]
    if late:
        early = [touch for touch in touches if trace.times[touch.event] < begin]
        before = max(early, key=lambda touch: (trace.times[touch.event], touch.event), default=None)
        late.sort(key=lambda touch: (trace.times[touch.event], touch.event))
        yield from pairwise([*([before] if before is not None else []), *late])


def _is_of_late(trace: Trace, wait: Wait, since: int) -> bool:
    return wait.left is None or trace.times[wait.left.event] >= since


def _differs(first: Touch, second: Touch) -> bool:
    """The end of a pulse, against anything; the ends of two commands that hold the coil together."""
    ends = [touch.effect is Effect.ENDS for touch in (first, second)]
    pulses = [touch.origin.kind is CommandKind.PULSE for touch in (first, second)]
    return all(ends) or (ends[0] and pulses[0]) or (ends[1] and pulses[1])
