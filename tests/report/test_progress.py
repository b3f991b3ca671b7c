from __future__ import annotations

import io
import time

import pytest

from seqcheck.report import progress
from seqcheck.report.progress import working_on


class Terminal(io.StringIO):
    def isatty(self) -> bool:
        return True


def test_long_work_is_told_on_a_terminal_and_wiped_out(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(progress, "PATIENCE", 0.01)
    terminal = Terminal()
    with working_on("a\x1b[2J.steps", terminal):
        deadline = time.monotonic() + 10
        while not terminal.getvalue() and time.monotonic() < deadline:
            time.sleep(0.01)
    said, wiped = terminal.getvalue().split("\r")[1], terminal.getvalue().split("\r")[3]
    assert said == r"seqcheck: examining a\x1b[2J.steps ..."
    assert wiped == " " * len(said)


def test_short_work_says_nothing() -> None:
    terminal = Terminal()
    with working_on("a.steps", terminal):
        pass
    assert terminal.getvalue() == ""


def test_a_pipe_is_told_nothing(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(progress, "PATIENCE", 0.0)
    pipe = io.StringIO()
    with working_on("a.steps", pipe):
        time.sleep(0.05)
    assert pipe.getvalue() == ""
