from __future__ import annotations

import io
import time

import pytest

from seqcheck.report import progress
from seqcheck.report.progress import working_on, working_through


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


def test_a_bar_goes_along_with_the_files_and_is_wiped_out(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(progress, "PATIENCE", 0.0)
    monkeypatch.setattr(progress, "_PAUSE", 0.0)
    terminal = Terminal()
    with working_through(1000, terminal) as advance:
        deadline = time.monotonic() + 10
        while not terminal.getvalue() and time.monotonic() < deadline:
            time.sleep(0.01)
        for done in (500, 1000):
            advance(done)
    said = [part for part in terminal.getvalue().split("\r") if part]
    assert said == [
        f"seqcheck: [{'.' * 30}] 0 of 1000 files",
        f"seqcheck: [{'#' * 15}{'.' * 15}] 500 of 1000 files",
        f"seqcheck: [{'#' * 30}] 1000 of 1000 files",
        " " * len(said[2]),
    ]


def test_a_bar_that_is_over_soon_is_never_shown() -> None:
    terminal = Terminal()
    with working_through(2, terminal) as advance:
        advance(1)
        advance(2)
    assert terminal.getvalue() == ""


def test_a_bar_is_not_drawn_more_often_than_an_eye_can_see(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(progress, "PATIENCE", 0.0)
    monkeypatch.setattr(progress, "_PAUSE", 60.0)
    terminal = Terminal()
    with working_through(2000, terminal) as advance:
        deadline = time.monotonic() + 10
        while not terminal.getvalue() and time.monotonic() < deadline:
            time.sleep(0.01)
        for done in range(2000):
            advance(done)
    assert terminal.getvalue().count("files") == 1


def test_a_pipe_gets_no_bar(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(progress, "PATIENCE", 0.0)
    pipe = io.StringIO()
    with working_through(2, pipe) as advance:
        time.sleep(0.05)
        advance(2)
    assert pipe.getvalue() == ""
