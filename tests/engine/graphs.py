"""Event graphs for tests: from arcs written as ``cause effect least greatest``, and other ways to bound them."""

from __future__ import annotations

import itertools
import random
from collections.abc import Iterator

import numpy
from scipy.optimize import Bounds, LinearConstraint, milp

from seqcheck.engine.graph import Arc, Event, EventGraph
from seqcheck.machine.time import Span


def graph_of(arcs: list[tuple[str, str, int, int]]) -> tuple[EventGraph, dict[str, int]]:
    """A graph whose start is the cause of the first arc; effects must follow their causes in the list."""
    graph = EventGraph()
    number = {arcs[0][0]: 0}
    incoming: dict[str, list[tuple[str, int, int]]] = {}
    for cause, effect, least, greatest in arcs:
        incoming.setdefault(effect, []).append((cause, least, greatest))
    waiting = list(incoming)
    while waiting:
        name = next(name for name in waiting if all(cause in number for cause, _, _ in incoming[name]))
        waiting.remove(name)
        number[name] = graph.add(
            Event("event", name),
            tuple(Arc(number[cause], Span.between(least, greatest)) for cause, least, greatest in incoming[name]),
        )
    return graph, number


def random_graph(seed: int, events: int, width: int = 4) -> EventGraph:
    """Each event has one to three causes among the last ``width`` events."""
    draw = random.Random(seed)
    graph = EventGraph()
    for number in range(1, events):
        causes = draw.sample(range(max(0, number - width), number), k=min(number, draw.randint(1, 3), width))
        arcs = []
        for cause in causes:
            least = draw.randint(0, 9)
            arcs.append(Arc(cause, Span.between(least, least + draw.randint(0, 9))))
        graph.add(Event("event", str(number)), tuple(arcs))
    return graph


def times_for(graph: EventGraph, delays: dict[tuple[int, int], int]) -> list[int]:
    """The times of all events for given delays, by (event, index of the arc)."""
    times = [0]
    for number in range(1, len(graph.events)):
        times.append(max(times[arc.cause] + delays[number, index] for index, arc in enumerate(graph.arcs[number])))
    return times


def all_arcs(graph: EventGraph) -> list[tuple[int, int, Arc]]:
    return [(number, index, arc) for number in range(len(graph.events)) for index, arc in enumerate(graph.arcs[number])]


def corners(graph: EventGraph) -> Iterator[list[int]]:
    """Every run in which each delay is at one of its ends. An oracle, as each delay stands on one arc."""
    arcs = all_arcs(graph)
    for ends in itertools.product(*({arc.span.least, arc.span.greatest} for _, _, arc in arcs)):
        yield times_for(graph, {(number, index): end for (number, index, _), end in zip(arcs, ends, strict=True)})


def at_random(graph: EventGraph, seed: int) -> list[int]:
    draw = random.Random(seed)
    return times_for(
        graph,
        {(number, index): draw.randint(arc.span.least, arc.span.greatest) for number, index, arc in all_arcs(graph)},
    )


def milp_separation(graph: EventGraph, source: int, event: int) -> int:
    """``max t(event) - t(source)`` as a mixed-integer program: for each event one cause is chosen to be the last."""
    arcs = all_arcs(graph)
    events, unknowns = len(graph.events), len(graph.events) + len(arcs)
    far = sum(arc.span.greatest for _, _, arc in arcs) + 1
    rows, lower, upper = [], [], []
    for position, (number, _, arc) in enumerate(arcs):
        row = numpy.zeros(unknowns)
        row[number], row[arc.cause] = 1, -1
        rows.append(row.copy())
        lower.append(arc.span.least)
        upper.append(numpy.inf)
        row[events + position] = far
        rows.append(row)
        lower.append(-numpy.inf)
        upper.append(arc.span.greatest + far)
    for number in range(1, events):
        row = numpy.zeros(unknowns)
        for position, (effect, _, _) in enumerate(arcs):
            row[events + position] = effect == number
        rows.append(row)
        lower.append(1)
        upper.append(1)
    goal = numpy.zeros(unknowns)
    goal[source] += 1
    goal[event] -= 1
    result = milp(
        goal,
        constraints=LinearConstraint(numpy.array(rows), lower, upper),
        integrality=numpy.array([0] * events + [1] * len(arcs)),
        bounds=Bounds(numpy.zeros(unknowns), numpy.array([0.0] + [numpy.inf] * (events - 1) + [1.0] * len(arcs))),
    )
    assert result.success
    return round(-result.fun)
