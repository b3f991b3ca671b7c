"""Many inputs in several processes, within a budget of time.

Takes how many inputs of which seed; gives counts by kind and status, the slowest, the peak of memory, and the faults
by what they are, each with the smallest input that shows it. A process that ends by itself or stands still is a fault
of the input that it was at.
"""

from __future__ import annotations

import multiprocessing
import tempfile
import time
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass, field
from multiprocessing.connection import Connection
from multiprocessing.process import BaseProcess
from pathlib import Path

from tests.fuzz.inputs import Input, input_of
from tests.fuzz.outcomes import MOST_SECONDS, outcome_of, peak_mebibytes, with_sheets
from tests.fuzz.smallest import smallest

#: So many inputs of one fault are kept for making one of them small.
_KEPT = 3
#: A process that says nothing for so long on the clock stands still in a place that no signal reaches.
_STANDSTILL = 60.0


@dataclass(frozen=True, slots=True)
class Request:
    seed: int
    numbers: range
    until: float
    whole: bool
    most_seconds: float = MOST_SECONDS


@dataclass(slots=True)
class Tally:
    done: int = 0
    statuses: Counter[tuple[str, str]] = field(default_factory=Counter)
    faults: Counter[str] = field(default_factory=Counter)
    shown_by: dict[str, list[tuple[int, int]]] = field(default_factory=dict)
    slowest: tuple[float, int] = (0.0, -1)
    peak_mebibytes: float = 0.0

    def add(self, other: Tally) -> None:
        self.done += other.done
        self.statuses += other.statuses
        self.faults += other.faults
        for fault, shown in other.shown_by.items():
            self.shown_by.setdefault(fault, []).extend(shown)
        self.slowest = max(self.slowest, other.slowest)
        self.peak_mebibytes = max(self.peak_mebibytes, other.peak_mebibytes)

    def fault(self, what: str, number: int, size: int) -> None:
        self.faults[what] += 1
        kept = sorted([*self.shown_by.get(what, []), (size, number)])
        self.shown_by[what] = kept[:_KEPT]


def run_here(request: Request, folder: Path, said: Connection | None = None) -> Tally:
    """All inputs of a request in this process; each number is said before its input is tried."""
    tally = Tally()
    for number in request.numbers:
        if time.monotonic() > request.until:
            break
        if said is not None:
            said.send(number)
        one = input_of(request.seed, number)
        outcome = outcome_of(one, folder, request.whole, request.most_seconds)
        tally.done += 1
        tally.statuses[one.kind, "fault" if outcome.fault else str(outcome.status)] += 1
        tally.slowest = max(tally.slowest, (outcome.seconds, number))
        if outcome.fault is not None:
            tally.fault(outcome.fault, number, len(one.text))
    tally.peak_mebibytes = peak_mebibytes()
    return tally


def run(requests: Sequence[Request]) -> Tally:
    """Each request in a process of its own. One that is broken off goes on behind the input that broke it."""
    total = Tally()
    waiting = [_Worker(request) for request in requests]
    while waiting:
        for worker in list(waiting):
            tally, rest = worker.look()
            if tally is not None:
                total.add(tally)
                waiting.remove(worker)
                if rest is not None:
                    waiting.append(_Worker(rest))
        time.sleep(0.02)
    return total


class _Worker:
    def __init__(self, request: Request) -> None:
        self._request = request
        self._heard, said = multiprocessing.Pipe(duplex=False)
        self._process: BaseProcess = multiprocessing.Process(target=_work, args=(request, said), daemon=True)
        self._process.start()
        said.close()
        self._at, self._last_heard = request.numbers.start, time.monotonic()

    def look(self) -> tuple[Tally | None, Request | None]:
        """The tally once the process is at its end, and what is left to do where it was broken off."""
        try:
            while self._heard.poll():
                told = self._heard.recv()
                if isinstance(told, Tally):
                    self._process.join()
                    return told, None
                self._at, self._last_heard = told, time.monotonic()
        except EOFError:
            self._process.join()
            return self._broken_off(f"the process ended with {self._process.exitcode}")
        if time.monotonic() - self._last_heard > _STANDSTILL:
            self._process.kill()
            self._process.join()
            return self._broken_off(f"standstill: over {_STANDSTILL:g} s")
        return None, None

    def _broken_off(self, what: str) -> tuple[Tally, Request | None]:
        """What the process had counted is lost; the inputs before are counted as done."""
        request, number = self._request, self._at
        one = input_of(request.seed, number)
        before = (number - request.numbers.start) // request.numbers.step + 1
        tally = Tally(done=before, statuses=Counter({(one.kind, "fault"): 1, ("not counted", "?"): before - 1}))
        tally.fault(what, number, len(one.text))
        rest = range(number + request.numbers.step, request.numbers.stop, request.numbers.step)
        left = Request(request.seed, rest, request.until, request.whole, request.most_seconds)
        return tally, left if rest and time.monotonic() < request.until else None


def _work(request: Request, said: Connection) -> None:
    with tempfile.TemporaryDirectory() as folder:
        said.send(run_here(request, with_sheets(Path(folder)), said))


def smallest_of(tally: Tally, request: Request, fault: str) -> Input:
    """One of the inputs of a fault, made small in this process."""
    one = input_of(request.seed, min(tally.shown_by[fault])[1])
    if fault.startswith(("the process", "standstill")):
        return one
    with tempfile.TemporaryDirectory() as folder:
        place = with_sheets(Path(folder))
        kind = fault.split("(")[0].split(" at ")[0]

        def shows(other: Input) -> bool:
            found = outcome_of(other, place, request.whole, request.most_seconds).fault
            return found is not None and found.startswith(kind)

        return smallest(one, shows)
