"""From a sensor at the cylinder, or a signal that follows the machine, to what the controller has seen.

Takes physical changes; gives the controller what survives the sensor's delay, the input filter (and the bus) and the
wait for a read. A change taken back before that vanishes together with the one that takes it back.
"""

from __future__ import annotations

from collections.abc import Callable

from seqcheck.engine.conditions import Aspect
from seqcheck.engine.graph import Event
from seqcheck.engine.knowledge import Knowledge
from seqcheck.engine.timeline import Order, Timeline
from seqcheck.engine.trace import Edge, Known, Trace
from seqcheck.machine.conditions import TermKind
from seqcheck.machine.devices import Controller, FollowingSignal, Island
from seqcheck.machine.model import Machine
from seqcheck.machine.records import record
from seqcheck.machine.time import Span


@record
class InputPath:
    """What a change of an input passes on its way to the controller: the sensor's own delay (or the time by which a
    signal follows) under the name ``what``, the filter, the update of the island."""

    aspect: Aspect
    what: str
    delay: Span
    filtered: Span
    update: Span | None

    @property
    def whole(self) -> Span:
        parts = [self.delay, self.filtered, *([self.update] if self.update is not None else [])]
        return Span(
            sum(part.least for part in parts), sum(part.typical for part in parts), sum(part.greatest for part in parts)
        )


def input_path(machine: Machine, name: str, value: bool) -> InputPath:
    """The path of a sensor's or a following signal's change to on or off."""
    settings: Controller | Island = machine.controller
    update = None
    sensor = machine.sensors.get(name)
    if sensor is not None:
        aspect: Aspect = (TermKind.SENSOR, name, None)
        what, delay = "delay", sensor.delay
        if sensor.via is not None:
            settings = machine.islands[sensor.via]
            update = machine.islands[sensor.via].update
    else:
        signal = machine.signals[name]
        assert isinstance(signal, FollowingSignal)
        aspect = (TermKind.SIGNAL, name, None)
        what, delay = "follow", signal.on if value else signal.off
    return InputPath(aspect, what, delay, settings.input_on if value else settings.input_off, update)


class Inputs:
    def __init__(
        self,
        machine: Machine,
        timeline: Timeline,
        trace: Trace,
        knowledge: Knowledge,
        see: Callable[[Aspect, Known], None],
    ) -> None:
        self._machine = machine
        self._timeline = timeline
        self._trace = trace
        self._knowledge = knowledge
        self._see_by_controller = see
        self._on_the_way: dict[str, Edge] = {}
        self._unseen: dict[str, Edge] = {}
        self._wait = machine.controller.wait
        self._paths = {
            (name, value): input_path(machine, name, value)
            for value in (True, False)
            for name in (
                *machine.sensors,
                *(one.name for one in machine.signals.values() if isinstance(one, FollowingSignal)),
            )
        }

    @property
    def state(self) -> tuple[object, ...]:
        on_the_way = sorted((sensor, edge.value) for sensor, edge in self._on_the_way.items())
        return tuple(on_the_way), tuple(sorted((sensor, edge.value) for sensor, edge in self._unseen.items()))

    def change(self, name: str, value: bool, at: int) -> None:
        """The sensor itself, or what the signal follows, changes at event ``at``."""
        timeline = self._timeline
        earlier = self._on_the_way.pop(name, None)
        if earlier is not None:
            earlier.lost_to = at
            timeline.call_off(earlier.arrived)
            return
        path, detail = self._paths[name, value], "on" if value else "off"
        since = at
        if path.delay.greatest:
            since = timeline.event(Event("sensor", name, detail), timeline.delay(at, path.delay, path.what, name))
        arrived = timeline.event(Event("input", name, detail), timeline.delay(since, path.filtered, "filter", name))
        if path.update is not None:
            arrived = timeline.event(Event("input", name, detail), timeline.delay(arrived, path.update, "update", name))
        edge = Edge(name, value, at, arrived)
        self._trace.edges.setdefault(name, []).append(edge)
        self._on_the_way[name] = edge
        timeline.at(arrived, Order.INPUT, lambda: self._arrive(edge))

    def _arrive(self, edge: Edge) -> None:
        timeline, name = self._timeline, edge.sensor
        del self._on_the_way[name]
        aspect = self._paths[name, edge.value].aspect
        self._knowledge.held[aspect] = edge.value
        earlier = self._unseen.pop(name, None)
        if earlier is not None:
            assert earlier.seen is not None
            earlier.lost_to = edge.arrived
            timeline.call_off(earlier.seen)
            return
        edge.seen = timeline.event(
            Event("seen", name, "on" if edge.value else "off"),
            timeline.delay(edge.arrived, self._wait, "see", name),
        )
        self._unseen[name] = edge
        timeline.at(edge.seen, Order.SEEN, lambda: self._see(aspect, edge))

    def _see(self, aspect: Aspect, edge: Edge) -> None:
        assert edge.seen is not None
        del self._unseen[edge.sensor]
        self._see_by_controller(aspect, Known(edge.value, edge.seen, edge.arrived, edge))
