"""Many texts in several processes: the same reports in the same order, and nothing lost when a process ends."""

from __future__ import annotations

import multiprocessing
import os
import re
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

from seqcheck.machine.findings import Report
from seqcheck.workers import TEXTS_PER_PROCESS, examine_all, processors

NAMES = [f"{number}.steps" for number in range(4 * TEXTS_PER_PROCESS)]


def examine(name: str) -> Report:
    """As the pipeline does, in its way: the machine's name tells which process it was."""
    if name.startswith("dies"):
        os._exit(9)
    if name.startswith("faulty"):
        raise KeyError(name)
    return Report(name, f"process {os.getpid()}")


def _told_by(program: str, checkout: Path) -> str:
    """What a program of its own prints: these processes must not be children of one that runs tests."""
    return subprocess.run(
        [sys.executable, "-c", program],
        env={**os.environ, "PYTHONPATH": str(checkout)},
        capture_output=True,
        text=True,
        check=True,
    ).stdout


def sleep_when_asked(name: str) -> Report:
    print("busy", name, flush=True)
    time.sleep(60)
    return Report(name, None)


def examined(names: list[str], jobs: int | None = 2) -> tuple[list[Report], list[int]]:
    progress: list[int] = []
    reports = examine_all(names, examine, jobs, progress.append)
    assert [report.file for report in reports] == names
    return list(reports), progress


def test_many_texts_are_examined_by_several_processes_in_order() -> None:
    reports, progress = examined(NAMES)
    processes = {report.machine for report in reports}
    assert 1 <= len(processes) <= 2
    assert f"process {os.getpid()}" not in processes
    assert progress == list(range(1, len(NAMES) + 1))
    assert multiprocessing.active_children() == []


@pytest.mark.parametrize(("count", "jobs"), [(2 * TEXTS_PER_PROCESS - 1, 8), (len(NAMES), 1), (0, None)])
def test_a_few_texts_or_one_job_need_no_other_process(count: int, jobs: int | None) -> None:
    reports, progress = examined(NAMES[:count], jobs)
    assert {report.machine for report in reports} <= {f"process {os.getpid()}"}
    assert progress == list(range(1, count + 1))


def test_standard_input_is_read_where_it_is() -> None:
    reports, _ = examined([*NAMES[:6], "-", *NAMES[6:]])
    assert reports[6].machine == f"process {os.getpid()}"
    assert reports[5].machine != reports[6].machine


@pytest.mark.parametrize("where", [0, 7, len(NAMES)])
def test_a_text_whose_process_ends_is_told_and_all_others_are_examined(where: int, checkout: Path) -> None:
    """In a process of its own: what runs the tests may take the end of a process for its own."""
    names = [*NAMES[:where], "dies.steps", *NAMES[where:]]
    program = (
        "from tests.test_workers import examined\n"
        "if __name__ == '__main__':\n"
        f"    reports, _ = examined({names!r})\n"
        "    for report in reports:\n"
        "        print(report.file, report.verdict, *(problem.message for problem in report.problems))\n"
    )
    told = _told_by(program, checkout).splitlines()
    assert [line.split()[0] for line in told] == names
    (unreadable,) = (line for line in told if line.split()[1] == "unreadable")
    assert unreadable.startswith("dies.steps") and "ended without a result" in unreadable


def test_a_fault_of_the_program_is_raised_as_it_is(checkout: Path) -> None:
    program = (
        "import multiprocessing\n"
        "from tests.test_workers import NAMES, examined\n"
        "if __name__ == '__main__':\n"
        "    try:\n"
        "        examined([*NAMES, 'faulty.steps'])\n"
        "    except KeyError as caught:\n"
        "        print(caught, caught.__notes__[-1], multiprocessing.active_children(), sep='|')\n"
    )
    told = _told_by(program, checkout).strip()
    assert re.fullmatch(r"'faulty\.steps'\|test_workers\.py:\d+, examining faulty\.steps\|\[\]", told)


def test_there_is_a_processor() -> None:
    assert 1 <= processors() <= (os.cpu_count() or 1)


@pytest.mark.skipif(os.name != "posix", reason="signals as POSIX has them")
def test_an_interrupt_ends_every_process_at_once(checkout: Path) -> None:
    program = (
        "from tests.test_workers import NAMES, sleep_when_asked; from seqcheck.workers import examine_all\n"
        "if __name__ == '__main__': examine_all(NAMES, sleep_when_asked, 2, print)"
    )
    process = subprocess.Popen(
        [sys.executable, "-c", program],
        env={**os.environ, "PYTHONPATH": str(checkout)},
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        start_new_session=True,
    )
    assert process.stdout is not None
    assert process.stdout.readline().startswith("busy")
    # To the whole group, as a terminal does.
    os.killpg(process.pid, signal.SIGINT)
    _, told = process.communicate(timeout=30)
    assert process.returncode == -signal.SIGINT
    # The traceback is that of the first process alone: the program above does not catch the interrupt.
    assert told.count("Traceback") == 1
