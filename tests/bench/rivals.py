"""What somebody would do who has general libraries and no seqcheck: try at random, or ask a solver.

Takes the questions that an examination asked of its event graphs; gives the answers of ``scipy.optimize.milp`` and of
z3: over all that comes before a pair, or over no more than what lies behind the last event that dominates both, which
somebody would have to know first.
"""

from __future__ import annotations

import random
from collections.abc import Sequence

import numpy
import z3
from scipy.optimize import Bounds, LinearConstraint, milp
from scipy.sparse import csr_array

from seqcheck.engine.bounds import causes_since, is_open
from seqcheck.engine.graph import EventGraph
from tests.outside.controllers import Drawing
from tests.outside.plant import Times
from tests.outside.station import Station

#: An event, its causes with least and greatest delay; causes come first.
Part = list[tuple[int, list[tuple[int, int, int]]]]
MINUTE = 60_000_000


def random_cycles(station: type[Station], runs: int) -> list[int]:
    """One cycle of each run of the simpy model."""
    found = []
    for seed in range(runs):
        draw = random.Random(seed)

        def at_random(times: Times, draw: random.Random = draw) -> int:
            return draw.randint(times[0], times[1])

        found += station(Drawing, at_random).run(1)
    return found


def part_of(graph: EventGraph, source: int, event: int) -> Part | None:
    """What lies behind the last event that dominates both; None where a delay in it is unlimited."""
    part = _since(graph, graph.common_dominator(source, event), source, event)
    return None if any(is_open(most) for _, arcs in part for _, _, most in arcs) else part


def whole_of(graph: EventGraph, source: int, event: int) -> Part | None:
    """All that comes before the two; an unlimited delay among it that does not matter to them may take a minute."""
    if part_of(graph, source, event) is None:
        return None
    return [
        (number, [(cause, least, least + MINUTE if is_open(most) else most) for cause, least, most in arcs])
        for number, arcs in _since(graph, 0, source, event)
    ]


def _since(graph: EventGraph, common: int, source: int, event: int) -> Part:
    part: Part = [(common, [])]
    for number in causes_since(graph, common, [source, event])[1:]:
        part.append((number, [(arc.cause, arc.span.least, arc.span.greatest) for arc in graph.arcs[number]]))
    return part


def by_milp(part: Part, assumed: Sequence[tuple[int, int]], source: int, event: int) -> int:
    """Max t(event) - t(source): for each event with several causes, one of them is chosen to be the last."""
    position = {number: index for index, (number, _) in enumerate(part)}
    choices = sum(len(arcs) for _, arcs in part if len(arcs) > 1)
    unknowns, far = len(part) + choices, 1 + sum(most for _, arcs in part for _, _, most in arcs)
    rows: list[dict[int, float]] = []
    low: list[float] = []
    high: list[float] = []

    def demand(row: dict[int, float], least: float, most: float) -> None:
        rows.append(row)
        low.append(least)
        high.append(most)

    choice = len(part)
    for number, arcs in part:
        effect = position[number]
        first = choice
        for cause, least, most in arcs:
            if len(arcs) == 1:
                demand({effect: 1, position[cause]: -1}, least, most)
                continue
            demand({effect: 1, position[cause]: -1}, least, numpy.inf)
            demand({effect: 1, position[cause]: -1, choice: far}, -numpy.inf, most + far)
            choice += 1
        if len(arcs) > 1:
            demand(dict.fromkeys(range(first, choice), 1), 1, 1)
    for one, other in assumed:
        if one in position and other in position:
            demand({position[other]: 1, position[one]: -1}, 0, numpy.inf)
    return _solved(rows, low, high, (position[source], position[event]), len(part), unknowns)


def _solved(
    rows: list[dict[int, float]], low: list[float], high: list[float], pair: tuple[int, int], events: int, unknowns: int
) -> int:
    where = [(index, column, value) for index, row in enumerate(rows) for column, value in row.items()]
    rows_at, columns, values = zip(*where, strict=True)
    matrix = csr_array((values, (rows_at, columns)), shape=(len(rows), unknowns))
    goal = numpy.zeros(unknowns)
    goal[pair[0]] += 1
    goal[pair[1]] -= 1
    upper = numpy.full(unknowns, numpy.inf)
    upper[0], upper[events:] = 0, 1
    kinds = numpy.zeros(unknowns)
    kinds[events:] = 1
    result = milp(
        goal,
        constraints=LinearConstraint(matrix, low, high),
        integrality=kinds,
        bounds=Bounds(numpy.zeros(unknowns), upper),
    )
    assert result.success, result.message
    return round(-result.fun)


def by_z3(part: Part, assumed: Sequence[tuple[int, int]], source: int, event: int) -> int:
    solver = z3.Optimize()
    times = {number: z3.Int(f"t{number}") for number, _ in part}
    solver.add(times[part[0][0]] == 0)
    for number, arcs in part[1:]:
        solver.add(*(times[number] >= times[cause] + least for cause, least, _ in arcs))
        solver.add(z3.Or(*(times[number] <= times[cause] + most for cause, _, most in arcs)))
    solver.add(*(times[one] <= times[other] for one, other in assumed if one in times and other in times))
    goal = solver.maximize(times[event] - times[source])
    assert solver.check() == z3.sat
    return int(str(solver.upper(goal)))
