"""Global time: what is due, in order, and how every delay is drawn.

Takes a way of drawing delays; gives events their times and calls what is due. Simultaneous events come in the order
of ``Order``, then in the order in which they were scheduled, so that a run is always the same run.
"""

from __future__ import annotations

import heapq
from collections.abc import Callable, Mapping, Sequence
from enum import IntEnum

from seqcheck.engine.graph import Arc, DelayName, Event, EventGraph
from seqcheck.machine.time import NO_TIME, Span

#: Gives the time for (what takes it, whose, how often before, within which span), in microseconds.
Draw = Callable[[str, str, int, Span], int]


class Order(IntEnum):
    """At equal times an obligation counts as kept: what has to come first does come first."""

    SEEN = 0
    INPUT = 1
    CONTROLLER = 2
    STOP = 3
    MARK = 4
    VALVE = 5
    COIL = 6
    WATCHDOG = 7


def typical(what: str, name: str, number: int, span: Span) -> int:
    return span.typical


def given(delays: Mapping[DelayName, int]) -> Draw:
    """Draws these delays, held within their spans, and all others at their typical times."""
    if not delays:
        return typical

    def draw(what: str, name: str, number: int, span: Span) -> int:
        return min(max(delays.get((what, name, number), span.typical), span.least), span.greatest)

    return draw


class Timeline:
    """``times`` by event number, those of events that were called off included: they are when it would have been."""

    def __init__(self, draw: Draw) -> None:
        self.graph = EventGraph()
        self.times: list[int] = [0]
        self.happened: set[int] = {0}
        self._draw = draw
        self._occurred: dict[tuple[str, str], int] = {}
        self._due: list[tuple[int, int, int, int]] = []
        self._actions: dict[int, list[tuple[Order, Callable[[], None]]]] = {}
        self._scheduled = 0

    def delay(self, cause: int, span: Span, what: str, name: str, number: int | None = None) -> tuple[Arc, int]:
        """An arc whose delay is drawn, and the time at which it ends. ``number`` is the occasion where something
        other than a plain count tells it (the same occasion must be the same in every run)."""
        if number is None:
            key = what, name
            number = self._occurred.get(key, 0)
            self._occurred[key] = number + 1
        draw = self._draw
        time = span.typical if draw is typical else draw(what, name, number, span)
        return Arc(cause, span, (what, name, number)), self.times[cause] + time

    def event(self, event: Event, *arcs: tuple[Arc, int]) -> int:
        if len(arcs) == 1:
            arc, time = arcs[0]
            self.times.append(time)
            return self.graph.add(event, (arc,))
        self.times.append(max([time for _, time in arcs]))
        return self.graph.add(event, tuple([arc for arc, _ in arcs]))

    def loose(self, cause: int, span: Span = NO_TIME) -> tuple[Arc, int]:
        """An arc whose delay nothing draws: it takes no time, a fixed one, or the typical one of its span."""
        return Arc(cause, span), self.times[cause] + span.typical

    def fixed(self, cause: int, time_us: int = 0) -> tuple[Arc, int]:
        return self.loose(cause, Span.exactly(time_us) if time_us else NO_TIME)

    def last_of(self, event: Event, causes: Sequence[int]) -> int:
        """The event at which the last of the causes has come: one of them, where it is always the last."""
        kept = self.graph.without_idle(causes)
        if len(kept) == 1:
            return kept[0]
        return self.event(event, *(self.fixed(cause) for cause in kept))

    def at(self, number: int, order: Order, action: Callable[[], None]) -> None:
        """Do this when the event comes, unless it is called off before. An event that has come already is due now."""
        waiting = self._actions.get(number)
        if waiting is None:
            self._actions[number] = [(order, action)]
        else:
            first = all(order < other for other, _ in waiting)
            waiting.append((order, action))
            if not first:
                return
        self._scheduled += 1
        heapq.heappush(self._due, (self.times[number], order, self._scheduled, number))

    def call_off(self, number: int) -> None:
        self._actions.pop(number, None)

    @property
    def pending(self) -> list[int]:
        """What is still to come. (Behind an event that has come something may be due at that very instant.)"""
        return sorted(number for number in self._actions if number not in self.happened)

    @property
    def next_time(self) -> int:
        """When the next event is due; the time of the last one once nothing is."""
        while self._due and self._due[0][3] not in self._actions:
            heapq.heappop(self._due)
        return self._due[0][0] if self._due else max(self.times)

    def next(self) -> int | None:
        """Let the next event come; None when nothing is due any more."""
        while self._due:
            _, _, _, number = heapq.heappop(self._due)
            actions = self._actions.pop(number, None)
            if actions is not None:
                self.happened.add(number)
                if len(actions) > 1:
                    actions.sort(key=lambda entry: entry[0])
                for _, action in actions:
                    action()
                return number
        return None
