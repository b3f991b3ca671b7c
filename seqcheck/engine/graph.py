"""The timed event graph.

Takes events with their causes in the order in which they become known (causes first); gives, for each event, its
earliest and latest time, the events that dominate it, and the whole as a networkx graph. Refuses nothing: the
player only adds what has causes already.

An event happens at ``t(e) = max over causes c of t(c) + d`` with each delay ``d`` drawn from its own span: events
with max-causality and bounded delays, as in McMillan & Dill, *Algorithms for interface timing verification*, ICCD
1992.
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Collection, Container, Iterable, Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from typing import TYPE_CHECKING

from seqcheck.machine.time import NO_TIME, Span

if TYPE_CHECKING:
    import networkx

#: Stands for a delay that nothing limits. Some 35 years: far over every real span, and thousands of them in a row
#: still fit in 64 bits, so that sums need no special case. At the edges it becomes None.
OPEN = 1 << 50

#: So many single steps are taken towards a common dominator before jumps are.
_NEAR_BY = 8

#: What a delay is called, so that the same one can be drawn again in a replay: what takes the time, whose time it
#: is, and how often that had occurred before.
DelayName = tuple[str, str, int]


@dataclass(slots=True)
class Arc:
    """From a cause to its event. ``delay`` is None where the span has no width to draw from."""

    cause: int
    span: Span
    delay: DelayName | None = None


@dataclass(slots=True)
class Event:
    """``what`` happens to ``subject``; ``detail`` tells occasions apart that differ in kind (a position, on or off)."""

    what: str
    subject: str
    detail: str = ""


class EventGraph:
    """Events numbered from 0, the start, which has no cause."""

    def __init__(self) -> None:
        self.events: list[Event] = [Event("start", "")]
        self.arcs: list[tuple[Arc, ...]] = [()]
        #: The same without their delays.
        self.causes: list[Sequence[int]] = [()]
        self._assumed: tuple[tuple[int, int], ...] = ()
        #: The same by the one of the two that comes first in the graph, and these by themselves.
        self._in_order: list[tuple[int, int]] = []
        self._firsts: list[int] = []
        #: How many separations have been worked out over it, those on the way included.
        self.work = 0
        self.earliest: list[int] = [0]
        self.latest: list[int] = [0]
        #: For each event the last one that dominates it.
        self.dominator: list[int] = [0]
        self._depth: list[int] = [0]
        self._jump: list[int] = [0]

    def add(self, event: Event, arcs: tuple[Arc, ...]) -> int:
        """Add an event with at least one cause; gives its number."""
        number = len(self.events)
        self.events.append(event)
        self.arcs.append(arcs)
        self.causes.append([arc.cause for arc in arcs])
        all_earliest, all_latest = self.earliest, self.latest
        first = arcs[0]
        dominator, span = first.cause, first.span
        earliest, latest = all_earliest[dominator] + span.least, all_latest[dominator] + span.greatest
        for arc in arcs[1:]:
            cause, span = arc.cause, arc.span
            earliest = max(earliest, all_earliest[cause] + span.least)
            latest = max(latest, all_latest[cause] + span.greatest)
            dominator = self.common_dominator(dominator, cause)
        all_earliest.append(earliest)
        all_latest.append(latest)
        # A jump upwards, whose lengths grow in the way of a skew binary number, so that a way up of any length takes a
        # number of jumps that grows with its logarithm (Myers, *An applicative random-access stack*, Inf. Proc. Letters
        # 17, 1983).
        depths, jumps = self._depth, self._jump
        depth, jump = depths[dominator], jumps[dominator]
        further = jumps[jump]
        self.dominator.append(dominator)
        depths.append(depth + 1)
        jumps.append(further if depth - depths[jump] == depths[jump] - depths[further] else dominator)
        return number

    def common_dominator(self, one: int, other: int) -> int:
        """The last event through which every chain of causes of both runs (an event dominates itself)."""
        depth, dominator, jump = self._depth, self.dominator, self._jump
        # Mostly it is near by: what comes later in the graph dominates nothing that came before.
        for _ in range(_NEAR_BY):
            if one == other:
                return one
            if one > other:
                one = dominator[one]
            else:
                other = dominator[other]
        if depth[one] < depth[other]:
            one, other = other, one
        one = self._ancestor_at(one, depth[other])
        while one != other:
            if jump[one] != jump[other]:
                one, other = jump[one], jump[other]
            else:
                one, other = dominator[one], dominator[other]
        return one

    def _ancestor_at(self, event: int, depth: int) -> int:
        depths, jumps, dominator = self._depth, self._jump, self.dominator
        above = depths[event] - depth
        while above > _NEAR_BY:
            jump = jumps[event]
            event = jump if depths[jump] >= depth else dominator[event]
            above = depths[event] - depth
        for _ in range(above):
            event = dominator[event]
        return event

    def below(self, dominator: int, event: int) -> int:
        """The dominator of ``event`` right under ``dominator``; ``event`` itself where the two are the same."""
        if event == dominator:
            return event
        return self._ancestor_at(event, self._depth[dominator] + 1)

    def first_among(self, dominating: Container[int], top: int, event: int) -> int:
        """The event, or else the last one that dominates it, that is among these: ``top``, which dominates the event,
        and whatever lies between it and others of them."""
        dominator, jumps = self.dominator, self._jump
        while event not in dominating:
            jump = jumps[event]
            event = dominator[event] if jump <= top or jump in dominating else jump
        return event

    def dominates(self, dominator: int, event: int) -> bool:
        """Whether every chain of causes of the event runs through another one, its dominator."""
        depth = self._depth[dominator]
        return self._depth[event] > depth and self._ancestor_at(event, depth) == dominator

    def never_later(self, one: int, other: int) -> bool:
        """Whether plain intervals since the common dominator already show ``one`` to be at or before ``other``."""
        return self.least_lead(one, other) >= 0

    def always_earlier(self, one: int, other: int) -> bool:
        """Whether they show it to be before that."""
        return self.least_lead(one, other) > 0

    def least_lead(self, one: int, other: int) -> int:
        """How much sooner than ``other`` they show ``one`` to be: it is no less."""
        common = self.common_dominator(one, other)
        return self.earliest[other] - self.earliest[common] - (self.latest[one] - self.latest[common])

    def leads_to(self, one: int, other: int) -> bool:
        """Whether a chain of causes runs from one event to the other, which then is never earlier."""
        if self.dominates(one, other):
            return True
        seen = set()
        waiting = [other]
        while waiting:
            number = waiting.pop()
            if number == one:
                return True
            if number > one and number not in seen:  # Causes come before what they cause.
                seen.add(number)
                waiting += self.causes[number]
        return False

    def without_idle(self, causes: Iterable[int]) -> tuple[int, ...]:
        """Causes of equal standing less those that can never be the last: the events of two threads that wait for
        the same thing come out as one event, and old causes do not tie new events to the distant past."""
        kept: list[int] = []
        causes = tuple(causes)
        if len(causes) == 1:
            return causes
        for cause in sorted(set(causes), reverse=True):
            if not kept:
                kept.append(cause)
            elif not any(self.never_later(cause, other) for other in kept):
                kept = [other for other in kept if not self.never_later(other, cause)]
                kept.append(cause)
        return tuple(kept)

    @property
    def assumed(self) -> tuple[tuple[int, int], ...]:
        """Pairs of events of which the first is taken not to come after the second, though causes do not say so."""
        return self._assumed

    @assumed.setter
    def assumed(self, pairs: Iterable[tuple[int, int]]) -> None:
        self._assumed = tuple(pairs)
        self._in_order = sorted(self._assumed, key=min)
        self._firsts = [min(pair) for pair in self._in_order]

    def assumed_between(self, dominator: int, last: int) -> list[tuple[int, int]]:
        """The orders that are taken for granted whose first event in the graph lies behind ``dominator`` and no further
        than ``last``."""
        firsts = self._firsts
        return self._in_order[bisect_right(firsts, dominator) : bisect_right(firsts, last)]

    def assumed_below(self, dominator: int) -> list[tuple[int, int]]:
        """The orders that are taken for granted of two events that this one dominates."""
        return [pair for pair in self.assumed if self.is_below(dominator, pair)]

    def is_below(self, dominator: int, pair: tuple[int, int]) -> bool:
        """Whether the event dominates both of these."""
        return min(pair) > dominator and all(self.dominates(dominator, number) for number in pair)

    @contextmanager
    def not_assuming(self, pairs: Collection[tuple[int, int]], but: Collection[tuple[int, int]] = ()) -> Iterator[None]:
        """Meanwhile these orders are not taken for granted, but others are."""
        assumed = self.assumed
        self.assumed = (*(pair for pair in assumed if pair not in pairs), *but)
        try:
            yield
        finally:
            self.assumed = assumed

    def as_networkx(self) -> networkx.DiGraph[int]:
        """The graph for other programs: nodes with ``what``, ``subject``, ``detail``, arcs with ``least`` and
        ``greatest`` in microseconds. Two delays between the same two events keep the arc of the greater one each."""
        import networkx

        graph: networkx.DiGraph[int] = networkx.DiGraph()
        for number, event in enumerate(self.events):
            graph.add_node(number, what=event.what, subject=event.subject, detail=event.detail)
            for arc in self.arcs[number]:
                known = graph.get_edge_data(arc.cause, number, {"least": arc.span.least, "greatest": arc.span.greatest})
                least, greatest = max(known["least"], arc.span.least), max(known["greatest"], arc.span.greatest)
                graph.add_edge(arc.cause, number, least=least, greatest=greatest)
        return graph


def after(cause: int, span: Span = NO_TIME) -> Arc:
    """An arc whose delay is not drawn: no time at all, or a fixed one."""
    return Arc(cause, span)
