"""Reading files and standard input."""

from __future__ import annotations

import io
import os
from pathlib import Path
from types import SimpleNamespace

import pytest

from seqcheck.language.source import GREATEST_SIZE, Source, read_source
from seqcheck.machine.findings import Problem


def refused(name: str) -> Problem:
    read = read_source(name)
    assert isinstance(read, Problem)
    assert read.place.file == name
    return read


def test_a_text_is_read_without_its_byte_order_mark(tmp_path: Path) -> None:
    file = tmp_path / "ä b.steps"
    file.write_bytes("\ufeffflag é\r\n".encode())
    assert read_source(str(file)) == Source(str(file), "flag é\r\n")


def test_standard_input(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("sys.stdin", SimpleNamespace(buffer=io.BytesIO(b"flag a")))
    assert read_source("-") == Source("-", "flag a")


def test_a_missing_file(tmp_path: Path) -> None:
    assert refused(str(tmp_path / "none.steps")).message == "there is no such file"


def test_a_folder(tmp_path: Path) -> None:
    assert refused(str(tmp_path)).message == "this is a folder, not a file"


def test_a_name_that_no_file_can_have() -> None:
    assert refused("a\0b").message.startswith("the file cannot be read")
    assert refused("x" * 5_000).message.startswith("the file cannot be read")


@pytest.mark.skipif(os.name == "nt" or not hasattr(os, "geteuid") or os.geteuid() == 0, reason="root may read all")
def test_a_file_that_may_not_be_read(tmp_path: Path) -> None:
    file = tmp_path / "a.steps"
    file.write_text("flag a")
    file.chmod(0)
    assert refused(str(file)).message == "the file may not be read"


def test_no_utf_8(tmp_path: Path) -> None:
    file = tmp_path / "a.steps"
    file.write_bytes(b"flag a\nflag \xe4\n")
    problem = refused(str(file))
    assert (problem.message, problem.place.line, problem.place.column) == ("this is no UTF-8 text", 2, 6)


def test_nul_bytes(tmp_path: Path) -> None:
    file = tmp_path / "a.steps"
    file.write_bytes(b"flag a\0")
    problem = refused(str(file))
    assert problem.message.startswith("the file holds a NUL byte")
    assert (problem.place.line, problem.place.column) == (1, 7)


def test_over_sixteen_megabytes(tmp_path: Path) -> None:
    file = tmp_path / "a.steps"
    with file.open("wb") as sparse:
        sparse.truncate(GREATEST_SIZE + 1)
    assert refused(str(file)).message == "the file is over 16 MB"
