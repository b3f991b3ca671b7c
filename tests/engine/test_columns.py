"""Two ways through a part of the graph, source by source and all at once, give the same; the way up meets causes."""

from __future__ import annotations

import random

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from seqcheck.engine import columns
from seqcheck.engine.bounds import causes_since, greatest_separation
from seqcheck.engine.columns import separation_column, separations_within
from seqcheck.engine.graph import OPEN, Arc, Event, EventGraph
from seqcheck.machine.time import Span
from tests.engine.graphs import random_graph


def _some_orders(graph: EventGraph, events: int, draw: random.Random, count: int = 3) -> list[tuple[int, int]]:
    """Orders that the run at typical times keeps, so that there is a run that keeps them all."""
    times = [0]
    for arcs in graph.arcs[1:]:
        times.append(max(times[arc.cause] + arc.span.typical for arc in arcs))
    pairs = [(draw.randrange(events), draw.randrange(events)) for _ in range(count)]
    return [(one, other) if times[one] <= times[other] else (other, one) for one, other in pairs if one != other]


@settings(deadline=None, max_examples=60)
@given(st.integers(0, 10**6), st.booleans())
def test_a_table_holds_what_the_columns_hold(seed: int, with_orders: bool) -> None:
    graph, draw = random_graph(seed, events=30, width=4), random.Random(seed)
    late = graph.add(Event("late", ""), (Arc(draw.randrange(30), Span(0, 0, OPEN)),))
    graph.assumed = _some_orders(graph, 30, draw) if with_orders else []
    members = range(late + 1)
    pairs = [(source, event) for source in members for event in members]
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(columns, "_MANY", 1)
        table = separations_within(graph, members, pairs)
        patch.setattr(columns, "_MANY", len(members) + 1)
        assert separations_within(graph, members, pairs) == table
    for source in draw.sample(members, 5):
        column = separation_column(graph, members, source)
        assert {event: table[source, event] for event in members} == column


def test_a_table_in_parts_is_the_same() -> None:
    graph, members = random_graph(3, events=30, width=4), range(30)
    pairs = [(source, event) for source in members for event in members]
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(columns, "_MANY", 7)
        whole = separations_within(graph, members, pairs)
        patch.setattr(columns, "_MOST_OF_A_TABLE", 1)
        assert separations_within(graph, members, pairs) == whole


@settings(deadline=None, max_examples=60)
@given(st.integers(0, 10**6))
def test_orders_that_have_nothing_to_do_with_a_pair_may_be_left_out(seed: int) -> None:
    """Held against the part of the graph with all orders below the common dominator in it."""
    graph, draw = random_graph(seed, events=40, width=3), random.Random(seed)
    graph.assumed = [pair for pair in _some_orders(graph, 40, draw, 12) if 0 not in pair]
    for one, other in [(draw.randrange(40), draw.randrange(40)) for _ in range(30)]:
        common = graph.common_dominator(one, other)
        ordered = {number for pair in graph.assumed_below(common) for number in pair}
        members = causes_since(graph, common, {one, other} | ordered)
        assert greatest_separation(graph, one, other) == separations_within(graph, members, [(one, other)])[one, other]


@settings(deadline=None, max_examples=60)
@given(st.integers(0, 10**6))
def test_the_way_up_meets_the_first_that_dominates_a_cause(seed: int) -> None:
    graph, draw = random_graph(seed, events=40, width=4), random.Random(seed)
    event, other = draw.randrange(1, 40), draw.randrange(1, 40)
    common = graph.common_dominator(event, other)
    dominating = {graph.dominator[one] for one in causes_since(graph, common, [other])[1:]}
    above = event
    while above not in dominating and above != common:
        above = graph.dominator[above]
    if dominating:
        assert graph.first_among(dominating, common, event) == above


def test_what_stands_in_for_an_open_delay() -> None:
    """Something takes 5 to 7, and somebody outside any time: 1000 where that is to stand for it."""
    graph = EventGraph()
    moved = graph.add(Event("moved", ""), (Arc(0, Span(5, 6, 7)),))
    comes = graph.add(Event("comes", ""), (Arc(moved, Span(0, 0, OPEN)),))
    assert separation_column(graph, [0, moved, comes], 0, open_us=1000)[comes] == 1007
