"""``seqcheck new``: what it writes checks clean, and it writes over nothing."""

from __future__ import annotations

from pathlib import Path

import pytest

from seqcheck.commandline import main
from seqcheck.commands import new

Output = pytest.CaptureFixture[str]


@pytest.fixture
def here(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.chdir(tmp_path)
    return tmp_path


@pytest.mark.parametrize("name", ["press.steps", "two words.steps", "größe.v2.steps", "line/ventil.steps"])
def test_it_checks_clean_and_is_laid_out(name: str, here: Path, capsys: Output) -> None:
    Path("line").mkdir()
    assert main(["new", name]) == 0
    sheet = name.removesuffix(".steps") + ".times.yaml"
    assert capsys.readouterr() == (f"wrote {Path(name)} and {Path(sheet)}\n", "")
    assert main(["check", name, "--fail-on", "note"]) == 0
    page = capsys.readouterr().out
    assert page.startswith(f"{name}: {Path(name).stem}: clean for all times in tolerance")
    assert f"times from {Path(sheet).name}; " in " ".join(page.split())
    assert main(["format", "--check", name]) == 0
    assert b"\r" not in Path(name).read_bytes() + Path(sheet).read_bytes()


@pytest.mark.parametrize("there", ["press.steps", "press.times.yaml"])
def test_neither_is_written_where_one_is_there(there: str, here: Path, capsys: Output) -> None:
    Path(there).write_text("mine", encoding="utf-8")
    assert main(["new", "press.steps"]) == 2
    assert capsys.readouterr().err == f"seqcheck: error: {there} is there already: nothing was written\n"
    assert [(file.name, file.read_text("utf-8")) for file in here.iterdir()] == [(there, "mine")]


def test_a_link_to_nowhere_is_not_followed(here: Path, capsys: Output) -> None:
    Path("press.times.yaml").symlink_to(here / "elsewhere.yaml")
    assert main(["new", "press.steps"]) == 2
    assert [file.name for file in here.iterdir()] == ["press.times.yaml"]


@pytest.mark.parametrize("fault", [OSError(28, "No space left on device"), KeyboardInterrupt()])
def test_what_was_begun_is_taken_away(
    fault: BaseException, here: Path, monkeypatch: pytest.MonkeyPatch, capsys: Output
) -> None:
    opened = Path.open

    def fails(file: Path, *arguments: str, **settings: str) -> object:
        if file.name == "press.times.yaml":
            raise fault
        return opened(file, *arguments, **settings)  # type: ignore[call-overload]

    monkeypatch.setattr(new.Path, "open", fails)
    assert main(["new", "press.steps"]) in (2, 130)
    assert list(here.iterdir()) == []


@pytest.mark.parametrize(
    ("name", "told"),
    [
        ("press", "press is no name of a sequence text: write NAME.steps"),
        (".steps", ".steps is no name of a sequence text: write NAME.steps"),
        ("", ". is no name of a sequence text: write NAME.steps"),
        ('a"b.steps', 'a"b.steps cannot stand in quotes in a text'),
        ("nowhere/press.steps", "press.times.yaml: No such file or directory"),
    ],
)
def test_what_cannot_be_written_is_told(name: str, told: str, here: Path, capsys: Output) -> None:
    assert main(["new", name]) == 2
    assert told in capsys.readouterr().err
    assert list(here.iterdir()) == []
