"""Signals from outside on their way to what waits for them.

A signal comes anew for each step or choice that begins to wait for it, once for all that begin at the same read, and
stays until these are left. It passes the input filter. Filter and read of the n-th that is drawn are numbered n too,
so that one that nobody waits for any more leaves the names of the others as they are.
"""

from __future__ import annotations

from dataclasses import dataclass, field

from seqcheck.machine.conditions import TermKind
from seqcheck.machine.devices import OutsideSignal
from seqcheck.machine.model import Machine
from seqcheck.machine.time import Span
from tests.oracle.clock import Clock, Ticket, Turn
from tests.oracle.conditions import Literal
from tests.oracle.inputs import filter_of, read_wait
from tests.oracle.knowledge import Knowledge
from tests.oracle.reads import Read

ANY_TIME = Span(0, 0, 60_000_000)
"""When an outside signal may come that has no ``after``."""

YES_OR_NO = Span(0, 0, 1)


@dataclass(slots=True, eq=False)
class Arrival:
    """One signal being ``wanted`` for so many ``waiters``: at the input (``level``), and as read (``seen``)."""

    signal: str
    wanted: bool
    level: bool = False
    seen: bool = False
    waiters: int = 0
    ticket: Ticket | None = None


@dataclass(slots=True, eq=False)
class Awaited:
    """What one step or choice waits for from outside, by name and value."""

    arrivals: dict[tuple[str, bool], Arrival] = field(default_factory=dict)

    def of(self, literal: Literal) -> Arrival | None:
        return self.arrivals.get((literal.subject, literal.wanted)) if literal.kind is TermKind.SIGNAL else None


class Outside:
    """``on`` are the signals that a read has seen, as long as something waits for them."""

    def __init__(self, clock: Clock, machine: Machine, knowledge: Knowledge) -> None:
        self.on: set[str] = set()
        self._clock = clock
        self._machine = machine
        self._knowledge = knowledge
        self._waiting: list[Awaited] = []
        self._drawn: dict[str, int] = {}

    def comes_from_outside(self, literal: Literal) -> bool:
        return literal.kind is TermKind.SIGNAL and isinstance(self._machine.signals[literal.subject], OutsideSignal)

    def comes_at_any_time(self, literal: Literal) -> bool:
        signal = self._machine.signals.get(literal.subject)
        return literal.kind is TermKind.SIGNAL and isinstance(signal, OutsideSignal) and signal.after is None

    def ask(self, literals: tuple[Literal, ...], place: str, occasion: int) -> dict[str, bool]:
        """How each signal is as a choice is come to: either way."""
        names = dict.fromkeys(literal.subject for literal in literals if self.comes_from_outside(literal))
        return {name: bool(self._clock.draw("asks", f"{name} {place}", YES_OR_NO, occasion)) for name in names}

    def await_all(self, read: Read, literals: tuple[Literal, ...], asked: dict[str, bool] | None = None) -> Awaited:
        """Let come what is wanted from outside, from this read on; what has been asked and is so, is there already."""
        awaited = Awaited()
        for literal in literals:
            key = literal.subject, literal.wanted
            if not self.comes_from_outside(literal) or key in awaited.arrivals:
                continue
            if asked is not None and asked[literal.subject] is literal.wanted:
                arrival = Arrival(*key, level=True, seen=True)
            elif key in read.arrivals:
                arrival = read.arrivals[key]
            else:
                arrival = read.arrivals[key] = Arrival(*key)
                self._come(arrival)
            arrival.waiters += 1
            awaited.arrivals[key] = arrival
        self._waiting.append(awaited)
        self._switch_on(awaited)
        return awaited

    def leave(self, awaited: Awaited) -> None:
        """Nothing waits here any more."""
        self._waiting.remove(awaited)
        for arrival in awaited.arrivals.values():
            arrival.waiters -= 1
            if arrival.waiters == 0:
                self._clock.call_off(arrival.ticket)
            if not any((arrival.signal, True) in other.arrivals for other in self._waiting):
                self.on.discard(arrival.signal)

    def _switch_on(self, awaited: Awaited) -> None:
        self.on |= {each.signal for each in awaited.arrivals.values() if each.wanted and each.seen}

    def _come(self, arrival: Arrival) -> None:
        clock, name = self._clock, arrival.signal
        signal = self._machine.signals[name]
        assert isinstance(signal, OutsideSignal)
        number = self._drawn.get(name, 0)
        self._drawn[name] = number + 1
        word = "on" if arrival.wanted else "off"

        def come() -> None:
            clock.log(f"signal {name} comes")
            delay = clock.draw("filter", name, filter_of(self._machine.controller, arrival.wanted), number)
            arrival.ticket = clock.at(clock.now + delay, Turn.INPUT, change)

        def change() -> None:
            arrival.level = True
            clock.log(f"input {name} {word}")
            wait = clock.draw("see", name, read_wait(self._machine.controller), number)
            arrival.ticket = clock.at(clock.now + wait, Turn.SEEN, see)

        def see() -> None:
            arrival.seen = True
            self._knowledge.stirred = True
            clock.log(f"seen {name} {word}")
            if arrival.wanted:
                self.on.add(name)

        after = clock.draw("outside", name, ANY_TIME if signal.after is None else signal.after, number)
        arrival.ticket = clock.at(clock.now + after, Turn.MARK, come)
