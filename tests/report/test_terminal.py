from __future__ import annotations

import io

import pytest

from seqcheck.report.layout import Line, Tone
from seqcheck.report.terminal import encoding_of, write_lines, write_text

LINES = (
    Line("stapler.steps: [bold]x[/bold]", Tone.TITLE),
    Line("    error: wrong :smile:", Tone.ERROR),
    Line("x" * 80),
)
PLAIN = "stapler.steps: [bold]x[/bold]\n    error: wrong :smile:\n" + "x" * 80 + "\n"


class Terminal(io.StringIO):
    encoding = "utf-8"

    def isatty(self) -> bool:
        return True


@pytest.fixture(autouse=True)
def an_ordinary_terminal(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("TERM", "xterm-256color")
    for name in ("NO_COLOR", "FORCE_COLOR", "COLORTERM", "COLUMNS"):
        monkeypatch.delenv(name, raising=False)


def test_a_terminal_gets_colour_around_the_same_words() -> None:
    terminal = Terminal()
    write_lines(LINES, terminal)
    assert "\x1b[1;31m    error: wrong :smile:\x1b[0m\n" in terminal.getvalue()
    assert _without_colour(terminal.getvalue()) == PLAIN


@pytest.mark.parametrize(("name", "value"), [("NO_COLOR", "1"), ("TERM", "dumb")])
def test_no_colour_where_it_is_not_wanted(monkeypatch: pytest.MonkeyPatch, name: str, value: str) -> None:
    monkeypatch.setenv(name, value)
    terminal = Terminal()
    write_lines(LINES, terminal)
    assert terminal.getvalue() == PLAIN


def test_a_pipe_gets_plain_text() -> None:
    pipe = io.StringIO()
    write_lines(LINES, pipe)
    assert pipe.getvalue() == PLAIN


def test_text_for_programs_is_utf_8_whatever_the_stream_says() -> None:
    raw = io.BytesIO()
    stream = io.TextIOWrapper(raw, encoding="cp437", newline="\r\n")
    write_text("昇降\n", stream)
    assert raw.getvalue() == "昇降\n".encode()


def test_a_stream_without_an_encoding_takes_utf_8() -> None:
    assert encoding_of(io.StringIO()) == "utf-8"
    assert encoding_of(io.TextIOWrapper(io.BytesIO(), encoding="cp1252")) == "cp1252"


def _without_colour(text: str) -> str:
    import re

    return re.sub(r"\x1b\[[0-9;]*m", "", text)
