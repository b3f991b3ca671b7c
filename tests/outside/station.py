"""A station to simulate: its parts, and the steps that its program is made of.

A model is written as a subclass: ``build`` names the parts, ``cycle`` goes through the steps once. Times are
microseconds, the text's own numbers typed by hand.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Generator
from typing import Any

import simpy

from tests.outside.controllers import Condition, Controller, Filtered, Read
from tests.outside.plant import NONE, Cylinder, Delayed, Draw, Line, Times, Valve, Waits

#: Goes through steps from the read that enters the first to the one that leaves the last.
Course = Generator[simpy.Event, Any, Read]


class Station:
    """What the controller takes; a cycle counts from entering the first step, or from leaving it where that step waits
    for a signal from outside."""

    #: How long a run may take, in microseconds.
    PATIENCE = 40_000_000
    SCAN: Times | None = None
    TASK: Times | None = None
    RUN: Times = NONE
    INPUT: Times = NONE
    OUTPUT: Times = NONE

    def __init__(self, make: type[Controller], draw: Draw) -> None:
        self.env = simpy.Environment()
        self.draw = draw
        self.plc = make(self.env, draw, self.SCAN, self.TASK, self.RUN)
        self._images: dict[str, Line] = {}
        self._holds: Counter[str] = Counter()
        self.cycles: list[int] = []
        self.left_first: int | None = None
        self.build()

    def build(self) -> None:
        raise NotImplementedError

    def cycle(self, read: Read) -> Course:
        raise NotImplementedError
        yield

    def run(self, cycles: int) -> list[int]:
        """The durations of the cycles; fewer where the program waits for ever for something that does not come."""
        self.env.run(simpy.AnyOf(self.env, [self.env.process(self._go(cycles)), self.env.timeout(self.PATIENCE)]))
        return self.cycles

    def _go(self, cycles: int) -> Waits:
        read = yield from self.plc.start()
        for _ in range(cycles):
            begin, self.left_first = read.time, None
            read = yield from self.cycle(read)
            self.cycles.append(read.time - (begin if self.left_first is None else self.left_first))

    # Parts

    def coil(self, name: str, *delays: Times) -> Line:
        """``delays``: those of an island, in place of the controller's own."""
        self._images[name] = Line()
        return Delayed(self.env, self.draw, self._images[name], *(delays or [self.OUTPUT]))

    def follows(self, name: str, source: Line, on: Times, off: Times) -> None:
        self.plc.watch(name, Filtered(self.env, self.draw, source, NONE, on, off), NONE, self.INPUT, self.INPUT)

    def spring(self, coil: str, on: Times, off: Times) -> Valve:
        return Valve(self.env, self.draw, self.coil(coil), None, "b", on, off)

    def bistable(self, a: str, b: str, on: Times) -> Valve:
        return Valve(self.env, self.draw, self.coil(a), self.coil(b), None, on)

    def centred(self, a: str, b: str, on: Times, off: Times) -> Valve:
        return Valve(self.env, self.draw, self.coil(a), self.coil(b), "centre", on, off)

    def cylinder(
        self,
        valve: Valve,
        extend: Times,
        retract: Times,
        sensors: dict[str, tuple[float, float]],
        delays: dict[str, Times] | None = None,
        **more: Any,
    ) -> None:
        cylinder = Cylinder(self.env, self.draw, valve, extend, retract, sensors, **more)
        for name, line in cylinder.sensors.items():
            self.plc.watch(name, line, (delays or {}).get(name, NONE), self.INPUT, self.INPUT)

    # Steps

    def step(
        self,
        read: Read,
        on: str | None = None,
        until: str | Condition | None = None,
        dwell: float | None = None,
        also: Callable[[Read], None] | None = None,
    ) -> Course:
        """One step. ``until`` is a sensor or a condition; ``dwell`` is in milliseconds; ``also``: what is stored."""
        if on is not None:
            self._hold(on, 1, read)
        if also is not None:
            also(read)
        holds = (lambda: self.plc.sees(until)) if isinstance(until, str) else until
        left = yield from self.plc.leave(read, holds, None if dwell is None else round(1000 * dwell))
        if on is not None:
            self._hold(on, -1, left)
        return left

    def set(self, *coils: str) -> Callable[[Read], None]:
        def store(read: Read) -> None:
            for coil in coils:
                self._hold(coil, 1, read)

        return store

    def reset(self, *coils: str) -> Callable[[Read], None]:
        def clear(read: Read) -> None:
            for coil in coils:
                self._hold(coil, -self._holds[coil], read)

        return clear

    def pulse(self, coil: str, length: float) -> Callable[[Read], None]:
        def begin(read: Read) -> None:
            self._hold(coil, 1, read)
            self.env.process(self._end_of_pulse(coil, read, round(1000 * length)))

        return begin

    def _end_of_pulse(self, coil: str, read: Read, length: int) -> Waits:
        over = yield from self.plc.leave(read, None, length)
        self._hold(coil, -1, over)

    def outside(self, read: Read) -> Course:
        """A step that waits for a signal from outside, which comes when it comes."""
        pressed = Line()
        self.plc.watch("outside", pressed, NONE, self.INPUT, self.INPUT)
        self.env.process(self._press(pressed))
        left = yield from self.step(read, until="outside")
        self.left_first = left.time
        return left

    def _press(self, pressed: Line) -> Waits:
        yield self.env.timeout(self.draw((0, 500_000)))
        pressed.put(True)

    def together(self, read: Read, *branches: Course) -> Course:
        """Branches that this read enters; goes on when all have ended."""
        running = [self.env.process(branch) for branch in branches]
        ended = yield simpy.AllOf(self.env, running)
        return (yield from self.plc.join(list(ended.values())))

    def _hold(self, coil: str, more: int, read: Read) -> None:
        """Counts who holds a coil; the image is written with the read's other changes, all at once."""
        self._holds[coil] += more
        if not read.changes:
            self.env.process(self._write(read))
        read.changes[coil] = self._holds[coil] > 0

    def _write(self, read: Read) -> Waits:
        yield self.env.timeout(read.written - self.env.now)
        for coil, on in read.changes.items():
            self._images[coil].put(on)
