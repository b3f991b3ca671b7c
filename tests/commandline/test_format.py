"""``seqcheck format``: files, folders and streams; the layout itself is tested with the language."""

from __future__ import annotations

import io
import os
import stat
import sys
from pathlib import Path

import pytest

from seqcheck.commandline import main

Output = pytest.CaptureFixture[str]
ODD = "sequence main{A+A-}# up and down\n"
EVEN = "sequence main {\n    A+\n    A-\n}   # up and down\n"


@pytest.fixture
def here(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.chdir(tmp_path)
    Path("line").mkdir()
    for name, text in (("odd.steps", ODD), ("line/even.steps", EVEN), ("line/odd.steps", ODD)):
        Path(name).write_bytes(text.encode())
    return tmp_path


def test_texts_are_laid_out_in_place(here: Path, capsys: Output) -> None:
    Path("odd.steps").chmod(0o640)
    assert main(["format", "line", "odd.steps"]) == 0
    told = capsys.readouterr().out.replace(os.sep, "/")
    assert told == "laid out line/odd.steps\nlaid out odd.steps\n"
    assert {file.read_bytes() for file in here.rglob("*.steps")} == {EVEN.encode()}
    assert os.name != "posix" or stat.S_IMODE(Path("odd.steps").stat().st_mode) == 0o640
    assert main(["format", "line", "odd.steps"]) == 0
    assert capsys.readouterr() == ("", "")


def test_check_names_the_others_and_writes_nothing(here: Path, capsys: Output) -> None:
    assert main(["format", "--check", "line", "odd.steps"]) == 1
    assert capsys.readouterr().out.replace(os.sep, "/") == "line/odd.steps\nodd.steps\n"
    assert Path("odd.steps").read_text("utf-8") == ODD
    assert main(["format", "line/even.steps", "--check"]) == 0


@pytest.mark.parametrize(("mark", "ending"), [("", "\n"), ("", "\r\n"), ("\ufeff", "\n"), ("\ufeff", "\r\n")])
def test_line_ends_and_a_byte_order_mark_stay(mark: str, ending: str, here: Path, capsys: Output) -> None:
    Path("odd.steps").write_bytes((mark + ODD.replace("\n", ending)).encode())
    assert main(["format", "odd.steps"]) == 0
    assert Path("odd.steps").read_bytes() == (mark + EVEN.replace("\n", ending)).encode()
    assert main(["format", "--check", "odd.steps"]) == 0


def test_of_several_line_ends_the_first_is_taken(here: Path, capsys: Output) -> None:
    Path("odd.steps").write_bytes(b"# one\r\n# two\nflag a")
    assert main(["format", "odd.steps"]) == 0
    assert Path("odd.steps").read_bytes() == b"# one\r\n# two\r\nflag a\r\n"


def test_standard_input_goes_to_standard_output(here: Path, monkeypatch: pytest.MonkeyPatch, capsys: Output) -> None:
    monkeypatch.setattr(sys, "stdin", io.TextIOWrapper(io.BytesIO(ODD.encode())))
    assert main(["format", "-"]) == 0
    assert capsys.readouterr() == (EVEN, "")
    monkeypatch.setattr(sys, "stdin", io.TextIOWrapper(io.BytesIO(ODD.encode())))
    assert main(["format", "--check", "-"]) == 1
    assert capsys.readouterr() == ("-\n", "")


def test_a_slip_leaves_its_text_alone_and_keeps_no_other_back(here: Path, capsys: Output) -> None:
    Path("line/even.steps").write_text("sequence main { A+ A- \n", encoding="utf-8")
    assert main(["format", "line", "gone.steps", "--check"]) == 2
    out, err = capsys.readouterr()
    assert out.replace(os.sep, "/") == "line/odd.steps\n"
    assert "line/even.steps:1:22: error: the text ends before the `{` of line 1 is closed\n" in err.replace(os.sep, "/")
    assert "gone.steps: error: there is no such file\n" in err
    assert Path("line/even.steps").read_text("utf-8") == "sequence main { A+ A- \n"


def test_names_that_are_unknown_are_laid_out_all_the_same(here: Path, capsys: Output) -> None:
    """Layout is no check: the clamp of this sequence is not declared."""
    assert main(["check", "odd.steps"]) == 2
    assert main(["format", "odd.steps"]) == 0


@pytest.mark.skipif(os.name != "posix" or os.geteuid() == 0, reason="a folder that may not be written into")
def test_what_cannot_be_written_is_told(here: Path, capsys: Output) -> None:
    Path("line").chmod(0o500)
    try:
        assert main(["format", "line/odd.steps"]) == 2
    finally:
        Path("line").chmod(0o700)
    assert "cannot write line/odd.steps: Permission denied" in capsys.readouterr().err


@pytest.mark.parametrize("arguments", [["format"], ["format", "-", "-"], ["format", "odd.steps", "--times", "x"]])
def test_wrong_arguments(arguments: list[str], here: Path, capsys: Output) -> None:
    assert main(arguments) == 2
    assert Path("odd.steps").read_text("utf-8") == ODD
