"""What work costs: processor time, so that whatever else runs does not count, and the peak of memory.

Takes work to do here or a program for a process of its own; gives the least of some tries.
"""

from __future__ import annotations

import json
import os
import subprocess
import sys
import time
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from pathlib import Path

CHECKOUT = Path(__file__).resolve().parents[2]
#: A process begins with the peak of the one that starts it, which here may have loaded solvers: a small one comes
#: between, and says what status, seconds and peak the interpreter with these arguments has ended with.
_WATCHED = """
import json, os, sys
nothing = [(os.POSIX_SPAWN_OPEN, 1, os.devnull, os.O_WRONLY, 0)]
process = os.posix_spawn(sys.executable, [sys.executable, *sys.argv[1:]], os.environ, file_actions=nothing)
_, status, usage = os.wait4(process, 0)
print(json.dumps([os.waitstatus_to_exitcode(status), usage.ru_utime + usage.ru_stime, usage.ru_maxrss]))
"""


@dataclass(frozen=True, slots=True)
class Cost:
    seconds: float
    mebibytes: float


def least_cpu(work: Callable[[], object], tries: int = 5) -> float:
    """Seconds of processor time in this process."""
    return least_cpus(work, tries=tries)[0]


def least_cpus(*works: Callable[[], object], tries: int) -> list[float]:
    """Of each piece of work, done in turns: a machine that is slower for a while is so for all of them."""
    return [min(costs) for costs in zip(*([_cpu(work) for work in works] for _ in range(tries)), strict=True)]


def _cpu(work: Callable[[], object]) -> float:
    start = time.process_time()
    work()
    return time.process_time() - start


def process_cost(*arguments: str, tries: int = 3, statuses: tuple[int, ...] = (0,)) -> Cost:
    """The interpreter run with these arguments, from its start to its end."""
    return _least(_once(arguments, statuses) for _ in range(tries))


def process_costs(*programs: Sequence[str], tries: int) -> list[Cost]:
    """Of each of the programs, run in turns likewise."""
    rounds = [[_once(arguments, (0,)) for arguments in programs] for _ in range(tries)]
    return [_least(costs) for costs in zip(*rounds, strict=True)]


def _least(costs: Iterable[Cost]) -> Cost:
    seconds, mebibytes = zip(*((cost.seconds, cost.mebibytes) for cost in costs), strict=True)
    return Cost(min(seconds), min(mebibytes))


def _once(arguments: Sequence[str], statuses: tuple[int, ...]) -> Cost:
    environment = {**os.environ, "PYTHONPATH": str(CHECKOUT), "PYTHONDONTWRITEBYTECODE": ""}
    done = subprocess.run(
        [sys.executable, "-c", _WATCHED, *arguments], cwd=CHECKOUT, env=environment, capture_output=True, text=True
    )
    assert done.returncode == 0, done.stderr
    status, seconds, peak = json.loads(done.stdout)
    assert status in statuses, done.stderr
    return Cost(seconds, peak / (1024**2 if sys.platform == "darwin" else 1024))
