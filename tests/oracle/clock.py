"""The heap of events, the draws and the log of one run: what every part of the player writes to."""

from __future__ import annotations

import heapq
from collections import Counter
from collections.abc import Callable
from dataclasses import dataclass, field
from enum import IntEnum

from seqcheck.machine.time import Span
from tests.oracle.draws import Draw
from tests.oracle.records import Drawn, Incident, LogLine


class Turn(IntEnum):
    """The order of events at the same instant.

    ``GOING`` is for what takes something away that another event of the same instant may still use; ``HALT`` comes
    before marks, as only marks reached strictly before the end of the overrun count. A coil that is released at the
    instant at which the opposed one is energized does not overlap it: releases come first. At ``LOOK`` the signals
    that follow the machine look at it. ``VERDICT`` is for what may still be put right within the instant."""

    INPUT = 0
    SEEN = 1
    FLOOR = 2
    DWELL = 3
    GOING = 4
    HALT = 5
    MARK = 6
    VALVE = 7
    RELEASE = 8
    ENERGIZE = 9
    LOOK = 10
    WATCHDOG = 11
    VERDICT = 12


@dataclass(slots=True, order=True)
class Ticket:
    """One event that is to come; ``alive`` until it has come or is called off. An ``idle`` one changes nothing, it
    only judges."""

    time: int
    turn: Turn
    number: int
    action: Callable[[], None] = field(compare=False)
    idle: bool = field(default=False, compare=False)
    alive: bool = field(default=True, compare=False)


class Clock:
    """Events in the order (time, turn, running number). ``diverted``: an incident has changed the course."""

    def __init__(self, draw: Draw) -> None:
        self.now = 0
        self.log_lines: list[LogLine] = []
        self.incidents: list[Incident] = []
        self.bounces: list[Incident] = []
        self.draws: list[Drawn] = []
        self.diverted = False
        self._draw = draw
        self._drawn: Counter[tuple[str, str]] = Counter()
        self._heap: list[Ticket] = []
        self._number = 0
        self._to_come = 0

    def draw(self, what: str, name: str, span: Span, n: int | None = None) -> int:
        """``n`` tells the occasion where it is more than a plain count of the draws."""
        if n is None:
            n = self._drawn[what, name]
            self._drawn[what, name] += 1
        value = self._draw(what, name, n, span)
        self.draws.append(Drawn(self.now, what, name, n, span, value))
        return value

    def at(self, time: int, turn: Turn, action: Callable[[], None], idle: bool = False) -> Ticket:
        if time < self.now:
            raise AssertionError(f"an event at {time} us was asked for at {self.now} us")
        self._number += 1
        self._to_come += not idle
        ticket = Ticket(time, turn, self._number, action, idle)
        heapq.heappush(self._heap, ticket)
        return ticket

    def call_off(self, *tickets: Ticket | None) -> None:
        for ticket in tickets:
            if ticket is not None and ticket.alive:
                self._spend(ticket)

    def _spend(self, ticket: Ticket) -> None:
        ticket.alive = False
        self._to_come -= not ticket.idle

    def next(self) -> Ticket | None:
        """The next event that still stands, left in the heap."""
        while self._heap and not self._heap[0].alive:
            heapq.heappop(self._heap)
        return self._heap[0] if self._heap else None

    def take(self) -> None:
        """Let the next event come."""
        ticket = heapq.heappop(self._heap)
        self._spend(ticket)
        self.now = ticket.time
        ticket.action()

    def nothing_to_come(self) -> bool:
        """Nothing but what only judges."""
        return self._to_come == 0

    def log(self, text: str) -> None:
        self.log_lines.append(LogLine(self.now, text))

    def bounce(self, sensor: str, step: str, text: str) -> None:
        self.bounces.append(Incident(self.now, "missed-signal", sensor, step, text))
        self.log(f"bounce: {sensor}: {text}")

    def incident(self, kind: str, subject: str, step: str | None, text: str, diverts: bool = True) -> None:
        self.incidents.append(Incident(self.now, kind, subject, step, text, diverts))
        self.diverted = self.diverted or diverts
        self.log(f"{kind}: {subject}: {text}")
