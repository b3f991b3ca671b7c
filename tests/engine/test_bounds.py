"""The bounds, held against every other way to get them: corners, random runs, mixed-integer programs, golden graphs."""

from __future__ import annotations

import networkx
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from seqcheck.engine.bounds import greatest_separation, greatest_separations, is_open, longest_least_chain
from seqcheck.engine.graph import OPEN, Arc, Event, EventGraph
from seqcheck.machine.time import Span
from tests.engine.graphs import at_random, corners, graph_of, milp_separation, random_graph

# The golden acyclic graph G8: eight events, all 64 separations agreed by five independent methods (brute force over
# 1024 corners, scipy.optimize.milp, z3, simpy runs, the recurrence), computed with these libraries.
G8_ARCS = [
    ("s", "a", 1, 3),
    ("s", "b", 2, 5),
    ("a", "c", 2, 4),
    ("b", "c", 1, 2),
    ("b", "d", 3, 6),
    ("c", "e", 1, 5),
    ("d", "e", 0, 2),
    ("c", "f", 2, 3),
    ("a", "f", 6, 9),
    ("e", "g", 1, 1),
    ("f", "g", 2, 4),
]
G8_GREATEST = """
0 3 5 7 11 13 12 16
-1 0 4 6 10 12 9 13
-2 1 0 5 6 10 10 14
-3 -2 -1 0 5 7 7 11
-5 -2 -3 2 0 7 7 11
-5 -3 -3 -1 0 0 6 10
-7 -6 -3 -2 3 5 0 6
-9 -8 -5 -4 -1 -1 -2 0
"""

# The golden cyclic graph C6: (cause, effect, cycles later, least, greatest), computed with networkx (simple cycles),
# scipy.optimize.linprog and simulation.
C6_ARCS = [
    ("d", "a", 1, 1, 2),
    ("f", "a", 1, 0, 1),
    ("a", "b", 0, 3, 5),
    ("a", "c", 0, 2, 4),
    ("b", "d", 0, 1, 2),
    ("c", "d", 0, 2, 3),
    ("b", "e", 0, 2, 2),
    ("e", "f", 0, 1, 3),
    ("c", "f", 0, 3, 6),
    ("d", "b", 1, 2, 4),
]


def test_the_golden_graph_has_all_its_64_separations() -> None:
    graph, number = graph_of(G8_ARCS)
    rows = [[int(cell) for cell in line.split()] for line in G8_GREATEST.strip().splitlines()]
    names = "sabcdefg"
    expected = {(one, other): rows[i][j] for i, one in enumerate(names) for j, other in enumerate(names)}
    found = greatest_separations(graph, [(number[one], number[other]) for one in names for other in names])
    assert {pair: found[number[pair[0]], number[pair[1]]] for pair in expected} == expected
    assert [graph.earliest[number[name]] for name in names] == [0, 1, 2, 3, 5, 5, 7, 9]
    assert [graph.latest[number[name]] for name in names] == [0, 3, 5, 7, 11, 13, 12, 16]


def test_the_golden_graph_s_longest_paths_are_those_of_networkx() -> None:
    graph, number = graph_of(G8_ARCS)
    exported = graph.as_networkx()
    assert networkx.is_directed_acyclic_graph(exported)
    assert networkx.dag_longest_path_length(exported, weight="least") == graph.earliest[number["g"]] == 9
    assert networkx.dag_longest_path_length(exported, weight="greatest") == graph.latest[number["g"]] == 16


def unfolded(periods: int) -> tuple[EventGraph, dict[str, int]]:
    """C6 played for some periods, all events of the first one without causes from before held at the start."""
    arcs = [("start", "a0", 0, 0), ("start", "b0", 0, 0)]
    for period in range(periods):
        for cause, effect, later, least, greatest in C6_ARCS:
            if period >= later:
                arcs.append((f"{cause}{period - later}", f"{effect}{period}", least, greatest))
    return graph_of(arcs)


@pytest.mark.parametrize("periods", [6, 10])
def test_the_golden_cyclic_graph_settles_to_its_known_separations(periods: int) -> None:
    graph, number = unfolded(periods)
    last = periods - 2

    def most(one: str, other: str) -> int:
        return greatest_separation(graph, number[one], number[other])

    assert most(f"f{last}", f"b{last + 1}") == 7
    assert most(f"a{last}", f"a{last + 1}") == 11
    assert -most(f"a{last + 1}", f"a{last}") == 6
    assert most(f"b{last}", f"f{last}") == 7
    assert most(f"d{last}", f"c{last + 1}") == 9


@settings(deadline=None, max_examples=40)
@given(st.integers(0, 10**6))
def test_bounds_are_the_corners_of_small_graphs(seed: int) -> None:
    graph = random_graph(seed, events=6)
    events = range(len(graph.events))
    found = greatest_separations(graph, [(one, other) for one in events for other in events])
    greatest = dict.fromkeys(found, -(10**9))
    for times in corners(graph):
        for one, other in greatest:
            greatest[one, other] = max(greatest[one, other], times[other] - times[one])
    assert found == greatest


@settings(deadline=None, max_examples=15)
@given(st.integers(0, 10**6))
def test_bounds_are_those_of_a_mixed_integer_program(seed: int) -> None:
    graph = random_graph(seed, events=12, width=5)
    pairs = [(one, other) for one in (3, 7, 11) for other in (2, 6, 10)]
    found = greatest_separations(graph, pairs)
    assert found == {pair: milp_separation(graph, *pair) for pair in pairs}


@settings(deadline=None, max_examples=60)
@given(st.integers(0, 10**6), st.integers(0, 10**6))
def test_no_run_leaves_the_bounds(seed: int, run: int) -> None:
    graph = random_graph(seed, events=40, width=6)
    events = range(0, 40, 3)
    found = greatest_separations(graph, [(one, other) for one in events for other in events])
    times = at_random(graph, run)
    assert all(times[other] - times[one] <= bound for (one, other), bound in found.items())


def test_plain_intervals_would_be_loose_where_delays_are_shared() -> None:
    graph, number = graph_of(G8_ARCS)
    pairs = {("f", "e"): (6, 5), ("e", "f"): (7, 6), ("f", "c"): (0, -2)}
    for (one, other), (naive, exact) in pairs.items():
        i, j = number[one], number[other]
        assert graph.latest[j] - graph.earliest[i] == naive
        assert greatest_separation(graph, i, j) == exact


def test_a_wait_without_limit_is_open_and_what_follows_it_is_not() -> None:
    graph = EventGraph()
    signal = graph.add(Event("signal", "start"), (Arc(0, Span(0, 0, OPEN)),))
    step = graph.add(Event("step", "first"), (Arc(signal, Span(3, 4, 5)),))
    later = graph.add(Event("step", "second"), (Arc(step, Span(0, 0, OPEN)),))
    assert is_open(greatest_separation(graph, 0, step))
    assert greatest_separation(graph, signal, step) == 5
    assert greatest_separation(graph, later, signal) == -3
    assert is_open(greatest_separation(graph, step, later))


@settings(deadline=None, max_examples=40)
@given(st.integers(0, 10**6))
def test_dominators_are_those_of_networkx(seed: int) -> None:
    graph = random_graph(seed, events=30, width=4)
    dominators = networkx.immediate_dominators(graph.as_networkx(), 0)
    for number in range(1, 30):
        above = graph.common_dominator(number, dominators[number])
        assert above == dominators[number]
        assert graph.below(above, number) == number


def test_causes_that_are_never_the_last_are_idle() -> None:
    graph, number = graph_of([("s", "a", 1, 2), ("a", "b", 3, 4), ("s", "c", 1, 9)])
    assert graph.without_idle([number["a"], number["b"]]) == (number["b"],)
    assert set(graph.without_idle([number["a"], number["c"]])) == {number["a"], number["c"]}
    assert graph.without_idle([0, number["a"], number["b"], number["a"]]) == (number["b"],)


@settings(deadline=None, max_examples=40)
@given(st.integers(0, 10**6))
def test_what_one_event_makes_sure_of_is_the_longest_path_over_the_least_delays(seed: int) -> None:
    graph = random_graph(seed, events=25, width=4)
    exported = graph.as_networkx()
    for cause in networkx.ancestors(exported, 24):
        between = (networkx.descendants(exported, cause) | {cause}) & (networkx.ancestors(exported, 24) | {24})
        longest = networkx.dag_longest_path_length(exported.subgraph(between), weight="least")
        assert longest_least_chain(graph, cause, 24) == longest
