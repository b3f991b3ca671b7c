from __future__ import annotations

import os
import stat
from pathlib import Path

import pytest

from seqcheck.report import files
from seqcheck.report.files import write_file

posix = pytest.mark.skipif(os.name != "posix", reason="permissions, links and devices as POSIX has them")


def test_a_new_file_holds_the_text_as_utf_8(tmp_path: Path) -> None:
    write_file(str(tmp_path / "report.txt"), "昇降 ±\n")
    assert (tmp_path / "report.txt").read_bytes() == "昇降 ±\n".encode()
    assert [file.name for file in tmp_path.iterdir()] == ["report.txt"]


@posix
def test_a_new_file_gets_the_usual_permissions(tmp_path: Path) -> None:
    before = os.umask(0o027)
    try:
        write_file(str(tmp_path / "report.txt"), "x")
    finally:
        os.umask(before)
    assert stat.S_IMODE((tmp_path / "report.txt").stat().st_mode) == 0o640


@posix
def test_a_file_that_was_there_keeps_its_permissions(tmp_path: Path) -> None:
    file = tmp_path / "report.txt"
    file.write_text("a longer text that was there before")
    file.chmod(0o604)
    write_file(str(file), "new\n")
    assert file.read_text() == "new\n"
    assert stat.S_IMODE(file.stat().st_mode) == 0o604


@posix
def test_a_link_stays_one(tmp_path: Path) -> None:
    (tmp_path / "real.txt").write_text("old")
    (tmp_path / "link.txt").symlink_to("real.txt")
    write_file(str(tmp_path / "link.txt"), "new")
    assert (tmp_path / "link.txt").is_symlink()
    assert (tmp_path / "real.txt").read_text() == "new"


@posix
def test_a_device_is_written_and_not_replaced() -> None:
    write_file(os.devnull, "x")
    assert stat.S_ISCHR(os.stat(os.devnull).st_mode)


@pytest.mark.parametrize("name", ["", "no/such/folder/report.txt", "."])
def test_what_cannot_be_written_is_an_error(tmp_path: Path, name: str, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    with pytest.raises(OSError):
        write_file(name, "x")
    assert list(tmp_path.iterdir()) == []


def test_a_failure_half_way_leaves_what_was_there(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    file = tmp_path / "report.txt"
    file.write_text("old")

    def full(*_: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(files.os, "replace", full)
    with pytest.raises(OSError, match="No space"):
        write_file(str(file), "new")
    assert file.read_text() == "old"
    assert [left.name for left in tmp_path.iterdir()] == ["report.txt"]
