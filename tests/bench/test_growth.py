"""How the cost of a check grows with the steps, and what a small check costs beside the imports that it cannot avoid.

Run with ``python -m pytest -m bench -s tests/bench``. Figures are ratios inside one run, so that they hold on any
machine; each is the least of several tries, as whatever else runs can only add.
"""

from __future__ import annotations

import tracemalloc

import pytest

from seqcheck.language.source import Source
from seqcheck.pipeline import examine_source
from tests.bench.measures import least_cpu, process_cost
from tests.bench.stations import in_a_row

pytestmark = pytest.mark.bench


def checked(steps: int) -> None:
    report = examine_source(Source("row.steps", in_a_row(steps)))
    assert report.verdict == "clean", report.problems or report.findings
    assert len(report.steps) == steps


def peak_memory(steps: int) -> int:
    tracemalloc.start()
    checked(steps)
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    return peak


def test_cost_grows_with_the_steps() -> None:
    checked(4)
    cost = {steps: least_cpu(lambda steps=steps: checked(steps)) for steps in (100, 300, 1000)}  # type: ignore[misc]
    memory = {steps: peak_memory(steps) for steps in (100, 300)}
    print(f"\nsteps 100 to 300: time times {cost[300] / cost[100]:.2f}, memory times {memory[300] / memory[100]:.2f}")
    print(f"steps 300 to 1000: time times {cost[1000] / cost[300]:.2f}")
    assert cost[300] < 4 * cost[100]
    assert cost[1000] < 5 * cost[300]
    assert memory[300] < 4 * memory[100]


def test_a_small_check_costs_less_than_twice_its_imports() -> None:
    imports = process_cost("-c", "import lark, networkx, numpy, yaml, rich", tries=7).seconds
    whole = process_cost("-m", "seqcheck", "check", "examples/crate_stapler.steps", tries=7).seconds
    print(f"\ncrate stapler, whole process: {whole / imports:.2f} times importing the runtime dependencies")
    assert whole < 2 * imports
