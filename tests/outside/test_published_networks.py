"""Networks of activities with optimistic, likely and pessimistic times, as textbooks and question pages give them.

Once as event graphs: each activity becomes an event that ends it; the longest chain at all-least, typical and
all-greatest times is the length of the network. Once as machines: each activity becomes a stroke. Sources stand beside
the data; where a page gives only the data, the lengths were computed with networkx.
"""

from __future__ import annotations

from itertools import pairwise

import networkx
import pytest

from seqcheck.engine.bounds import greatest_separation, longest_least_chain
from seqcheck.engine.graph import Arc, Event, EventGraph
from seqcheck.machine.time import Span
from tests.outside.as_machine import activities_on, from_arcs, network_report

#: Activity: (optimistic, likely, pessimistic), and what comes before it.
Activities = dict[str, tuple[tuple[int, int, int], str]]

# Published question and answer page (solutioninn.com, question 184578): data and table of paths.
P1: Activities = {
    "A": ((1, 2, 3), ""),
    "B": ((2, 3, 4), ""),
    "C": ((1, 2, 3), "A"),
    "D": ((2, 4, 6), "AB"),
    "E": ((1, 4, 7), "C"),
    "F": ((1, 2, 9), "C"),
    "G": ((3, 4, 11), "DE"),
    "H": ((1, 2, 3), "FG"),
}
# Published question and answer page (wizedu.com, question 717873): data, means, slacks; lengths by networkx.
P2: Activities = {
    "A": ((5, 5, 7), ""),
    "B": ((1, 2, 5), ""),
    "C": ((5, 5, 5), "A"),
    "D": ((4, 8, 13), "A"),
    "E": ((1, 10, 17), "BC"),
    "F": ((1, 5, 7), "D"),
    "G": ((2, 6, 9), "D"),
    "H": ((4, 4, 6), "EF"),
    "I": ((2, 7, 10), "GH"),
    "J": ((2, 4, 7), "I"),
    "K": ((6, 10, 13), "I"),
    "L": ((2, 6, 6), "J"),
    "M": ((2, 2, 3), "K"),
    "N": ((7, 7, 12), "LM"),
}
# Published question (justaaa.com, advanced math 460263); the answer computed with networkx.
P5: Activities = {
    "A": ((8, 10, 15), ""),
    "B": ((7, 8, 9), ""),
    "C": ((5, 6, 10), "A"),
    "D": ((3, 3, 3), "A"),
    "E": ((1, 5, 9), "BD"),
    "F": ((4, 7, 10), "BD"),
    "G": ((3, 8, 10), "C"),
    "H": ((5, 7, 9), "E"),
    "I": ((4, 5, 8), "E"),
    "J": ((2, 5, 8), "F"),
    "K": ((1, 3, 6), "HI"),
}
# Published textbook chapter (Taylor, Introduction to Management Science, chapter 8, as shown on ar.scribd.com
# 47113515): arcs from node to node with their length, and the slack found there.
Arcs = dict[tuple[int, int], tuple[int, int]]
P3: Arcs = {
    (1, 2): (7, 2),
    (1, 3): (10, 0),
    (2, 4): (6, 2),
    (3, 4): (5, 0),
    (3, 5): (4, 4),
    (4, 5): (3, 0),
    (5, 6): (2, 0),
}
P4: Arcs = {
    (1, 2): (8, 1),
    (1, 3): (10, 0),
    (1, 4): (9, 6),
    (2, 5): (6, 1),
    (2, 6): (4, 8),
    (3, 5): (5, 0),
    (4, 5): (0, 6),
    (4, 7): (7, 11),
    (5, 7): (12, 0),
    (5, 8): (15, 1),
    (6, 9): (18, 8),
    (7, 8): (4, 0),
    (8, 9): (7, 0),
}
#: Length and critical path, published for both.
LENGTHS = [(P3, 20, [1, 3, 4, 5, 6]), (P4, 38, [1, 3, 5, 7, 8, 9])]


def network(activities: Activities) -> tuple[EventGraph, int]:
    """The graph, and the event at which the last activity has ended."""
    graph = EventGraph()
    ends: dict[str, int] = {}
    for name, ((least, likely, most), before) in activities.items():
        causes = [ends[other] for other in before] or [0]
        ready = graph.add(Event("ready", name), tuple(Arc(cause, Span.exactly(0)) for cause in causes))
        ends[name] = graph.add(Event("end", name), (Arc(ready, Span(least, likely, most)),))
    followed = {other for _, before in activities.values() for other in before}
    last = [ends[name] for name in activities if name not in followed]
    return graph, graph.add(Event("end", ""), tuple(Arc(cause, Span.exactly(0)) for cause in last))


def typical_length(graph: EventGraph) -> int:
    times = [0]
    for arcs in graph.arcs[1:]:
        times.append(max(times[arc.cause] + arc.span.typical for arc in arcs))
    return times[-1]


@pytest.mark.parametrize(
    ("activities", "lengths"), [(P1, (8, 14, 27)), (P2, (32, 50, 73)), (P5, (18, 28, 42))], ids=["P1", "P2", "P5"]
)
def test_length_of_a_network_at_its_three_times(activities: Activities, lengths: tuple[int, int, int]) -> None:
    graph, end = network(activities)
    least, greatest = -greatest_separation(graph, end, 0), greatest_separation(graph, 0, end)
    assert (least, typical_length(graph), greatest) == lengths
    exported = graph.as_networkx()
    assert networkx.dag_longest_path_length(exported, weight="greatest") == greatest


def arc_network(arcs: Arcs) -> tuple[EventGraph, dict[int, int]]:
    """The graph, and the number of each node's event."""
    graph, number = EventGraph(), {1: 0}
    for node in sorted({end for _, end in arcs}):
        into = tuple(Arc(number[start], Span.exactly(time)) for (start, end), (time, _) in arcs.items() if end == node)
        number[node] = graph.add(Event("node", str(node)), into)
    return graph, number


@pytest.mark.parametrize(("arcs", "length", "path"), LENGTHS, ids=["P3", "P4"])
def test_length_and_critical_path_of_a_published_network(arcs: Arcs, length: int, path: list[int]) -> None:
    graph, number = arc_network(arcs)
    assert greatest_separation(graph, 0, number[max(number)]) == length
    longest = networkx.dag_longest_path(graph.as_networkx(), weight="greatest")
    named = {event: node for node, event in number.items()}
    assert [named[event] for event in longest] == path


@pytest.mark.parametrize(("arcs", "length", "path"), LENGTHS, ids=["P3", "P4"])
def test_slack_of_every_published_activity(arcs: Arcs, length: int, path: list[int]) -> None:
    graph, number = arc_network(arcs)
    last = number[max(number)]
    for (start, end), (time, slack) in arcs.items():
        before, behind = graph.latest[number[start]], longest_least_chain(graph, number[end], last)
        assert length - before - time - behind == slack, (start, end)


# The same as machines


def as_strokes(activities: Activities, which: int | None = None) -> dict[str, tuple[tuple[int, ...], list[str]]]:
    """``which``: only the optimistic (0), likely (1) or pessimistic (2) times."""
    return {
        name: (times if which is None else (times[which],), list(before))
        for name, (times, before) in activities.items()
    }


@pytest.mark.parametrize(
    ("activities", "lengths", "path"),
    [(P1, (8, 14, 27), "ACEGH"), (P2, (32, 50, 73), "ACEHIKMN"), (P5, (18, 28, 42), "ADEHK")],
    ids=["P1", "P2", "P5"],
)
def test_a_network_of_strokes_takes_what_the_network_takes(
    activities: Activities, lengths: tuple[int, int, int], path: str
) -> None:
    """The paths of P1 and P5 are published, that of P2 was computed with networkx."""
    report = network_report(as_strokes(activities))
    cycle = dict(report.cycles)["main"]
    assert (cycle.least, cycle.typical, cycle.greatest) == tuple(1000 * length for length in lengths)
    assert "".join(activities_on(report)) == path


def test_the_shortest_and_the_longest_time_may_lie_on_different_paths() -> None:
    """P1 at all optimistic times takes 8 by way of B-D-G-H, at all likely ones 14 by A-C-E-G-H (networkx)."""
    for which, length, path in ((0, 8, "BDGH"), (1, 14, "ACEGH"), (2, 27, "ACEGH")):
        report = network_report(as_strokes(P1, which))
        cycle = dict(report.cycles)["main"]
        assert cycle.least == cycle.greatest == 1000 * length
        assert "".join(activities_on(report)) == path


@pytest.mark.parametrize(("arcs", "length", "path"), LENGTHS, ids=["P3", "P4"])
def test_a_published_network_of_strokes(arcs: Arcs, length: int, path: list[int]) -> None:
    report = network_report(from_arcs([(str(start), str(end), (time,)) for (start, end), (time, _) in arcs.items()]))
    cycle = dict(report.cycles)["main"]
    assert cycle.least == cycle.greatest == 1000 * length
    assert activities_on(report) == [f"{one}_{other}" for one, other in pairwise(path)]
