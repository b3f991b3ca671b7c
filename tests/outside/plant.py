"""Valves, cylinders and sensors as processes of simpy, the way somebody would write them who has simpy and no seqcheck.

Takes times in microseconds and a way of drawing them; nothing here comes from the program or from its other tests. Each
part tells those behind it by calling what has been put into its ``tell``.
"""

from __future__ import annotations

from collections.abc import Callable, Generator
from dataclasses import dataclass, field
from math import ceil, floor
from typing import Any

import simpy

#: Least and greatest, and the typical time where that is not the middle, rounded down.
Times = tuple[int, int] | tuple[int, int, int]
Draw = Callable[[Times], int]
Waits = Generator[simpy.Event, Any, Any]

NONE: Times = (0, 0)


def ms(least: float, most: float | None = None) -> Times:
    return round(1000 * least), round(1000 * (least if most is None else most))


@dataclass
class Line:
    """Something that is on or off. ``tell`` is called with the new value at each change."""

    on: bool = False
    tell: list[Callable[[bool], None]] = field(default_factory=list)

    def put(self, on: bool) -> None:
        if on != self.on:
            self.on = on
            for each in self.tell:
                each(on)


class Derived(Line):
    """On while a condition on other lines holds."""

    def __init__(self, holds: Callable[[], bool], *lines: Line) -> None:
        super().__init__(holds())
        for line in lines:
            line.tell.append(lambda _: self.put(holds()))


class Lasted:
    """How long a line was on, each time that it has gone off again."""

    def __init__(self, env: simpy.Environment, line: Line) -> None:
        self.times: list[int] = []
        self._env, self._since = env, 0
        line.tell.append(self._note)

    def _note(self, on: bool) -> None:
        if on:
            self._since = round(self._env.now)
        else:
            self.times.append(round(self._env.now) - self._since)


class Delayed(Line):
    """Follows another line; a change that is taken back before its delay is over never shows."""

    def __init__(self, env: simpy.Environment, draw: Draw, source: Line, *delays: Times) -> None:
        super().__init__(source.on)
        self._env, self._draw, self._delays, self._turn = env, draw, delays, 0
        source.tell.append(self._start)

    def _start(self, on: bool) -> None:
        self._turn += 1
        self._env.process(self._follow(on, self._turn))

    def _follow(self, on: bool, turn: int) -> Waits:
        yield self._env.timeout(sum(self._draw(delay) for delay in self._delays))
        if turn == self._turn:
            self.put(on)


class Valve:
    """``a`` and ``b`` are its coils. ``rest``: where it goes with neither (None: it stays)."""

    def __init__(
        self,
        env: simpy.Environment,
        draw: Draw,
        a: Line,
        b: Line | None,
        rest: str | None,
        on: Times,
        off: Times = NONE,
    ) -> None:
        self._env, self._draw, self._a, self._b, self._rest = env, draw, a, b, rest
        self._on, self._off, self._turn = on, off, 0
        self.position = self._asked = rest or "b"
        self.tell: list[Callable[[str], None]] = []
        #: By position: on while it is reached and no shift is under way.
        self.reached: dict[str, Line] = {name: Line(name == self.position) for name in "ab"}
        for coil in (a, b):
            if coil is not None:
                coil.tell.append(lambda _: self._ask())

    def _ask(self) -> None:
        a, b = self._a.on, self._b is not None and self._b.on
        if a and b:
            return
        wanted = "a" if a else "b" if b else self._rest or self.position
        if wanted != self._asked:
            self._asked = wanted
            self._turn += 1
            if wanted != self.position:
                self._env.process(self._shift(wanted, self._on if a or b else self._off, self._turn))
            self._stands(self.position if wanted == self.position else None)

    def _stands(self, position: str | None) -> None:
        for name, line in self.reached.items():
            line.put(name == position)

    def _shift(self, wanted: str, time: Times, turn: int) -> Waits:
        yield self._env.timeout(self._draw(time))
        if turn == self._turn:
            self.position = wanted
            self._stands(wanted)
            for each in self.tell:
                each(wanted)


class Cylinder:
    """Moves out while the valve is at ``a``, in while it is at ``b``. ``sensors``: name to shares of the stroke."""

    def __init__(
        self,
        env: simpy.Environment,
        draw: Draw,
        valve: Valve,
        extend: Times,
        retract: Times,
        sensors: dict[str, tuple[float, float]],
        lag: Times = NONE,
        uneven: float = 0,
        overrun: Times = NONE,
    ) -> None:
        self._env, self._draw = env, draw
        self._strokes, self._lag, self._uneven, self._overrun = {1: extend, -1: retract}, lag, uneven, overrun
        self._marks = sorted({0.0, 1.0, *(edge for edges in sensors.values() for edge in edges)})
        self._edges = sensors
        self.sensors = {name: Line(low == 0) for name, (low, _) in sensors.items()}
        #: Between these two marks, at a mark where they are one.
        self._low = self._high = 0
        self._turn = 0
        valve.tell.append(self._drive)

    def _drive(self, position: str) -> None:
        self._turn += 1
        direction = {"a": 1, "b": -1, "centre": 0}[position]
        self._env.process(self._move(direction) if direction else self._stop(self._turn))

    def _stop(self, turn: int) -> Waits:
        """The stroke goes on for a little while, unless the next one begins before."""
        self._turn -= 1
        yield self._env.timeout(self._draw(self._overrun))
        if self._turn == turn - 1:
            self._turn += 2

    def _move(self, direction: int) -> Waits:
        turn, env = self._turn, self._env
        end = len(self._marks) - 1 if direction > 0 else 0
        start = before = env.now
        if self._low == self._high == end:
            return
        if self._low == self._high:
            base = self._low
            yield env.timeout(self._draw(self._lag))
            if turn != self._turn:
                return
            before = env.now
            self._stand(*sorted((base, base + direction)))
        else:
            behind, base = (self._low, self._high)[::direction]
            yield env.timeout(self._draw((0, self._part(direction, behind, base)[1])))
            if turn != self._turn:
                return
            start = before = env.now
            self._come_to(base, direction, end)
        last = base
        for mark in range(base + direction, end + direction, direction):
            whole = {base, mark} == {0, len(self._marks) - 1}
            time = self._strokes[direction] if whole else self._part(direction, base, mark, self._strokes[direction][1])
            apart = 0 if mark == end else self._part(direction, last, mark)[0]
            due = max(start + self._draw(time), before + apart)
            yield env.timeout(due - env.now)
            if turn != self._turn:
                return
            self._come_to(mark, direction, end)
            last, before = mark, env.now

    def _part(self, direction: int, one: int, other: int, most: int | None = None) -> Times:
        """The time over a part of the stroke, whose speed may differ from even. ``most``: of the whole stroke, of which
        the rest of the way takes its part."""
        share = abs(self._marks[one] - self._marks[other])
        least, greatest = self._strokes[direction][:2]
        longest = ceil(round(greatest * share * (1 + self._uneven), 6))
        typical = floor(round((least + greatest) // 2 * share, 6))
        if most is not None:
            longest = min(longest, most - self._shortest(direction, 1 - share))
        return self._shortest(direction, share), longest, typical

    def _shortest(self, direction: int, share: float) -> int:
        """The shortest stroke less the longest lag is what the piston has for the whole way."""
        return floor(round(max(0, self._strokes[direction][0] - self._lag[1]) * share * (1 - self._uneven), 6))

    def _come_to(self, mark: int, direction: int, end: int) -> None:
        self._stand(mark, mark) if mark == end else self._stand(*sorted((mark, mark + direction)))

    def _stand(self, low: int, high: int) -> None:
        self._low, self._high = low, high
        for name, (begin, end) in self._edges.items():
            self.sensors[name].put(begin <= self._marks[low] and self._marks[high] <= end)
