"""One mutant, tried: the changed file in a copy of the checkout, and the tests that might see it.

Takes a copy, a mutant, tests; gives how it ended. A trial is a forked process, so that the libraries are loaded once;
each test may take ten seconds of processor time and five times what it takes without the change, all of them twice that
on the clock, and four gigabytes. Over that it counts as seen: a change that hangs does not pass unnoticed. Refuses
systems that cannot fork.
"""

from __future__ import annotations

import contextlib
import multiprocessing
import os
import resource
import signal
import sys
from collections.abc import Iterator, Mapping, Sequence
from enum import Enum
from pathlib import Path

import pytest

from tests.mutants.draw import Mutant
from tests.mutants.reach import Reach

_MEMORY = 4 << 30
_LEAST_LIMIT = 10.0

#: The tests ran to an end, or the changed module could not even be loaded.
_RAN = (pytest.ExitCode.OK, pytest.ExitCode.TESTS_FAILED, pytest.ExitCode.INTERRUPTED)
_KILLED_BY_SYSTEM = (-signal.SIGSEGV, -signal.SIGKILL, -signal.SIGABRT)


class Outcome(Enum):
    KILLED = "killed"
    TIMEOUT = "killed: out of time"
    SURVIVED = "survived"


class _Chosen:
    """A pytest plugin: only these tests, in this order, each for so many seconds."""

    def __init__(self, most_seconds: Mapping[str, float], leave: Sequence[str]) -> None:
        self._order = {test: index for index, test in enumerate(most_seconds)}
        self._most_seconds = most_seconds
        self._leave = frozenset(leave)

    @pytest.hookimpl(trylast=True)
    def pytest_collection_modifyitems(self, items: list[pytest.Item]) -> None:
        chosen = [item for item in items if item.nodeid in self._order and item.nodeid not in self._leave]
        items[:] = sorted(chosen, key=lambda item: self._order[item.nodeid])

    @pytest.hookimpl(wrapper=True)
    def pytest_runtest_protocol(self, item: pytest.Item) -> Iterator[None]:
        signal.setitimer(signal.ITIMER_PROF, self._most_seconds[item.nodeid])
        result = yield
        signal.setitimer(signal.ITIMER_PROF, 0)
        return result


def _run(copy: Path, most_seconds: Mapping[str, float], leave: Sequence[str]) -> None:
    os.chdir(copy)
    os.setpgid(0, 0)
    resource.setrlimit(resource.RLIMIT_AS, (_MEMORY, _MEMORY))
    sys.dont_write_bytecode = True
    for module in [name for name in sys.modules if name.split(".")[0] in ("seqcheck", "tests")]:
        del sys.modules[module]
    sys.path[:] = [str(copy), *(one for one in sys.path if one)]
    paths = sorted({test.partition("::")[0] for test in most_seconds})
    loaded_before = "ignore::pytest.PytestAssertRewriteWarning"
    with open(os.devnull, "w", encoding="utf-8") as nothing, contextlib.redirect_stdout(nothing):
        status = pytest.main(
            ["-x", "-q", "-p", "no:cacheprovider", "--tb=no", "-W", loaded_before, *paths],
            plugins=[_Chosen(most_seconds, leave)],
        )
    os._exit(int(status))


def passes(copy: Path, seconds: Mapping[str, float], leave: Sequence[str]) -> bool | None:
    """Whether the tests pass in the copy as it stands; None when the time is up. ``seconds``: what each of them takes
    otherwise, in the order in which they are run.

    Raises RuntimeError when they were not run at all, which says nothing about the copy.
    """
    most = {test: _LEAST_LIMIT + 5 * usual for test, usual in seconds.items()}
    child = multiprocessing.get_context("fork").Process(target=_run, args=(copy, most, leave))
    child.start()
    child.join(2 * sum(most.values()))
    if child.is_alive():
        child.kill()
        child.join()
        return None
    if child.exitcode == -signal.SIGPROF:
        return None
    if child.exitcode not in (*_RAN, *_KILLED_BY_SYSTEM):
        raise RuntimeError(f"the tests were not run: status {child.exitcode}")
    return child.exitcode == 0


def tried(copy: Path, mutant: Mutant, reach: Reach) -> Outcome:
    """The mutant put into the copy, the tests run, the copy put right again."""
    file = copy / mutant.file
    sound = file.read_text(encoding="utf-8")
    changed = mutant.text(copy)
    assert changed is not None
    tests = reach.of(mutant)
    if not tests:
        return Outcome.SURVIVED
    file.write_text(changed, encoding="utf-8")
    try:
        passed = passes(copy, {test: reach.seconds[test] for test in tests}, reach.failing)
    finally:
        file.write_text(sound, encoding="utf-8")
    if passed is None:
        return Outcome.TIMEOUT
    return Outcome.SURVIVED if passed else Outcome.KILLED
