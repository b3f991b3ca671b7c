"""Coils and outputs as they are physically: energized at the valve, switched at the device.

Takes written changes with the event at which the output of the controller switches; tells the valves of coils, and the
plant of both. An output of its own times (a contactor, say) switches after them; taken back before, it does not.
"""

from __future__ import annotations

from collections.abc import Callable

from seqcheck.engine.graph import Event
from seqcheck.engine.plant import Plant
from seqcheck.engine.timeline import Order, Timeline
from seqcheck.engine.trace import CoilChange, Origin, Trace
from seqcheck.machine.conditions import TermKind
from seqcheck.machine.model import Machine


class Switches:
    def __init__(
        self,
        machine: Machine,
        timeline: Timeline,
        trace: Trace,
        plant: Plant,
        energize: Callable[[CoilChange], None],
    ) -> None:
        self._machine = machine
        self._timeline = timeline
        self._plant = plant
        self._energize = energize
        #: For each output that is on its way, the event at which it will have switched.
        self._on_the_way: dict[str, int] = {}

    def switch(self, target: str, on: bool, event: int, origin: Origin) -> None:
        """A coil or output will be switched by the controller at ``event``."""
        if target in self._machine.coils:
            change = CoilChange(target, on, event, origin)
            self._timeline.at(event, Order.COIL, lambda: self._coil(change))
        elif self._plant.looks_at((TermKind.OUTPUT, target, None)):
            self._timeline.at(event, Order.COIL, lambda: self._output(target, on, event))

    def _coil(self, change: CoilChange) -> None:
        self._plant.notice(change.event, {(TermKind.COIL, change.coil, None): change.energized})
        self._energize(change)

    def _output(self, name: str, on: bool, event: int) -> None:
        timeline, output = self._timeline, self._machine.outputs[name]
        earlier = self._on_the_way.pop(name, None)
        if earlier is not None:
            timeline.call_off(earlier)
            return
        detail = "on" if on else "off"
        switched = timeline.event(
            Event("switched", name, detail),
            timeline.delay(event, output.on if on else output.off, "switch", f"{name} {detail}"),
        )
        self._on_the_way[name] = switched

        def arrive() -> None:
            del self._on_the_way[name]
            self._plant.notice(switched, {(TermKind.OUTPUT, name, None): on})

        timeline.at(switched, Order.COIL, arrive)
