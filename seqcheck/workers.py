"""Examines many texts, in several processes where that is quicker.

Takes the names of texts and what examines one of them; gives their reports in the order of the names, whatever the
count of processes. A process that ends without a result (killed from outside, out of memory) is a problem of the text
that it was busy with, and the other texts are examined all the same. A fault of the program is raised here as it is
in the process, with a note that says where.
"""

from __future__ import annotations

import contextlib
import multiprocessing
import os
import signal
import traceback
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import Future, ProcessPoolExecutor, as_completed
from concurrent.futures.process import BrokenProcessPool
from pathlib import Path

from seqcheck.machine.findings import Problem, Report
from seqcheck.machine.places import Place

Examine = Callable[[str], Report]
#: Called with the count of texts that are done.
OnProgress = Callable[[int], None]

#: So many texts for each process at least: with fewer it takes longer to start than it saves.
TEXTS_PER_PROCESS = 5
#: What the pool of processes takes on some systems.
MOST_PROCESSES = 61
_STANDARD = "-"


def processors() -> int:
    """How many this process may use."""
    if hasattr(os, "sched_getaffinity"):
        return len(os.sched_getaffinity(0)) or 1
    return os.cpu_count() or 1


def examine_all(
    names: Sequence[str], examine: Examine, jobs: int | None, on_progress: OnProgress
) -> tuple[Report, ...]:
    """``jobs``: at most so many processes, None for as many as there are processors. ``examine`` must be something
    that another process can be handed."""
    most = min(processors() if jobs is None else jobs, len(names) // TEXTS_PER_PROCESS, MOST_PROCESSES)
    if most < 2:
        return _one_by_one(names, examine, on_progress)
    done: dict[str, Report] = {}
    if _STANDARD in names:
        # The other processes have no standard input.
        done[_STANDARD] = _examined(examine, _STANDARD)
    waiting = [name for name in names if name not in done]
    while waiting:
        _in_a_pool(waiting, examine, most, done, on_progress)
        waiting = [name for name in waiting if name not in done]
        # They are taken in order: if a process ended, it was busy with one of the first, or has just been handed one.
        for name in waiting[: 2 * most + 1]:
            _in_a_pool([name], examine, 1, done, on_progress)
            done.setdefault(name, _without_result(name))
        waiting = [name for name in waiting if name not in done]
    return tuple(done[name] for name in names)


def _one_by_one(names: Sequence[str], examine: Examine, on_progress: OnProgress) -> tuple[Report, ...]:
    reports = []
    for name in names:
        reports.append(_examined(examine, name))
        on_progress(len(reports))
    return tuple(reports)


def _in_a_pool(
    names: Sequence[str], examine: Examine, processes: int, done: dict[str, Report], on_progress: OnProgress
) -> None:
    """Adds to ``done`` what could be had before a process ended without a result, if one did."""
    others = multiprocessing.active_children()
    # Started anew: a copy of a process that has threads may come to a standstill.
    pool = ProcessPoolExecutor(processes, multiprocessing.get_context("spawn"), _ignore_interrupts)
    futures: dict[Future[Report], str] = {}
    try:
        with _interrupts_held(), contextlib.suppress(BrokenProcessPool):
            for name in names:
                futures[pool.submit(_examined, examine, name)] = name
        for future in as_completed(futures):
            with contextlib.suppress(BrokenProcessPool):
                done[futures[future]] = future.result()
                on_progress(len(done))
    except BaseException:
        for process in multiprocessing.active_children():
            if process not in others:
                process.terminate()
        raise
    finally:
        pool.shutdown(cancel_futures=True)


def _examined(examine: Examine, name: str) -> Report:
    try:
        return examine(name)
    except Exception as fault:
        # What comes from another process no longer knows where it was raised.
        raised = traceback.extract_tb(fault.__traceback__)[-1]
        fault.add_note(f"{Path(raised.filename).name}:{raised.lineno}, examining {name}")
        raise


def _without_result(name: str) -> Report:
    message = "the examination of this text ended without a result: its process was stopped, or ran out of memory"
    advice = "check it alone, with --jobs 1"
    return Report(name, None, problems=(Problem(Place(name, 1, 1, 1, 1), message, None, advice),))


def _ignore_interrupts() -> None:
    """Ctrl-C reaches every process of the terminal; the first one decides what comes of it."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    if hasattr(signal, "pthread_sigmask"):
        signal.pthread_sigmask(signal.SIG_UNBLOCK, {signal.SIGINT})


@contextlib.contextmanager
def _interrupts_held() -> Iterator[None]:
    """A process that starts now is not interrupted before it knows how to take it; a held interrupt comes later."""
    if not hasattr(signal, "pthread_sigmask"):
        yield
        return
    before = signal.pthread_sigmask(signal.SIG_BLOCK, {signal.SIGINT})
    try:
        yield
    finally:
        signal.pthread_sigmask(signal.SIG_SETMASK, before)
