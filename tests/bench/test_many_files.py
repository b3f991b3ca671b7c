"""Two thousand texts of 20 steps each in one run: time and memory, with two jobs against one.

Run with ``python -m pytest -m bench -s tests/bench/test_many_files.py``; takes some minutes.
"""

from __future__ import annotations

import json
import os
import subprocess
import sys
import time
from dataclasses import dataclass
from pathlib import Path

import pytest

from seqcheck.workers import processors
from tests.bench.stations import in_a_row

pytestmark = pytest.mark.bench

CHECKOUT = Path(__file__).resolve().parents[2]
TEXTS = 2000
STEPS = 20
FORMATS = ("text", "json", "sarif", "junit")
#: A whole run; says at its end what it took itself, and what the processes that it started took.
PROGRAM = """
import json, resource, sys
from seqcheck.commandline import main
if __name__ == "__main__":
    status = main(sys.argv[1:])
    own, others = resource.getrusage(resource.RUSAGE_SELF), resource.getrusage(resource.RUSAGE_CHILDREN)
    taken = {name: [use.ru_utime + use.ru_stime, use.ru_maxrss] for name, use in (("own", own), ("others", others))}
    print(json.dumps({"status": status} | taken))
"""


@dataclass(frozen=True, slots=True)
class Run:
    """Seconds on the clock, of the first process and of the others; mebibytes of the first and the largest other."""

    wall: float
    own: float
    others: float
    own_memory: float
    other_memory: float


def checked(folder: Path, *options: str) -> Run:
    start = time.perf_counter()
    done = subprocess.run(
        [sys.executable, "-c", PROGRAM, "check", *options],
        cwd=folder,
        env={**os.environ, "PYTHONPATH": str(CHECKOUT)},
        stdout=subprocess.PIPE,
        text=True,
        check=True,
    )
    wall = time.perf_counter() - start
    told = json.loads(done.stdout)
    assert told["status"] == 0
    (own, own_memory), (others, other_memory) = told["own"], told["others"]
    return Run(wall, own, others, own_memory / 1024, other_memory / 1024)


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    machines = tmp_path / "machines"
    machines.mkdir()
    for number in range(TEXTS):
        text = in_a_row(STEPS, 5).replace("380..450", f"{380 + number % 50}..450")
        (machines / f"row{number:04}.steps").write_text(text, encoding="utf-8")
    return tmp_path


def reports(kind: str) -> list[str]:
    return [word for form in FORMATS for word in ("--format", form, "--output", f"{kind}.{form}")]


@pytest.mark.skipif(processors() < 2, reason="needs two processors")
def test_two_thousand_texts_on_two_processors(folder: Path) -> None:
    few = checked(folder, "machines/row00*.steps", "--jobs", "1", "--format", "json", "--output", "few")
    one = checked(folder, "machines", "--jobs", "1", *reports("one"))
    two = checked(folder, "machines", "--jobs", "2", *reports("two"))
    growth = (one.own_memory - few.own_memory) / (TEXTS - 100)
    print(f"\none job:  {one.wall:.1f} s, {one.own_memory:.0f} MiB ({1024 * growth:.0f} KiB more for each text)")
    print(f"two jobs: {two.wall:.1f} s, {two.own_memory:.0f} MiB and {two.other_memory:.0f} MiB in each process")
    # What two processors that do nothing else would make of it; the clock itself only counts on a quiet machine.
    shared = one.own / (two.own + two.others / 2)
    print(f"two jobs are {one.wall / two.wall:.2f} times as fast by the clock, {shared:.2f} times by processor time")
    for form in FORMATS:
        assert (folder / f"one.{form}").read_bytes() == (folder / f"two.{form}").read_bytes()
    assert shared > 1.6
    if one.wall < 1.1 * one.own:
        assert one.wall / two.wall > 1.6
    assert growth < 0.2
    assert two.other_memory < few.own_memory + 50
