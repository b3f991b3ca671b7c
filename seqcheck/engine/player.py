"""Play a machine once.

Takes a machine, a way of drawing delays and how many cycles; gives the trace. The parts know each other only by what
they hand on: controller to valves to cylinders to inputs and back to the controller.
"""

from __future__ import annotations

from collections.abc import Mapping

from seqcheck.engine.controller import Controller, Guide
from seqcheck.engine.cylinders import NOT_PLACED, Cylinders, Placed
from seqcheck.engine.inputs import Inputs
from seqcheck.engine.knowledge import Knowledge
from seqcheck.engine.plant import Plant
from seqcheck.engine.program import Program
from seqcheck.engine.switches import Switches
from seqcheck.engine.timeline import Draw, Timeline, typical
from seqcheck.engine.trace import CoilChange, Trace
from seqcheck.engine.valves import Valves
from seqcheck.machine.conditions import TermKind
from seqcheck.machine.model import Machine

#: A run of more events than this is given up, before memory runs out: some 20,000 steps, repetitions counted.
MOST_EVENTS = 1_000_000


class Player:
    """``guide`` decides what is free, and may ``stop`` the play at any read. ``placed``: where stopped pistons stand;
    what it does not know is found on the way, by what has come so far. ``programs`` of the sequences, where they are
    compiled already."""

    def __init__(
        self,
        machine: Machine,
        guide: Guide,
        draw: Draw = typical,
        placed: Placed = NOT_PLACED,
        until_us: int | None = None,
        programs: Mapping[str, Program] | None = None,
    ) -> None:
        self._guide = guide
        self._until_us = until_us
        self._stopped = False
        self.timeline = Timeline(draw)
        self.trace = Trace(self.timeline.graph, self.timeline.times, {}, self.timeline.happened)
        self._knowledge = Knowledge(machine, self.trace)
        self._plant = Plant(machine, self.timeline, self.trace, self._follow)
        self.switches = Switches(machine, self.timeline, self.trace, self._plant, self._energize)
        self.controller = Controller(
            machine, self.timeline, self.trace, self._knowledge, self._plant, self.switches.switch, guide, programs
        )
        self.inputs = Inputs(machine, self.timeline, self.trace, self._knowledge, self.controller.see)
        looked_at = self._plant.looked_at
        self.cylinders = Cylinders(
            machine, self.timeline, self.trace, placed, self.inputs.change, self._plant.notice, looked_at
        )
        self.valves = Valves(machine, self.timeline, self.trace, self.cylinders.follow, self._plant.notice, looked_at)
        for sensor, value in self.cylinders.sensors_on.items():
            self._knowledge.initially((TermKind.SENSOR, sensor, None), value)
            self._plant.initially({(TermKind.SENSOR, sensor, None): value})
        self._plant.initially(self.valves.aspects)
        self._plant.initially(self.cylinders.aspects)

    def play(self) -> Trace:
        self._settle_signals()
        self.controller.start()
        self._settle_signals()
        self._plant.go_live()
        timeline, trace = self.timeline, self.trace
        while not self._stopped and trace.stepless is None:
            if self._until_us is not None and timeline.next_time > self._until_us:
                break
            if timeline.next() is None:
                trace.finished = True
                break
            if len(timeline.times) > MOST_EVENTS:
                trace.too_long = True
                break
        return trace

    @property
    def state(self) -> tuple[object, ...]:
        """The machine and what is under way, without times."""
        graph = self.trace.graph
        pending = sorted(
            (event.what, event.subject, event.detail)
            for event in (graph.events[number] for number in self.timeline.pending)
        )
        return (
            self.controller.state,
            self.valves.state,
            self.cylinders.state,
            self.inputs.state,
            self._plant.state,
            tuple(pending),
        )

    def stop(self) -> None:
        self._stopped = True

    def _settle_signals(self) -> None:
        """A signal that follows the machine starts as the machine does; also once the first steps are active."""
        for name, value in self._plant.settle():
            self._knowledge.initially((TermKind.SIGNAL, name, None), value)
            self._plant.initially({(TermKind.SIGNAL, name, None): value})

    def _follow(self, signal: str, value: bool, event: int) -> None:
        self.inputs.change(signal, value, event)

    def _energize(self, change: CoilChange) -> None:
        self.valves.change(change)
