"""What work costs: processor time, so that whatever else runs does not count, and the peak of memory.

Takes work to do here or a program for a process of its own; gives the least of some tries.
"""

from __future__ import annotations

import os
import subprocess
import sys
import time
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

CHECKOUT = Path(__file__).resolve().parents[2]


@dataclass(frozen=True, slots=True)
class Cost:
    seconds: float
    mebibytes: float


def least_cpu(work: Callable[[], object], tries: int = 5) -> float:
    """Seconds of processor time in this process."""
    best = float("inf")
    for _ in range(tries):
        start = time.process_time()
        work()
        best = min(best, time.process_time() - start)
    return best


def process_cost(*arguments: str, tries: int = 3, statuses: tuple[int, ...] = (0,)) -> Cost:
    """The interpreter run with these arguments, from its start to its end."""
    costs = [_once(arguments, statuses) for _ in range(tries)]
    return Cost(min(cost.seconds for cost in costs), min(cost.mebibytes for cost in costs))


def _once(arguments: tuple[str, ...], statuses: tuple[int, ...]) -> Cost:
    environment = {**os.environ, "PYTHONPATH": str(CHECKOUT), "PYTHONDONTWRITEBYTECODE": ""}
    process = subprocess.Popen(
        [sys.executable, *arguments], cwd=CHECKOUT, env=environment, stdout=subprocess.DEVNULL, stderr=subprocess.PIPE
    )
    assert process.stderr is not None
    told = process.stderr.read()
    _, status, usage = os.wait4(process.pid, 0)
    process.stderr.close()
    process.returncode = os.waitstatus_to_exitcode(status)
    assert process.returncode in statuses, told.decode("utf-8", "replace")
    unit = 1024**2 if sys.platform == "darwin" else 1024
    return Cost(usage.ru_utime + usage.ru_stime, usage.ru_maxrss / unit)
