"""From a sensor at the cylinder to what the controller has seen.

Takes physical changes; gives the controller what survives the sensor's delay, the input filter and the wait for a
read. A change taken back before that vanishes together with the one that takes it back.
"""

from __future__ import annotations

from seqcheck.engine.controller import Controller, Known
from seqcheck.engine.graph import Event
from seqcheck.engine.timeline import Order, Timeline
from seqcheck.engine.trace import Edge, Trace
from seqcheck.machine.conditions import TermKind
from seqcheck.machine.model import Machine
from seqcheck.machine.time import NO_TIME


class Inputs:
    def __init__(self, machine: Machine, timeline: Timeline, trace: Trace, controller: Controller) -> None:
        self._machine = machine
        self._timeline = timeline
        self._trace = trace
        self._controller = controller
        self._on_the_way: dict[str, Edge] = {}
        self._unseen: dict[str, Edge] = {}
        self._wait = machine.controller.wait

    @property
    def state(self) -> tuple[object, ...]:
        on_the_way = sorted((sensor, edge.value) for sensor, edge in self._on_the_way.items())
        return tuple(on_the_way), tuple(sorted((sensor, edge.value) for sensor, edge in self._unseen.items()))

    def change(self, sensor: str, value: bool, at: int) -> None:
        """The sensor itself changes at event ``at``."""
        timeline, controller = self._timeline, self._machine.controller
        earlier = self._on_the_way.pop(sensor, None)
        if earlier is not None:
            earlier.lost_to = at
            timeline.call_off(earlier.arrived)
            return
        detail = "on" if value else "off"
        since = at
        delay = self._machine.sensors[sensor].delay
        if delay != NO_TIME:
            since = timeline.event(Event("sensor", sensor, detail), timeline.delay(at, delay, "delay", sensor))
        filtered = controller.input_on if value else controller.input_off
        arrived = timeline.event(Event("input", sensor, detail), timeline.delay(since, filtered, "filter", sensor))
        edge = Edge(sensor, value, at, arrived)
        self._trace.edges.setdefault(sensor, []).append(edge)
        self._on_the_way[sensor] = edge
        timeline.at(arrived, Order.INPUT, lambda: self._arrive(edge))

    def _arrive(self, edge: Edge) -> None:
        timeline, sensor = self._timeline, edge.sensor
        del self._on_the_way[sensor]
        earlier = self._unseen.pop(sensor, None)
        if earlier is not None:
            assert earlier.seen is not None
            earlier.lost_to = edge.arrived
            timeline.call_off(earlier.seen)
            return
        edge.seen = timeline.event(
            Event("seen", sensor, "on" if edge.value else "off"),
            timeline.delay(edge.arrived, self._wait, "see", sensor),
        )
        self._unseen[sensor] = edge
        timeline.at(edge.seen, Order.SEEN, lambda: self._see(edge))

    def _see(self, edge: Edge) -> None:
        assert edge.seen is not None
        del self._unseen[edge.sensor]
        self._controller.see(TermKind.SENSOR, edge.sensor, Known(edge.value, edge.seen, edge.arrived, edge))
