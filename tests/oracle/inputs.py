"""One sensor on its way to the controller: physical change, input change, seen by a read.

A change that is taken back before the next stage has come vanishes there together with what took it back.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from seqcheck.machine.devices import Controller, Sensor
from seqcheck.machine.time import Span
from tests.oracle.clock import Clock, Ticket, Turn


def filter_of(controller: Controller, on: bool) -> Span:
    return controller.input_on if on else controller.input_off


def read_wait(controller: Controller) -> Span:
    """From an input change to the read that sees it, or from the end of a time to the next read."""
    longest = controller.round.greatest
    return Span(0, longest // 2, longest)


@dataclass(frozen=True, slots=True)
class Listener:
    """Whom a line tells: ``seen(sensor, on)``, ``vanished(sensor, on, came)`` for a change to ``on`` that came at
    ``came`` and went unseen; ``spoils(sensor, on)`` asks whether some step that waits would lose what it has."""

    seen: Callable[[str, bool], None]
    vanished: Callable[[str, bool, int], None]
    spoils: Callable[[str, bool], bool]


class InputLine:
    """``physical``, ``level`` (after delay and filter) and ``known`` (as read), the latter since ``known_since``."""

    def __init__(self, clock: Clock, controller: Controller, sensor: Sensor, on: bool, listener: Listener) -> None:
        self.sensor = sensor
        self.physical = self.level = self.known = on
        self.known_since = 0
        self._clock = clock
        self._controller = controller
        self._listener = listener
        self._physical_came = self._level_came = 0
        self._to_level: Ticket | None = None
        self._to_known: Ticket | None = None

    def change(self, on: bool) -> None:
        """The sensor itself changes."""
        if on is self.physical:
            raise AssertionError(f"sensor {self.sensor.name} changes to what it is")
        self.physical = on
        self._clock.log(f"sensor {self.sensor.name} {_word(on)}")
        if self._to_level is not None:
            self._clock.call_off(self._to_level)
            self._to_level = None
            self._vanish(not on, self._physical_came)
            return
        came = self._physical_came = self._clock.now
        delay = self._clock.draw("delay", self.sensor.name, self.sensor.delay)
        delay += self._clock.draw("filter", self.sensor.name, filter_of(self._controller, on))
        self._to_level = self._clock.at(came + delay, Turn.INPUT, lambda: self._change_level(on, came))

    def _change_level(self, on: bool, came: int) -> None:
        name, now = self.sensor.name, self._clock.now
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
        wait = self._clock.draw("see", name, read_wait(self._controller))
        self._to_known = self._clock.at(now + wait, Turn.SEEN, lambda: self._see(on, first=True))

    def _see(self, on: bool, first: bool) -> None:
        if first and self._listener.spoils(self.sensor.name, on):
            self._to_known = self._clock.at(self._clock.now, Turn.GOING, lambda: self._see(on, first=False))
            return
        self._to_known = None
        self.known, self.known_since = on, self._clock.now
        self._clock.log(f"seen {self.sensor.name} {_word(on)}")
        self._listener.seen(self.sensor.name, on)

    def _vanish(self, on: bool, came: int) -> None:
        self._clock.log(f"{self.sensor.name} {_word(on)} vanishes unseen")
        self._listener.vanished(self.sensor.name, on, came)


def _word(on: bool) -> str:
    return "on" if on else "off"
