"""``python -m tests.mutants``: which small changes of the engine and the checks do the tests notice?

Takes how many mutants, from which seed, in how many processes; prints every one with its outcome and the share that
was killed. Works in copies of the checkout, never in the checkout. Needs cosmic-ray and coverage, and a system that can
fork.
"""

from __future__ import annotations

import argparse
import compileall
import multiprocessing
import os
import py_compile
import shutil
import sys
import tempfile
import time
from collections import Counter
from collections.abc import Sequence
from pathlib import Path

import hypothesis  # noqa: F401  (loaded once, before the trials are forked)
import lark  # noqa: F401
import networkx  # noqa: F401
import numpy  # noqa: F401
import rich.console  # noqa: F401
import scipy.optimize  # noqa: F401
import yaml  # noqa: F401

from tests.mutants.draw import Mutant, mutants_of, sample
from tests.mutants.reach import Reach, reach_of
from tests.mutants.trial import Outcome, passes, tried

CHECKOUT = Path(__file__).resolve().parents[2]
PARTS = ("seqcheck", "grammar", "tests", "examples", "README.md", "DEVELOPERS.md", "pyproject.toml")


def _copy_to(folder: Path) -> Path:
    """A copy in which a compiled file is used only if its text is the very same: times of files are too coarse."""
    copy = folder / "0"
    copy.mkdir()
    for part in PARTS:
        whole = CHECKOUT / part
        if whole.is_dir():
            shutil.copytree(whole, copy / part, ignore=shutil.ignore_patterns("__pycache__", ".hypothesis"))
        else:
            shutil.copy2(whole, copy / part)
    return copy


def _compile(copy: Path) -> None:
    compileall.compile_dir(
        copy / "seqcheck", quiet=2, force=True, invalidation_mode=py_compile.PycInvalidationMode.CHECKED_HASH
    )


def _try_share(copy: Path, mutants: Sequence[Mutant], reach: Reach, results: multiprocessing.Queue) -> None:  # type: ignore[type-arg]
    for mutant in mutants:
        begun = time.monotonic()
        outcome = tried(copy, mutant, reach)
        results.put((mutant, outcome, time.monotonic() - begun))


def _arguments() -> argparse.Namespace:
    parser = argparse.ArgumentParser(prog="python -m tests.mutants", description=__doc__)
    parser.add_argument("--number", type=int, default=300, help="how many mutants to draw (300)")
    parser.add_argument("--seed", type=int, default=7, help="the draw (7)")
    parser.add_argument("--processes", type=int, default=2, help="trials at a time (2)")
    parser.add_argument("--only", nargs="*", default=(), metavar="FILE:LINE", help="of those drawn, only these")
    return parser.parse_args()


def main() -> int:
    asked = _arguments()
    os.environ["CI"] = "1"  # properties draw the same in every trial
    everything = mutants_of(CHECKOUT)
    drawn = sample(everything, asked.number, asked.seed, CHECKOUT)
    if asked.only:
        drawn = [mutant for mutant in drawn if f"{mutant.file}:{mutant.line}" in asked.only]
    print(f"{len(everything)} mutants, {len(drawn)} drawn with seed {asked.seed}", flush=True)
    with tempfile.TemporaryDirectory() as folder:
        first = _copy_to(Path(folder))
        reach = reach_of(first)
        for test in reach.failing:
            print(f"left out, fails without a change: {test}", flush=True)
        _compile(first)
        if not passes(first, reach.seconds, reach.failing):
            raise RuntimeError("the quick tests do not pass without a change")
        copies = [first] + [shutil.copytree(first, Path(folder) / str(number)) for number in range(1, asked.processes)]
        outcomes = _try_all(copies, drawn, reach)
    killed = len(drawn) - outcomes[Outcome.SURVIVED]
    for outcome in Outcome:
        print(f"{outcomes[outcome]:5} {outcome.value}")
    print(f"{killed} of {len(drawn)} killed, {100 * killed / max(1, len(drawn)):.1f} %")
    return 0


def _try_all(copies: Sequence[Path], drawn: Sequence[Mutant], reach: Reach) -> Counter[Outcome]:
    context = multiprocessing.get_context("fork")
    results = context.Queue()
    shares = [drawn[number :: len(copies)] for number in range(len(copies))]
    workers = [
        context.Process(target=_try_share, args=(copy, share, reach, results))
        for copy, share in zip(copies, shares, strict=True)
    ]
    for worker in workers:
        worker.start()
    outcomes: Counter[Outcome] = Counter()
    for _ in drawn:
        mutant, outcome, seconds = results.get()
        outcomes[outcome] += 1
        operator = mutant.operator.partition("/")[2]
        print(
            f"{outcome.value:19} {mutant.file}:{mutant.line}:{mutant.column} {operator} "
            f"#{mutant.occurrence}  {seconds:.1f} s",
            flush=True,
        )
    for worker in workers:
        worker.join()
    return outcomes


if __name__ == "__main__":
    sys.exit(main())
