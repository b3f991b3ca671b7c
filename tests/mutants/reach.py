"""Which test comes by which line, and how long it takes: learned from one run of the quick tests without a change.

Takes a copy of the checkout; gives for every test its duration and the lines of the two folders that it runs. Lines
that run while a module is imported belong to every test. A test that fails without a change is left out and named.
"""

from __future__ import annotations

import json
import subprocess
import sys
from collections import defaultdict
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

import coverage
import pytest

from tests.mutants.draw import FOLDERS, Mutant

QUICK = (
    "tests/cases",
    "tests/engine",
    "tests/checks",
    "tests/examples",
    "tests/report",
    "tests/commandline/test_assume.py",
    "tests/commandline/test_graph.py",
    "tests/test_explanations.py",
    "tests/test_reserve.py",
    "tests/test_accepting.py",
)


@dataclass(frozen=True, slots=True)
class Reach:
    seconds: dict[str, float]
    lines: dict[tuple[str, int], frozenset[str]]
    failing: tuple[str, ...]

    def of(self, mutant: Mutant) -> list[str]:
        """The tests that come by the changed line, quickest first; all of them for a line run on import."""
        at = self.lines.get((mutant.file, mutant.line)) or self._of_statement(mutant)
        reaching = at - {""} if at != {""} else frozenset(self.seconds)
        return sorted(reaching & self.seconds.keys(), key=lambda test: (self.seconds[test], test))

    def _of_statement(self, mutant: Mutant) -> frozenset[str]:
        """For a line that no tracer stops at: whoever comes by another line of the statement that it belongs to."""
        begin, end = mutant.statement
        return frozenset().union(*(self.lines.get((mutant.file, line), ()) for line in range(begin, end + 1)))


class _Listener:
    """A pytest plugin: tells coverage whose lines these are, and keeps the times."""

    def __init__(self, measure: coverage.Coverage) -> None:
        self._measure = measure
        self.seconds: dict[str, float] = {}
        self.failing: set[str] = set()

    @pytest.hookimpl(wrapper=True)
    def pytest_runtest_protocol(self, item: pytest.Item) -> Iterator[None]:
        self._measure.switch_context(item.nodeid)
        result = yield
        self._measure.switch_context("")
        return result

    def pytest_runtest_logreport(self, report: pytest.TestReport) -> None:
        self.seconds[report.nodeid] = self.seconds.get(report.nodeid, 0.0) + report.duration
        if report.failed:
            self.failing.add(report.nodeid)


def reach_of(copy: Path) -> Reach:
    """Runs the quick tests of the copy in a process of their own."""
    result = copy / "reach.json"
    subprocess.run([sys.executable, "-m", "tests.mutants.reach", str(result)], cwd=copy, check=True)
    told = json.loads(result.read_text(encoding="utf-8"))
    lines = {(file, line): frozenset(tests) for file, line, tests in told["lines"]}
    return Reach(told["seconds"], lines, tuple(told["failing"]))


def _measure(result: Path) -> None:
    here = Path.cwd()
    measure = coverage.Coverage(data_file=None, include=[f"{here}/{folder}/*" for folder in FOLDERS])
    listener = _Listener(measure)
    measure.start()
    folders = [folder for folder in QUICK if (here / folder).exists()]
    pytest.main(["-q", "-p", "no:cacheprovider", "--tb=no", *folders], plugins=[listener])
    measure.stop()
    lines: dict[tuple[str, int], set[str]] = defaultdict(set)
    data = measure.get_data()
    for file in data.measured_files():
        name = Path(file).relative_to(here).as_posix()
        for line, tests in data.contexts_by_lineno(file).items():
            lines[name, line] |= set(tests)
    told = {
        "seconds": {test: time for test, time in listener.seconds.items() if test not in listener.failing},
        "failing": sorted(listener.failing),
        "lines": [(*place, sorted(tests)) for place, tests in sorted(lines.items())],
    }
    result.write_text(json.dumps(told), encoding="utf-8")


if __name__ == "__main__":
    _measure(Path(sys.argv[1]))
