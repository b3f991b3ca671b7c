"""What one input comes to: an exit status, or a fault of the program.

Takes an input and a folder to lay it in; gives ``Outcome``. An exception, a status that there is not, a run over the
time limit and memory without bounds are faults; an input that cannot be read is none.
"""

from __future__ import annotations

import contextlib
import dataclasses
import gc
import io
import json
import re
import resource
import shutil
import signal
import sys
import time
import traceback
import zlib
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from types import FrameType

from seqcheck.commandline import main
from seqcheck.language.layout import laid_out
from seqcheck.language.problems import Problems
from seqcheck.language.read import read_machine
from seqcheck.language.source import Source, decode
from seqcheck.machine.findings import Problem
from seqcheck.machine.model import Machine
from seqcheck.machine.places import Place
from seqcheck.machine.steps import Choose, Item, Repeat, Step, Together
from seqcheck.report.formats import FORMATS
from tests.fuzz.inputs import CHECKOUT, Input

#: No input may take longer (processor time, and twice over, so that a busy machine raises no false alarm); one whose
#: ``repeat`` make more than so many steps of a round may take longer in proportion.
MOST_SECONDS = 2.0
_STEPS_OF_A_ROUND = 500
#: What one has left behind that took longer than this is cleared away at once, not in the time of the next one.
_SLOW = 1.0
#: No input may take more memory on top of what the process had.
MOST_MEBIBYTES = 400


#: The commands that a text comes to, one each: mostly ``check``, in one of its formats.
_CHECKS = [["check", "--format", form] for form in FORMATS]
_CHARTS = [["chart", "--output", f"FOLDER/chart.{ending}"] for ending in ("svg", "html", "csv", "vcd", "txt")]
_WAYS = [*_CHECKS, *_CHECKS, *_CHECKS, ["times"], ["margins"], ["chart"], *_CHARTS]


_MANY_TIMES = re.compile(rb"repeat\s+\d\d")


class Hang(BaseException):
    """Not to be caught by anything that catches mere faults."""


@dataclass(frozen=True, slots=True)
class Outcome:
    """``status``: that of the command, None where there is a ``fault``: what it is and where, in one line."""

    status: int | None
    seconds: float
    fault: str | None = None


def outcome_of(one: Input, folder: Path, whole: bool = True, most_seconds: float = MOST_SECONDS) -> Outcome:
    """``whole``: one of the commands in this process; else the reading of the text and its sheets, and what the text
    is when it is laid out and read again. ``folder`` has the sheets that the examples name (see ``with_sheets``)."""
    most_seconds *= max(1.0, _steps_of_a_round(one, folder) / _STEPS_OF_A_ROUND) if whole else 1.0
    before = peak_mebibytes()
    outcome = _tried(one, folder, whole, most_seconds, before)
    if outcome.seconds > most_seconds:
        outcome = _tried(one, folder, whole, most_seconds, before)
    if outcome.seconds > _SLOW:
        gc.collect()
    return outcome


def _tried(one: Input, folder: Path, whole: bool, most_seconds: float, before: float) -> Outcome:
    """``before``: the peak of memory, in MiB."""
    begin = time.process_time()
    fault, status = None, None
    try:
        with _watched(most_seconds):
            status, fault = _checked(one, folder) if whole else (_read(one, folder), None)
    except Hang:
        fault = f"hang: over {most_seconds:g} s"
    except Exception as error:
        fault = _told(error)
    seconds = time.process_time() - begin
    grown = peak_mebibytes() - before
    if fault is None and grown > MOST_MEBIBYTES:
        fault = f"memory: over {MOST_MEBIBYTES} MiB more"
    if fault is None and status not in (0, 1, 2):
        fault = f"exit status {status}"
    return Outcome(None if fault else status, seconds, fault)


def _steps_of_a_round(one: Input, folder: Path) -> int:
    """How many steps and choices a round comes to, repetitions counted; 0 where there are few anyway."""
    if not _MANY_TIMES.search(one.text):
        return 0
    source = decode(str(folder / one.name), one.text)
    machine = read_machine(source, _sheets(one, folder)) if isinstance(source, Source) else None
    return sum(_unrolled(one.items) for one in machine.sequences) if isinstance(machine, Machine) else 0


def _unrolled(items: Sequence[Item]) -> int:
    found = 0
    for item in items:
        match item:
            case Repeat(times, inner):
                found += times * _unrolled(inner)
            case Together(branches):
                found += sum(_unrolled(branch) for branch in branches)
            case Choose(choices):
                found += 1 + max(_unrolled(choice.items) for choice in choices)
            case Step():
                found += 1
    return found


def with_sheets(folder: Path) -> Path:
    """A folder with the sheets that the examples name, for the texts that are spoilt from them."""
    for sheet in (CHECKOUT / "examples").rglob("*.yaml"):
        shutil.copy(sheet, folder)
    return folder


def _read(one: Input, folder: Path) -> int:
    source = decode(str(folder / one.name), one.text)
    if isinstance(source, Problem):
        return 2
    sheets = _sheets(one, folder)
    machine = read_machine(source, sheets)
    laid = laid_out(source, Problems())
    if not isinstance(machine, Machine):
        _hold_against(machine)
        return 2
    assert laid is not None, "it can be read, but not be laid out"
    again = Source(source.name, laid)
    assert laid_out(again, Problems()) == laid, "laid out twice it differs"
    assert without_places(read_machine(again, sheets)) == without_places(machine), "laid out it means something else"
    return 0


def without_places(value: object) -> object:
    """A machine as plain values, but for where its parts stand and for the blanks in a rule as it was written."""
    if isinstance(value, Place):
        return None
    if dataclasses.is_dataclass(value) and not isinstance(value, type):
        names = [one.name for one in dataclasses.fields(value) if one.name not in ("line", "source")]
        return type(value), [without_places(getattr(value, name)) for name in names]
    if isinstance(value, Mapping):
        return {key: without_places(part) for key, part in value.items()}
    if isinstance(value, str):
        return re.sub(r"\s+", "", value)
    return [without_places(part) for part in value] if isinstance(value, tuple) else value


def _checked(one: Input, folder: Path) -> tuple[int, str | None]:
    """The exit status, and what the command itself calls a fault of its own."""
    file = folder / one.name
    file.write_bytes(one.text)
    command, *words = _WAYS[zlib.crc32(one.text) % len(_WAYS)]
    times = [word for sheet in _sheets(one, folder) for word in ("--times", sheet)]
    streams = sys.stdin, sys.stdout, sys.stderr
    said, complained = (io.TextIOWrapper(io.BytesIO(), "utf-8", write_through=True) for _ in range(2))
    sys.stdin, sys.stdout, sys.stderr = io.TextIOWrapper(io.BytesIO()), said, complained
    try:
        status = main([command, str(file), *(word.replace("FOLDER", str(folder)) for word in words), *times])
    finally:
        sys.stdin, sys.stdout, sys.stderr = streams
    told = _written(complained)
    if words in (["--format", "json"], ["--format", "sarif"]) and not told:
        json.loads(_written(said))
    own = told.partition("this is a fault of seqcheck")[2]
    if own or "Traceback" in told:
        return status, f"fault of its own{own[:200].rstrip()}"
    return status, None


def _written(stream: io.TextIOWrapper) -> str:
    assert isinstance(stream.buffer, io.BytesIO)
    return stream.buffer.getvalue().decode("utf-8")


def _hold_against(problems: tuple[Problem, ...]) -> None:
    """Whoever is refused is told where and why."""
    for problem in problems:
        assert problem.message, "a problem without words"
        assert problem.place.line >= 1 and problem.place.column >= 1, "a problem without a place"
        assert len(problem.message) < 500, "a message without end"


def _sheets(one: Input, folder: Path) -> tuple[str, ...]:
    if one.sheet is None:
        return ()
    file = folder / "fuzz.yaml"
    file.write_bytes(one.sheet)
    return (str(file),)


@contextlib.contextmanager
def _watched(most_seconds: float) -> Iterator[None]:
    def stop(_: int, frame: FrameType | None) -> None:
        raise Hang

    before = signal.signal(signal.SIGPROF, stop)
    signal.setitimer(signal.ITIMER_PROF, most_seconds)
    try:
        yield
    finally:
        signal.setitimer(signal.ITIMER_PROF, 0)
        signal.signal(signal.SIGPROF, before)


def _told(error: Exception) -> str:
    """The exception, and the last line of the package that it came from."""
    frames = [frame for frame in traceback.extract_tb(error.__traceback__) if "/seqcheck/" in frame.filename]
    where = f"{Path(frames[-1].filename).name}:{frames[-1].lineno} in {frames[-1].name}" if frames else "?"
    return f"{type(error).__name__} at {where}" if frames or not str(error) else f"{type(error).__name__}: {error}"


def peak_mebibytes() -> float:
    unit = 1024**2 if sys.platform == "darwin" else 1024
    return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / unit
