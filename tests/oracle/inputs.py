"""One sensor, or signal that follows the machine, on its way to the controller: change of its own, input change, seen
by a read.

A change that is taken back before the next stage has come vanishes there together with what took it back.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from seqcheck.machine.devices import Controller, FollowingSignal, Sensor
from seqcheck.machine.model import Machine
from seqcheck.machine.time import Span
from tests.oracle.clock import Clock, Ticket, Turn


def filter_of(controller: Controller, on: bool) -> Span:
    return controller.input_on if on else controller.input_off


def read_wait(controller: Controller) -> Span:
    """From an input change to the read that sees it, or from the end of a time to the next read."""
    longest = controller.round.greatest
    return Span(0, longest // 2, longest)


@dataclass(frozen=True, slots=True)
class Feed:
    """What lies between a change and the input: ``own`` is drawn under ``word``, then the filter, then, behind an
    ``io``, its ``update``. ``swallows``: a change shorter than ``own`` is none, and so nobody misses it."""

    name: str
    word: str
    own: tuple[Span, Span]
    filter: tuple[Span, Span]
    update: Span | None
    wait: Span
    swallows: bool

    @staticmethod
    def of(machine: Machine, source: Sensor | FollowingSignal) -> Feed:
        controller, island = machine.controller, None
        if isinstance(source, Sensor):
            word, own = "delay", (source.delay, source.delay)
            island = None if source.via is None else machine.islands[source.via]
        else:
            word, own = "follow", (source.on, source.off)
        place = controller if island is None else island
        filters = place.input_on, place.input_off
        update = None if island is None else island.update
        return Feed(source.name, word, own, filters, update, read_wait(controller), word == "follow")


@dataclass(frozen=True, slots=True)
class Listener:
    """Whom a line tells: ``seen(name, on)``, ``vanished(name, on, came)`` for a change to ``on`` that came at ``came``
    and went unseen; ``spoils(name, on)`` asks whether some step that waits would lose what it has."""

    seen: Callable[[str, bool], None]
    vanished: Callable[[str, bool, int], None]
    spoils: Callable[[str, bool], bool]


class InputLine:
    """``physical``, ``level`` (at the input) and ``known`` (as read). ``physical_came`` is when it last changed."""

    def __init__(self, clock: Clock, feed: Feed, on: bool, listener: Listener) -> None:
        self.physical = self.level = self.known = on
        self.physical_came = 0
        self.word = "sensor" if feed.word == "delay" else "signal"
        self._clock = clock
        self._feed = feed
        self._listener = listener
        self._level_came = 0
        self._own_over = 0
        self._to_level: Ticket | None = None
        self._to_known: Ticket | None = None

    def change(self, on: bool) -> None:
        """The sensor itself changes, or what the signal follows."""
        clock, feed = self._clock, self._feed
        if on is self.physical:
            raise AssertionError(f"{feed.name} changes to what it is")
        self.physical = on
        clock.log(f"{self.word} {feed.name} {_word(on)}")
        if self._to_level is not None:
            clock.call_off(self._to_level)
            self._to_level = None
            came, self.physical_came = self.physical_came, clock.now
            if not feed.swallows or self._own_over < clock.now:
                self._vanish(not on, came)
            return
        came = self.physical_came = clock.now
        self._own_over = came + clock.draw(feed.word, feed.name, feed.own[not on], None)
        time = self._own_over + clock.draw("filter", feed.name, feed.filter[not on])
        if feed.update is not None:
            time += clock.draw("update", feed.name, feed.update)
        self._to_level = clock.at(time, Turn.INPUT, lambda: self._change_level(on, came))

    def _change_level(self, on: bool, came: int) -> None:
        name, now = self._feed.name, self._clock.now
        if self._to_known is not None and self._to_known.time == now:
            self._to_level = self._clock.at(now, Turn.GOING, lambda: self._change_level(on, came))
            return
        self._to_level = None
        self.level = on
        self._clock.log(f"input {name} {_word(on)}")
        if self._to_known is not None:
            self._clock.call_off(self._to_known)
            self._to_known = None
            self._vanish(not on, self._level_came)
            return
        self._level_came = came
        wait = self._clock.draw("see", name, self._feed.wait)
        self._to_known = self._clock.at(now + wait, Turn.SEEN, lambda: self._see(on, first=True))

    def _see(self, on: bool, first: bool) -> None:
        if first and self._listener.spoils(self._feed.name, on):
            self._to_known = self._clock.at(self._clock.now, Turn.GOING, lambda: self._see(on, first=False))
            return
        self._to_known = None
        self.known = on
        self._clock.log(f"seen {self._feed.name} {_word(on)}")
        self._listener.seen(self._feed.name, on)

    def _vanish(self, on: bool, came: int) -> None:
        self._clock.log(f"{self._feed.name} {_word(on)} vanishes unseen")
        self._listener.vanished(self._feed.name, on, came)


def _word(on: bool) -> str:
    return "on" if on else "off"
