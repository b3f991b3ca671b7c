"""Play a machine once.

Takes a machine, a way of drawing delays and how many cycles; gives the trace. The parts know each other only by what
they hand on: controller to valves to cylinders to inputs and back to the controller.
"""

from __future__ import annotations

from collections.abc import Callable

from seqcheck.engine.controller import Controller
from seqcheck.engine.cylinders import Cylinders, Regions
from seqcheck.engine.inputs import Inputs
from seqcheck.engine.timeline import Draw, Timeline, typical
from seqcheck.engine.trace import Origin, Read, Trace
from seqcheck.engine.valves import Valves
from seqcheck.machine.conditions import TermKind
from seqcheck.machine.model import Machine

#: Asked at each start of a cycle whether to go on.
GoOn = Callable[["Player", Read], bool]

#: A run of more events than this is given up, before memory runs out: some 20,000 steps, repetitions counted.
MOST_EVENTS = 1_000_000


class Player:
    def __init__(
        self,
        machine: Machine,
        go_on: GoOn,
        draw: Draw = typical,
        regions: Regions | None = None,
        until_us: int | None = None,
    ) -> None:
        self._go_on = go_on
        self._until_us = until_us
        self._stopped = False
        self.timeline = Timeline(draw)
        self.trace = Trace(self.timeline.graph, self.timeline.times, {}, self.timeline.happened)
        self.controller = Controller(machine, self.timeline, self.trace, self._switch, self._cycle_started)
        self.inputs = Inputs(machine, self.timeline, self.trace, self.controller)
        self.cylinders = Cylinders(machine, self.timeline, self.trace, regions or {}, self.inputs.change)
        self.valves = Valves(machine, self.timeline, self.trace, self.cylinders.follow)
        for sensor, value in self.cylinders.sensors_on.items():
            self.controller.initially(TermKind.SENSOR, sensor, value)
        for name in (*machine.coils, *machine.outputs):
            kind = TermKind.COIL if name in machine.coils else TermKind.OUTPUT
            self.controller.initially(kind, name, False)
        for kind, name in self.controller.asked:
            if kind is TermKind.STEP:
                self.controller.initially(kind, name, False)

    def play(self) -> Trace:
        self.controller.start()
        self._cycle_started(self.trace.cycles[0])
        while not self._stopped and not self.trace.endless:
            if self._until_us is not None and self.timeline.next_time > self._until_us:
                break
            if self.timeline.next() is None:
                self.trace.finished = True
                break
            if len(self.timeline.times) > MOST_EVENTS:
                self.trace.too_long = True
                break
        return self.trace

    @property
    def state(self) -> tuple[object, ...]:
        """The machine and what is under way, without times."""
        graph = self.trace.graph
        pending = sorted(
            (event.what, event.subject, event.detail)
            for event in (graph.events[number] for number in self.timeline.pending)
        )
        return self.controller.state, self.valves.state, self.cylinders.state, self.inputs.state, tuple(pending)

    def _switch(self, target: str, on: bool, event: int, origin: Origin) -> None:
        self.valves.switch(target, on, event, origin)

    def _cycle_started(self, read: Read) -> None:
        if not self._go_on(self, read):
            self._stopped = True
