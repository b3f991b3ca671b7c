"""Two controllers for the simulated stations: one that draws every wait, one that really goes round.

The first takes the language at its word: each wait for a read, each round, is drawn anew whenever it occurs. The second
is the loop that a programmer of controllers knows: read all inputs, run, write all outputs, again. What the loop can do
is part of what the first can do.
"""

from __future__ import annotations

from collections.abc import Callable, Generator
from dataclasses import dataclass, field
from typing import Any

import simpy

from tests.outside.plant import NONE, Delayed, Draw, Line, Times, Waits

Condition = Callable[[], bool]


@dataclass
class Read:
    """``written``: when what it changes is written. ``floor``: before this there is no next read."""

    time: int
    written: int
    floor: int
    changes: dict[str, bool] = field(default_factory=dict)


Leaving = Generator[simpy.Event, Any, Read]


class Controller:
    """``scan``: one round. Or ``task``: from read to read, with ``run`` from a read to its write; neither: no time."""

    def __init__(
        self,
        env: simpy.Environment,
        draw: Draw,
        scan: Times | None = None,
        task: Times | None = None,
        run: Times = NONE,
    ) -> None:
        self.env, self.draw, self._scan, self._task, self._run = env, draw, scan, task, run
        self.round = scan or task or NONE
        self._seen: dict[str, Line] = {}
        #: Steps and flags: from when on they are known, and as what.
        self._memory: dict[str, list[tuple[int, bool]]] = {}
        self._moved = env.event()

    def watch(self, name: str, source: Line, delay: Times, on: Times, off: Times) -> None:
        """An input behind its filter."""
        self._seen[name] = self._input(Filtered(self.env, self.draw, source, delay, on, off))

    def sees(self, name: str) -> bool:
        return self._seen[name].on

    def remember(self, name: str, value: bool, read: Read) -> None:
        """A step or a flag that this read changes; the next one knows it."""
        self._memory.setdefault(name, []).append((read.floor, value))

    def knows(self, name: str) -> bool:
        known = [value for since, value in self._memory.get(name, ()) if since <= self.env.now]
        return bool(known) and known[-1]

    def _input(self, filtered: Line) -> Line:
        raise NotImplementedError

    def start(self) -> Leaving:
        raise NotImplementedError

    def leave(self, read: Read, until: Condition | None, dwell: int | None) -> Leaving:
        """The read at which a step is left that this read has entered."""
        raise NotImplementedError

    def join(self, reads: list[Read]) -> Leaving:
        raise NotImplementedError

    def _new_read(self) -> Read:
        now = round(self.env.now)
        if self._task is not None:
            return Read(now, now + self.draw(self._run), now + self.draw(self._task))
        written = now + self.draw(self.round)
        return Read(now, written, written)

    def _told(self, _: bool) -> None:
        self._moved.succeed()
        self._moved = self.env.event()


class Filtered(Line):
    """An input as the controller's memory has it: on and off may take different times."""

    def __init__(self, env: simpy.Environment, draw: Draw, source: Line, delay: Times, on: Times, off: Times) -> None:
        super().__init__(source.on)
        self._env, self._draw, self._delay, self._filters, self._turn = env, draw, delay, {True: on, False: off}, 0
        source.tell.append(self._start)

    def _start(self, on: bool) -> None:
        self._turn += 1
        self._env.process(self._follow(on, self._turn))

    def _follow(self, on: bool, turn: int) -> Waits:
        yield self._env.timeout(self._draw(self._delay) + self._draw(self._filters[on]))
        if turn == self._turn:
            self.put(on)


class Drawing(Controller):
    """Every wait for a read is drawn, from no time to the longest round."""

    @property
    def _wait(self) -> Times:
        return 0, self.round[1]

    def _input(self, filtered: Line) -> Line:
        seen = Delayed(self.env, self.draw, filtered, self._wait)
        seen.tell.append(self._told)
        return seen

    def remember(self, name: str, value: bool, read: Read) -> None:
        super().remember(name, value, read)
        self.env.process(self._wake(read))

    def _wake(self, read: Read) -> Waits:
        yield self.env.timeout(read.floor - self.env.now)
        self._told(True)

    def start(self) -> Leaving:
        yield self.env.timeout(0)
        return self._new_read()

    def leave(self, read: Read, until: Condition | None, dwell: int | None) -> Leaving:
        over = read.time + dwell + self.draw(self._wait) if dwell is not None else read.floor
        yield self.env.timeout(max(read.floor, over) - self.env.now)
        while until is not None and not until():
            yield self._moved
        return self._new_read()

    def join(self, reads: list[Read]) -> Leaving:
        yield self.env.timeout(max(max(read.floor for read in reads) - self.env.now, 0))
        return self._new_read()


class Looping(Controller):
    """Goes round without end; all steps share its reads, whose times nobody draws but through the rounds."""

    def __init__(
        self,
        env: simpy.Environment,
        draw: Draw,
        scan: Times | None = None,
        task: Times | None = None,
        run: Times = NONE,
    ) -> None:
        super().__init__(env, draw, scan, task, run)
        assert self.round != NONE, "a loop takes time"
        self._next = self.env.event()
        self.env.process(self._go_round())

    def _input(self, filtered: Line) -> Line:
        return filtered

    def _go_round(self) -> Waits:
        while True:
            read = self._new_read()
            now, self._next = self._next, self.env.event()
            now.succeed(read)
            yield self.env.timeout(read.floor - self.env.now)

    def start(self) -> Leaving:
        return (yield self._next)

    def leave(self, read: Read, until: Condition | None, dwell: int | None) -> Leaving:
        while True:
            now = yield self._next
            over = dwell is None or now.time >= read.time + dwell
            if over and (until is None or until()):
                return now

    def join(self, reads: list[Read]) -> Leaving:
        return (yield self._next)
