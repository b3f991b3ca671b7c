from __future__ import annotations

import os
from pathlib import Path

import pytest

from seqcheck.language.folders import sequences_named
from seqcheck.machine.findings import Problem


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    for name in (
        "machines/press.steps",
        "machines/press.times.yaml",
        "machines/hall 2/b.steps",
        "machines/hall 2/a.STEPS",
        "machines/.git/hidden.steps",
        "machines/.hidden.steps",
        "machines/empty/notes.txt",
        "top.steps",
        "old.txt",
        "[x].steps",
    ):
        file = tmp_path / name
        file.parent.mkdir(parents=True, exist_ok=True)
        file.touch()
    monkeypatch.chdir(tmp_path)
    return tmp_path


def found(*names: str) -> list[str]:
    """Names with ``/`` on every system; a problem as its message in brackets."""
    return [
        f"<{one.place.file}: {one.message}>" if isinstance(one, Problem) else one.replace(os.sep, "/")
        for one in sequences_named(names)
    ]


HALL = ["machines/hall 2/a.STEPS", "machines/hall 2/b.steps"]


@pytest.mark.parametrize(
    ("names", "files"),
    [
        (["top.steps"], ["top.steps"]),
        (["-"], ["-"]),
        (["gone.steps"], ["gone.steps"]),
        (["machines"], [*HALL, "machines/press.steps"]),
        (["machines/"], [*HALL, "machines/press.steps"]),
        (["./machines"], [*HALL, "machines/press.steps"]),
        (["."], ["[x].steps", *HALL, "machines/press.steps", "top.steps"]),
        (["machines/p*"], ["machines/press.steps"]),
        (["machines/*"], ["machines/press.steps", *HALL]),
        (["**/*.steps"], ["[x].steps", "machines/hall 2/b.steps", "machines/press.steps", "top.steps"]),
        (["old*"], ["old.txt"]),
        (["[x].steps"], ["[x].steps"]),
        (["top.steps", "machines", "top.steps", "./top.steps"], ["top.steps", *HALL, "machines/press.steps"]),
        (["machines/press.steps", "machines"], ["machines/press.steps", *HALL]),
    ],
)
def test_names(folder: Path, names: list[str], files: list[str]) -> None:
    assert found(*names) == files


def test_what_holds_no_sequence_is_refused_and_the_rest_kept(folder: Path) -> None:
    assert found("machines/empty", "x*.steps", "top.steps", "machines/empty") == [
        "<machines/empty: there is no *.steps file in this folder or below it>",
        "<x*.steps: no sequence text has such a name>",
        "top.steps",
    ]


@pytest.mark.skipif(os.name != "posix" or os.geteuid() == 0, reason="root may look into every folder")
def test_a_folder_that_cannot_be_looked_into_is_told(folder: Path) -> None:
    locked = folder / "machines" / "empty"
    locked.chmod(0)
    try:
        assert "<machines/empty: the folder cannot be looked into: Permission denied>" in found("machines")
    finally:
        locked.chmod(0o755)


def test_a_failure_of_the_system_while_looking_is_told(folder: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    scandir = os.scandir

    def refusing(path: str) -> object:
        if str(path).endswith("empty"):
            raise PermissionError(13, "Permission denied", path)
        return scandir(path)

    monkeypatch.setattr(os, "scandir", refusing)
    assert found("machines") == [
        *HALL,
        "machines/press.steps",
        f"<{Path('machines/empty')}: the folder cannot be looked into: Permission denied>",
    ]


def test_links_to_folders_are_not_followed(folder: Path) -> None:
    (folder / "machines" / "round").symlink_to(folder / "machines", target_is_directory=True)
    assert found("machines") == [*HALL, "machines/press.steps"]


@pytest.mark.parametrize("name", ["a\0.steps", "*\0", "x" * 5000])
def test_impossible_names_stand_for_themselves_or_nothing(folder: Path, name: str) -> None:
    assert len(found(name)) == 1
