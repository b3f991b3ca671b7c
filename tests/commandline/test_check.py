from __future__ import annotations

import json
from pathlib import Path

import pytest

from seqcheck.commandline import main
from seqcheck.report.text import render_text
from tests.commandline.conftest import Asked
from tests.report.samples import SHEETS, healthy, short_pulse

Output = pytest.CaptureFixture[str]


@pytest.mark.parametrize(
    ("arguments", "status"),
    [
        (["healthy.steps"], 0),
        (["noted.steps"], 0),
        (["warned.steps"], 0),
        (["broken.steps"], 1),
        (["unreadable.steps"], 2),
        (["--fail-on", "warning", "warned.steps"], 1),
        (["--fail-on", "warning", "noted.steps"], 0),
        (["--fail-on", "note", "noted.steps"], 1),
        (["--fail-on", "note", "healthy.steps"], 0),
        (["--fail-on", "never", "broken.steps"], 0),
        (["--fail-on", "never", "unreadable.steps"], 2),
        (["healthy.steps", "broken.steps"], 1),
        (["broken.steps", "unreadable.steps", "healthy.steps"], 2),
    ],
)
def test_exit_statuses(arguments: list[str], status: int, asked: Asked, capsys: Output) -> None:
    assert main(["check", *arguments]) == status
    assert len(asked) == sum(argument.endswith(".steps") for argument in arguments)
    assert capsys.readouterr().err == ""


def test_the_page_is_that_of_the_report(asked: Asked, capsys: Output) -> None:
    main(["check", "broken.steps"])
    assert capsys.readouterr().out == render_text([healthy(short_pulse())])


def test_every_sheet_is_handed_on_in_order(asked: Asked, capsys: Output) -> None:
    main(["check", "healthy.steps", "--times", "a.yaml", "noted.steps", "--times", "b.yaml"])
    assert asked == [("healthy.steps", ("a.yaml", "b.yaml")), ("noted.steps", ("a.yaml", "b.yaml"))]


def test_other_files_are_reported_beside_an_unreadable_one(asked: Asked, capsys: Output) -> None:
    assert main(["check", "--format", "json", "unreadable.steps", "broken.steps"]) == 2
    reports = json.loads(capsys.readouterr().out)["reports"]
    assert [report["verdict"] for report in reports] == ["unreadable", "findings"]


@pytest.mark.parametrize("form", ["text", "json"])
def test_output_holds_what_would_have_been_printed(form: str, asked: Asked, capsys: Output, tmp_path: Path) -> None:
    file = tmp_path / "report.out"
    main(["check", "broken.steps", "--format", form])
    printed = capsys.readouterr().out
    assert main(["check", "broken.steps", "--format", form, "--output", str(file)]) == 1
    assert file.read_bytes().decode("utf-8") == printed
    assert capsys.readouterr() == ("", "")


def test_output_to_standard_output_is_printed(asked: Asked, capsys: Output) -> None:
    assert main(["check", "broken.steps", "--output", "-"]) == 1
    assert capsys.readouterr().out == render_text([healthy(short_pulse())])


def test_an_output_that_cannot_be_written_is_status_2(asked: Asked, capsys: Output, tmp_path: Path) -> None:
    assert main(["check", "healthy.steps", "--output", str(tmp_path / "no" / "report")]) == 2
    error = capsys.readouterr().err
    assert error.startswith("seqcheck: error: cannot write the report to ")
    assert error.endswith(": No such file or directory\n")


def test_an_output_never_overwrites_an_input(asked: Asked, capsys: Output, tmp_path: Path) -> None:
    text = tmp_path / "healthy.steps"
    text.write_text("step")
    assert main(["check", str(text), "--output", f"{tmp_path}/./healthy.steps"]) == 2
    assert main(["check", "noted.steps", "--times", str(text), "--output", str(text)]) == 2
    assert text.read_text() == "step"
    assert asked == []
    assert "would overwrite an input" in capsys.readouterr().err


def test_an_output_never_overwrites_a_sheet_that_the_text_names(asked: Asked, capsys: Output, tmp_path: Path) -> None:
    sheet = tmp_path / SHEETS[0]
    sheet.write_text("valves:")
    assert main(["check", str(tmp_path / "healthy.steps"), "--output", str(sheet)]) == 2
    assert sheet.read_text() == "valves:"
    assert "would overwrite an input" in capsys.readouterr().err


@pytest.mark.parametrize(
    "arguments",
    [
        [],
        ["check"],
        ["polish", "a.steps"],
        ["check", "a.steps", "--format", "xml"],
        ["check", "a.steps", "--fail-on", "sometimes"],
        ["check", "a.steps", "--spin"],
        ["check", "a.steps", "--times"],
        ["check", "-", "-"],
        ["check", "a.steps", "--output", ""],
        ["times"],
        ["margins", "a.steps", "b.steps"],
    ],
)
def test_wrong_arguments_are_status_2_and_one_message(arguments: list[str], asked: Asked, capsys: Output) -> None:
    assert main(arguments) == 2
    captured = capsys.readouterr()
    assert captured.out == ""
    assert "seqcheck: error: " in captured.err
    assert "Traceback" not in captured.err
    assert asked == []


def test_arguments_cannot_act_on_the_terminal(asked: Asked, capsys: Output) -> None:
    assert main(["check", "a.steps", "--\x1b[2J"]) == 2
    assert "\x1b" not in capsys.readouterr().err


def test_a_fault_of_the_program_is_told_in_a_line(asked: Asked, capsys: Output) -> None:
    assert main(["check", "not-among-the-outcomes.steps"]) == 2
    error = capsys.readouterr().err
    assert error.startswith("seqcheck: error: this is a fault of seqcheck, not of your text: KeyError: ")
    assert "(conftest.py:" in error
    assert error.count("\n") == 1
