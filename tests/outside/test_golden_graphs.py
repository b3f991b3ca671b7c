"""The golden graphs G8 and C6 of eight and six events, through the bounds of the engine and as a machine.

All numbers were computed beforehand with general libraries and agreed: corners by brute force, scipy.optimize (milp,
linprog), z3, simpy, networkx. What can be computed again here in a moment is.
"""

from __future__ import annotations

import random

import networkx
import numpy
import pytest
import simpy
import z3
from scipy.optimize import linprog

from seqcheck.engine.bounds import greatest_separations
from seqcheck.engine.graph import EventGraph
from tests.engine.graphs import corners, graph_of
from tests.engine.test_bounds import C6_ARCS, G8_ARCS, G8_GREATEST
from tests.outside.as_machine import from_arcs, network_report

NAMES = "sabcdefg"


def golden() -> dict[tuple[str, str], int]:
    rows = [[int(cell) for cell in line.split()] for line in G8_GREATEST.strip().splitlines()]
    return {(one, other): rows[i][j] for i, one in enumerate(NAMES) for j, other in enumerate(NAMES)}


def found_by_the_engine() -> dict[tuple[str, str], int]:
    graph, number = graph_of(G8_ARCS)
    found = greatest_separations(graph, [(number[one], number[other]) for one in NAMES for other in NAMES])
    return {(one, other): found[number[one], number[other]] for one in NAMES for other in NAMES}


def test_g8_is_golden_by_all_its_1024_corners() -> None:
    graph, number = graph_of(G8_ARCS)
    runs = list(corners(graph))
    assert len(runs) == 1024
    most = {
        (one, other): max(times[number[other]] - times[number[one]] for times in runs)
        for one in NAMES
        for other in NAMES
    }
    assert most == golden() == found_by_the_engine()


@pytest.mark.slow
def test_g8_is_golden_by_z3() -> None:
    times = {name: z3.Int(name) for name in NAMES}
    for (one, other), greatest in golden().items():
        if one == other:
            continue
        solver = z3.Optimize()
        solver.add(times["s"] == 0)
        for event in NAMES[1:]:
            delays = []
            for cause, effect, least, most in G8_ARCS:
                if effect == event:
                    delay = z3.Int(f"{cause}{effect}")
                    solver.add(delay >= least, delay <= most, times[event] >= times[cause] + delay)
                    delays.append(times[event] == times[cause] + delay)
            solver.add(z3.Or(delays))
        goal = solver.maximize(times[other] - times[one])
        assert solver.check() == z3.sat
        assert str(solver.upper(goal)) == str(greatest)


def test_no_simulated_run_of_g8_leaves_the_bounds() -> None:
    """One process of simpy for each arc: it waits for its cause, then for its delay."""
    bounds = found_by_the_engine()
    draw = random.Random(8)
    for _ in range(200):
        env = simpy.Environment()
        due = {name: env.event() for name in NAMES}
        times: dict[str, float] = {}

        def arc(env: simpy.Environment, cause: simpy.Event, delay: float):  # type: ignore[no-untyped-def]
            yield cause
            yield env.timeout(delay)

        def event(env: simpy.Environment, name: str, arcs: list, own: simpy.Event, times: dict):  # type: ignore
            yield simpy.AllOf(env, arcs)
            times[name] = env.now
            own.succeed()

        for name in NAMES:
            into = [(cause, least, most) for cause, effect, least, most in G8_ARCS if effect == name]
            arcs = [env.process(arc(env, due[cause], draw.uniform(least, most))) for cause, least, most in into]
            env.process(event(env, name, arcs, due[name], times))
        env.run()
        for (one, other), greatest in bounds.items():
            assert times[other] - times[one] <= greatest + 1e-9


def test_g8_as_a_machine_takes_its_least_and_greatest_time() -> None:
    """Each arc a stroke. From s to g: 9 to 16, the longest of the least and of the greatest chains (networkx)."""
    arcs = [(cause, effect, (least, most)) for cause, effect, least, most in G8_ARCS]
    cycle = dict(network_report(from_arcs(arcs)).cycles)["main"]
    graph: networkx.DiGraph[str] = networkx.DiGraph()
    for cause, effect, least, most in G8_ARCS:
        graph.add_edge(cause, effect, least=least, most=most)
    least, most = (networkx.dag_longest_path_length(graph, weight=weight) for weight in ("least", "most"))
    assert (cycle.least, cycle.greatest) == (1000 * least, 1000 * most) == (9_000, 16_000)


def test_the_cycle_time_of_c6_by_its_simple_cycles_and_by_linear_programming() -> None:
    """Least 6 and greatest 11 per token, the greatest weight of a cycle over its tokens."""
    graph: networkx.DiGraph[str] = networkx.DiGraph()
    for cause, effect, later, least, most in C6_ARCS:
        graph.add_edge(cause, effect, least=least, most=most, later=later)
    for weight, time in (("least", 6), ("most", 11)):
        means = []
        for nodes in networkx.simple_cycles(graph):
            arcs = [graph.edges[one, other] for one, other in zip(nodes, [*nodes[1:], nodes[0]], strict=True)]
            means.append(sum(arc[weight] for arc in arcs) / sum(arc["later"] for arc in arcs))
        assert max(means) == time == pytest.approx(_least_period(weight))


def _least_period(weight: str) -> float:
    """Minimise p subject to t(effect) - t(cause) + p * later >= delay."""
    names = sorted({arc[0] for arc in C6_ARCS})
    rows = []
    for cause, effect, later, *_ in C6_ARCS:
        row = numpy.zeros(len(names) + 1)
        row[names.index(effect)] -= 1
        row[names.index(cause)] += 1
        row[-1] -= later
        rows.append(row)
    delays = [-(least if weight == "least" else most) for *_, least, most in C6_ARCS]
    goal = [0.0] * len(names) + [1.0]
    return float(linprog(goal, numpy.array(rows), delays, bounds=[(None, None)] * (len(names) + 1)).fun)


@pytest.mark.parametrize("periods", [3, 4, 6, 10, 20])
def test_c6_unfolded_has_its_steady_separations_from_the_second_period_on(periods: int) -> None:
    graph, number = _unfolded(periods)
    k = periods - 2
    asked = {
        (f"f{k}", f"b{k + 1}"): 7,
        (f"a{k}", f"a{k + 1}"): 11,
        (f"a{k + 1}", f"a{k}"): -6,
        (f"b{k}", f"f{k}"): 7,
        (f"d{k}", f"c{k + 1}"): 9,
    }
    found = greatest_separations(graph, [(number[one], number[other]) for one, other in asked])
    assert {pair: found[number[pair[0]], number[pair[1]]] for pair in asked} == asked


def _unfolded(periods: int) -> tuple[EventGraph, dict[str, int]]:
    arcs = [("start", "a0", 0, 0), ("start", "b0", 0, 0)]
    for period in range(periods):
        for cause, effect, later, least, most in C6_ARCS:
            if period >= later:
                arcs.append((f"{cause}{period - later}", f"{effect}{period}", least, most))
    return graph_of(arcs)
