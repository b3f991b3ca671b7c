"""Many files and many reports in one run, from the arguments to the bytes that are written."""

from __future__ import annotations

import json
import os
import re
import subprocess
import sys
from pathlib import Path

import pytest

from seqcheck.commandline import main
from tests.commandline.conftest import Asked

Output = pytest.CaptureFixture[str]
FORMATS = ("text", "json", "sarif", "junit")


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    for name in ("machines/healthy.steps", "machines/b/broken.steps", "machines/b/noted.steps", "empty/notes.txt"):
        file = tmp_path / name
        file.parent.mkdir(parents=True, exist_ok=True)
        file.touch()
    monkeypatch.chdir(tmp_path)
    return tmp_path


def names(asked: Asked) -> list[str]:
    return [name.replace(os.sep, "/") for name, _ in asked]


def test_a_folder_stands_for_the_texts_below_it(folder: Path, asked: Asked, capsys: Output) -> None:
    assert main(["check", "machines/", "noted.steps"]) == 1
    assert names(asked) == [
        "machines/b/broken.steps",
        "machines/b/noted.steps",
        "machines/healthy.steps",
        "noted.steps",
    ]


def test_a_folder_without_any_is_an_error_beside_the_others(folder: Path, asked: Asked, capsys: Output) -> None:
    assert main(["check", "empty", "machines/healthy.steps", "--format", "json"]) == 2
    missing, healthy = json.loads(capsys.readouterr().out)["reports"]
    assert (missing["file"], missing["verdict"], healthy["verdict"]) == ("empty", "unreadable", "clean")
    assert missing["errors"][0]["message"].startswith("there is no *.steps file in this folder or below it; ")


def test_a_text_named_twice_is_examined_once(folder: Path, asked: Asked, capsys: Output) -> None:
    main(["check", "machines", "machines/healthy.steps", "machines/*.steps"])
    assert names(asked).count("machines/healthy.steps") == 1


def test_each_report_goes_where_it_is_wanted(folder: Path, asked: Asked, capsys: Output) -> None:
    printed = {}
    for form in FORMATS:
        assert main(["check", "machines", "--format", form]) == 1
        printed[form] = capsys.readouterr().out
    wanted = [word for form in FORMATS[1:] for word in ("--format", form, "--output", f"report.{form}")]
    assert main(["check", "machines", "--format", "text", *wanted]) == 1
    assert capsys.readouterr() == (printed["text"], "")
    for form in FORMATS[1:]:
        assert Path(f"report.{form}").read_bytes().decode("utf-8") == printed[form]


def test_a_report_that_cannot_be_written_keeps_no_other_back(folder: Path, asked: Asked, capsys: Output) -> None:
    there = ["--format", "sarif", "--output", "no/report.sarif", "--format", "json", "--output", "report.json"]
    assert main(["check", "machines/healthy.steps", *there]) == 2
    assert json.loads(Path("report.json").read_text("utf-8"))["reports"][0]["verdict"] == "clean"
    assert capsys.readouterr().err.startswith("seqcheck: error: cannot write the report to no/report.sarif")


def test_no_output_overwrites_a_text_of_a_folder(folder: Path, asked: Asked, capsys: Output) -> None:
    there = ["--format", "json", "--output", "a.json", "--format", "junit", "--output", "machines/b/noted.steps"]
    assert main(["check", "machines", *there]) == 2
    assert asked == []
    assert not Path("a.json").exists()
    assert "would overwrite an input: machines/b/noted.steps" in capsys.readouterr().err


def test_junit_fails_where_the_exit_status_does(folder: Path, asked: Asked, capsys: Output) -> None:
    failing = {}
    for fail_on in ("error", "note", "never", "unused"):
        main(["check", "machines/b/noted.steps", "machines/b/broken.steps", "--fail-on", fail_on, "--format", "junit"])
        failing[fail_on] = capsys.readouterr().out.count("<failure ")
    assert failing == {"error": 1, "note": 2, "never": 0, "unused": 0}


@pytest.mark.parametrize("jobs", ["0", "-1", "x", "1.5", "", "9" * 5000, "²"])
def test_jobs_is_a_count(jobs: str, asked: Asked, capsys: Output) -> None:
    assert main(["check", "healthy.steps", "--jobs", jobs]) == 2
    assert "is no count: write 1 or more" in capsys.readouterr().err or jobs == "-1"
    assert asked == []


TEXT = """
controller { scan 4..6 ms }
valve VS 5/2 bistable { coil YS1 to a  coil YS2 to b  on 12..22 ms }
cylinder stamp on VS { extend 90..130 ms  retract 80..120 ms  sensor BS1 at retracted  sensor BS2 at extended }
sequence main {
    every step within 1 s
    step press { pulse YS1 {number} ms  until BS2 }
    step lift { pulse YS2 60 ms  until BS1 }
}
"""


def written(folder: Path, *options: str) -> dict[str, bytes]:
    """What one run in a process of its own writes: the machines have pulses too short, long enough, and a slip."""
    machines = folder / "machines"
    machines.mkdir(parents=True, exist_ok=True)
    for number in range(11):
        text = TEXT.replace("{number}", str(16 + number) if number != 5 else "x")
        (machines / f"stamp {number}.steps").write_text(text, encoding="utf-8")
    wanted = [word for form in FORMATS for word in ("--format", form, "--output", f"report.{form}")]
    checkout = str(Path(__file__).resolve().parents[2])
    done = subprocess.run(
        [sys.executable, "-W", "error", "-m", "seqcheck", "check", "machines", *wanted, *options],
        cwd=folder,
        env={**os.environ, "PYTHONPATH": checkout, "PYTHONHASHSEED": str(len(options))},
        capture_output=True,
        check=False,
    )
    assert (done.returncode, done.stdout, done.stderr) == (2, b"", b"")
    return {form: (folder / f"report.{form}").read_bytes() for form in FORMATS}


def test_reports_are_the_same_bytes_from_any_folder_and_any_count_of_jobs(tmp_path: Path) -> None:
    one = written(tmp_path / "here", "--jobs", "1")
    two = written(tmp_path / "there" / "deeper", "--jobs", "2")
    again = written(tmp_path / "here")
    assert one == two == again
    assert all(str(tmp_path).encode() not in text for text in one.values())
    reports = json.loads(one["json"])["reports"]
    verdicts = [report["verdict"] for report in reports]
    assert (len(verdicts), verdicts.count("unreadable")) == (11, 1)
    assert {"clean", "findings"} < set(verdicts)


def test_a_fault_of_the_program_names_the_text_that_it_came_with(asked: Asked, capsys: Output) -> None:
    assert main(["check", "healthy.steps", "not-among-the-outcomes.steps"]) == 2
    assert re.fullmatch(
        r"seqcheck: error: this is a fault of seqcheck, not of your text: KeyError: 'not-among-the-outcomes'"
        r" \(conftest\.py:\d+, examining not-among-the-outcomes\.steps\)\n",
        capsys.readouterr().err,
    )
