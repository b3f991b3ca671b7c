"""Dominators in graphs so deep that the way up takes jumps, held against those of networkx."""

from __future__ import annotations

import itertools

import networkx
import pytest

from seqcheck.engine.graph import Arc, Event, EventGraph
from seqcheck.machine.time import NO_TIME
from tests.engine.graphs import random_graph


def deep_graph(seed: int) -> tuple[EventGraph, list[list[int]]]:
    """Three long arms behind one start, numbered past 300, and for every event the chain of its dominators."""
    graph = random_graph(seed, events=300, width=2)
    for arm in range(2):
        above = 40 * arm
        for _ in range(60):
            above = graph.add(Event("arm", str(arm)), (Arc(above, NO_TIME),))
    nearest = networkx.immediate_dominators(graph.as_networkx(), 0)
    chains = []
    for number in range(len(graph.events)):
        chain = [number]
        while chain[-1] != 0:
            chain.append(nearest[chain[-1]])
        chains.append(chain)
    return graph, chains


@pytest.mark.parametrize("seed", range(3))
def test_the_common_dominator_is_the_last_one_of_both_whichever_is_named_first(seed: int) -> None:
    graph, chains = deep_graph(seed)
    for one, other in itertools.product(range(0, len(chains), 7), repeat=2):
        common = max(set(chains[one]) & set(chains[other]))
        assert graph.common_dominator(one, other) == common, (one, other)


@pytest.mark.parametrize("seed", range(3))
def test_an_event_dominates_what_stands_below_it_and_not_itself(seed: int) -> None:
    graph, chains = deep_graph(seed)
    for one, other in itertools.product(range(0, len(chains), 7), repeat=2):
        assert graph.dominates(one, other) is (one in chains[other][1:]), (one, other)


@pytest.mark.parametrize("seed", range(3))
def test_right_below_a_dominator_stands_the_one_before_it(seed: int) -> None:
    graph, chains = deep_graph(seed)
    for event in range(0, len(chains), 7):
        assert graph.below(event, event) == event
        for below, dominator in itertools.pairwise(chains[event]):
            assert graph.below(dominator, event) == below
