"""The rows of the benchmark: each a ratio inside this one run, with the limit that is asked of it where there is one.

Gives rows as they are measured. What takes long has fewer tries; the least of them counts.
"""

from __future__ import annotations

import json
import subprocess
import sys
import time
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path
from tempfile import TemporaryDirectory

from seqcheck.engine.graph import EventGraph
from seqcheck.language.source import Source, read_source
from seqcheck.machine.findings import Report
from seqcheck.pipeline import examine_source
from tests.bench.measures import CHECKOUT, Cost, least_cpus, process_cost, process_costs
from tests.bench.rivals import Part, by_milp, by_z3, part_of, random_cycles, whole_of
from tests.bench.stations import in_a_row
from tests.bench.texts import choices, one_after_the_other, repeated, side_by_side
from tests.outside.asked import Question, asked_about
from tests.outside.stations import CrateStapler

STAPLER = str(CHECKOUT / "examples" / "crate_stapler.steps")
RUNTIME = "import lark, networkx, numpy, yaml, rich"
_CHECK = "import sys; from seqcheck.commandline import main; main(['check', sys.argv[1]])"
#: So many questions of the stapler are put to each solver, evenly chosen; the others are taken to cost as much.
PUT_TO_SOLVERS = 40

Solve = Callable[[Part, Sequence[tuple[int, int]], int, int], int]
PartOf = Callable[[EventGraph, int, int], Part | None]


@dataclass(frozen=True, slots=True)
class Row:
    """``ratio`` is None where this version does not analyse the text; ``limit``: what is asked of the ratio."""

    what: str
    ratio: float | None
    limit: float | None = None
    more: str = ""

    @property
    def met(self) -> bool | None:
        return None if self.limit is None or self.ratio is None else self.ratio < self.limit


def rows() -> Iterator[Row]:
    for group in GROUPS.values():
        yield from group()


def _examined(text: str) -> Report:
    report = examine_source(Source("bench.steps", text))
    assert report.problems or report.verdict == "clean", report.findings
    return report


def _is_analysed(text: str) -> bool:
    problems = _examined(text).problems
    assert all("cannot be checked yet" in problem.message for problem in problems), problems
    return not problems


# Against what else one could do


def rivals() -> Iterator[Row]:
    source = read_source(STAPLER)
    assert isinstance(source, Source)
    report, questions = asked_about(source)
    check, runs = least_cpus(lambda: examine_source(source), lambda: random_cycles(CrateStapler, 100), tries=7)
    yield Row("check of the crate stapler : 100 random runs in simpy", check / runs, 1.0)
    found = random_cycles(CrateStapler, 1000)
    cycle = dict(report.cycles)["main"]
    assert cycle.greatest is not None
    seen = (max(found) - min(found)) / (cycle.greatest - cycle.least)
    more = f"they see {seen:.0%} of the proven span of the cycle"
    yield Row("1,000 random runs : check", 10 * runs / check, more=more)
    for name, solve, part, limit in SOLVERS:
        put, cost, count = _put(questions, solve, part)
        more = f"{put} of {count} questions put, all answers equal"
        yield Row(f"check : its questions to {name}", check / (cost * count / put), limit, more)


#: Name, way of solving, what of the graph it is given, limit.
SOLVERS: tuple[tuple[str, Solve, PartOf, float | None], ...] = (
    ("scipy.optimize.milp", by_milp, whole_of, 0.01),
    ("milp, cut down to what matters", by_milp, part_of, None),
    ("z3", by_z3, whole_of, None),
    ("z3, cut down to what matters", by_z3, part_of, None),
)


def _put(questions: Sequence[Question], solve: Solve, part_of: PartOf) -> tuple[int, float, int]:
    """How many questions were put, the seconds that took, and how many there are."""
    asked = [(one.graph, pair, answer) for one in questions for pair, answer in one.answers.items()]
    put, cost = 0, 0.0
    for graph, (one, other), answer in asked[:: max(1, len(asked) // PUT_TO_SOLVERS)]:
        part = part_of(graph, one, other)
        if part is not None:
            begin = time.process_time()
            found = solve(part, graph.assumed, one, other)
            cost += time.process_time() - begin
            assert found == answer, f"{found} for {(one, other)}, seqcheck says {answer}"
            put += 1
    return put, cost, len(asked)


# Growth


def growth() -> Iterator[Row]:
    with TemporaryDirectory() as folder:
        imports = process_cost("-c", RUNTIME).seconds
        costs = {steps: _whole_process(in_a_row(steps, 50), Path(folder), 3) for steps in (10, 100, 1_000)}
        costs[10_000] = _whole_process(in_a_row(10_000, 50), Path(folder), 1)
    yield Row("1,000 steps, 100 cylinders : importing the runtime dependencies", costs[1_000].seconds / imports, 3)
    for steps in (100, 1_000, 10_000):
        limit = 12 if steps == 10_000 else None
        less, more = costs[steps // 10], costs[steps]
        yield Row(f"{steps:,} steps : {steps // 10:,} steps, time", more.seconds / less.seconds, limit)
        yield Row(f"{steps:,} steps : {steps // 10:,} steps, memory", more.mebibytes / less.mebibytes, limit)


def _whole_process(text: str, folder: Path, tries: int) -> Cost:
    file = folder / "bench.steps"
    file.write_text(text, encoding="utf-8")
    return process_cost("-m", "seqcheck", "check", str(file), tries=tries)


def branches() -> Iterator[Row]:
    for count in (2, 8, 32):
        moves = 320 // count
        row = one_after_the_other(count, moves)
        ratio = _ratio(side_by_side(count, moves), row)
        limit = 3 if count == 32 else None
        yield Row(f"{count} branches of {moves} moves : the same 320 moves in one", ratio, limit)


def choosing() -> Iterator[Row]:
    for count in (20, 40):
        yield Row(f"{count} choices : {count // 2} choices", _ratio(choices(count), choices(count // 2)))


def repeats() -> Iterator[Row]:
    yield Row("two moves 1,000 times : 100 times", _ratio(repeated(1_000), repeated(100)), 12)


def _ratio(text: str, other: str) -> float | None:
    if not (_is_analysed(text) and _is_analysed(other)):
        return None
    cost, of_other = least_cpus(lambda: _examined(text), lambda: _examined(other), tries=5)
    return cost / of_other


# Start-up


def start_up() -> Iterator[Row]:
    small = str(CHECKOUT / "examples" / "change" / "before.steps")
    bare = ("-c", "import argparse")
    loading = ("-c", f"import {', '.join(_loaded_by_a_check(small))}")
    for words, left_out, what, limit in (
        (("--help",), bare, "an interpreter that imports argparse", 2),
        (("explain",), bare, "an interpreter that imports argparse", 2),
        (("explain", "short-pulse"), bare, "an interpreter that imports argparse", 2),
        (("check", small), loading, "importing all that it loads", 1.2),
    ):
        whole, part = process_costs(("-m", "seqcheck", *words), left_out, tries=25)
        named = " ".join(words).replace(small, "of a small file")
        yield Row(f"seqcheck {named} : {what}", whole.seconds / part.seconds, limit)


def _loaded_by_a_check(file: str) -> list[str]:
    """The modules that are there after a check and can be imported by themselves, in the order of loading."""
    code = f"{_CHECK}; import json; print(); print(json.dumps(list(sys.modules)))"
    done = subprocess.run([sys.executable, "-c", code, file], cwd=CHECKOUT, capture_output=True, text=True, check=True)
    loaded: list[str] = json.loads(done.stdout.splitlines()[-1])
    ours = ("seqcheck", "lark", "networkx", "numpy", "yaml", "rich")
    return [name for name in loaded if name.split(".")[0] in ours and "._" not in name]


GROUPS: dict[str, Callable[[], Iterator[Row]]] = {
    "rivals": rivals,
    "branches": branches,
    "choices": choosing,
    "repeats": repeats,
    "start-up": start_up,
    "growth": growth,
}
