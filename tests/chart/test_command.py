"""``seqcheck chart`` on the command line, within the process."""

from __future__ import annotations

import csv
import io
import os
from pathlib import Path

import pytest
from lxml import etree

from seqcheck.commandline import main
from tests.chart.charts import CLAMP, MIXED, SORTER

_FAULTY = Path(__file__).parents[2] / "examples" / "faulty"


@pytest.fixture
def clamp(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> str:
    monkeypatch.chdir(tmp_path)
    (tmp_path / "clamp.steps").write_text(CLAMP, "utf-8")
    return "clamp.steps"


def test_the_terminal_without_an_output(clamp: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["chart", clamp]) == 0
    shown = capsys.readouterr()
    assert shown.out.startswith("clamp.steps: Clamp: a settled cycle of main\n") and shown.err == ""
    assert all(len(line) <= 80 for line in shown.out.splitlines())
    assert main(["chart", clamp, "--ascii"]) == 0
    assert capsys.readouterr().out.isascii()


@pytest.mark.parametrize(
    ("ending", "begins"),
    [
        (".svg", "<svg xmlns="),
        (".html", "<!DOCTYPE html>"),
        (".csv", "row,kind,"),
        (".vcd", "$version seqcheck"),
        (".txt", "clamp.steps: Clamp"),
        (".SVG", "<svg xmlns="),
    ],
)
def test_forms_by_the_ending_of_the_file(clamp: str, ending: str, begins: str, tmp_path: Path) -> None:
    output = tmp_path / f"chart{ending}"
    output.write_text("what was there before", "utf-8")
    assert main(["chart", clamp, "--output", output.name]) == 0
    first = output.read_bytes()
    assert first.decode("utf-8").startswith(begins)
    assert main(["chart", clamp, "--output", output.name]) == 0
    assert output.read_bytes() == first
    assert sorted(os.listdir(tmp_path)) == sorted([clamp, output.name])


def test_names_from_outside_are_made_plain_in_files(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    Path("a.steps").write_text(CLAMP.replace("crate clamp", "a\x1b[31m\u202eb"), "utf-8")
    for ending in ("svg", "csv", "vcd", "txt", "html"):
        assert main(["chart", "a.steps", "--output", f"a.{ending}"]) == 0
        written = Path(f"a.{ending}").read_text("utf-8")
        assert "\x1b" not in written and "\u202e" not in written


def test_options_reach_the_chart(clamp: str, tmp_path: Path) -> None:
    (tmp_path / "mixed.steps").write_text(MIXED, "utf-8")
    wanted = ["--cycles", "2", "--rows", "lift,main", "--rows", "BL2", "--anchor", "press"]
    assert main(["chart", "mixed.steps", *wanted, "--output", "m.csv"]) == 0
    rows = list(csv.DictReader(io.StringIO(Path("m.csv").read_text("utf-8"))))
    assert {row["row"] for row in rows} == {"main", "lift", "BL2"}
    entered = [row for row in rows if row["event"] == "step main.press entered"]
    assert len(entered) == 4 and entered[0]["typical_us"] == entered[0]["latest_us"] == "0"
    assert main(["chart", "mixed.steps", "--from", "full", "--to", "down", "--output", "m.svg"]) == 0
    steps = {one.get("data-step") for one in etree.parse("m.svg").iter("{*}g")} - {None}
    assert steps == {"main.full", "main.turn", "main.down", "main.show"}


def test_choices_go_as_they_are_asked_to(clamp: str, capsys: pytest.CaptureFixture[str]) -> None:
    Path("sorter.steps").write_text(SORTER, "utf-8")
    assert main(["chart", "sorter.steps", "--choice", "rest=otherwise,rest=1", "--output", "s.csv"]) == 0
    rows = list(csv.DictReader(io.StringIO(Path("s.csv").read_text("utf-8"))))
    told = [row["event"] for row in rows if row["event"].startswith("choice")]
    assert told == [
        "choice in line 10: otherwise (branch 2 of 2)",
        "choice in line 10: when good (branch 1 of 2)",
        "choice in line 10 finds good on",
    ]
    assert main(["chart", "sorter.steps", "--choice", "10=otherwise", "--ascii"]) == 0
    assert "The way shown: in line 10 otherwise (branch 2 of 2)." in capsys.readouterr().out
    assert main(["chart", "sorter.steps", "--choice", "10=1,10=9"]) == 2
    assert "--choice 10=9: the choose in line 10 has the branches 1 to 2 or otherwise" in capsys.readouterr().err


def test_date_and_revision_stand_in_the_html(clamp: str) -> None:
    assert main(["chart", clamp, "--output", "c.html", "--date", "2031-03-07", "--revision", "C2"]) == 0
    page = Path("c.html").read_text("utf-8")
    assert "2031-03-07" in page and "C2" in page


def test_the_run_of_a_finding(clamp: str, capsys: pytest.CaptureFixture[str]) -> None:
    file = str(_FAULTY / "short_pulse.steps")
    for ending in ("svg", "csv", "vcd", "html"):
        assert main(["chart", file, "--witness", "1", "--output", f"w.{ending}"]) == 0
    rows = list(csv.DictReader(io.StringIO(Path("w.csv").read_text("utf-8"))))
    assert rows and all(row["earliest_us"] == row["typical_us"] == row["latest_us"] for row in rows)
    assert main(["chart", file, "--witness", "9"]) == 2
    assert "there is no finding 9; there are findings 1 to 1" in capsys.readouterr().err


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (["--output", "chart.png"], "its ending says no form of a chart; there are .svg, .html"),
        (["--output", "chart"], "its ending says no form of a chart"),
        (["--output", "clamp.steps"], "its ending says no form of a chart"),
        (["--date", "2031-03-07"], "write --output FILE.html"),
        (["--revision", "B", "--output", "a.svg"], "write --output FILE.html"),
        (["--from", "clmp+"], "there is no step clmp+; did you mean clamp+?"),
        (["--to", "x"], "the steps are main.clamp+, main.clamp-"),
        (["--rows", "clam"], "there is no row clam; did you mean clamp?"),
        (["--choice", "main=1"], "this text has nothing to choose"),
        (["--witness", "1"], "there is no finding 1"),
        (["--witness", "1", "--cycles", "2"], "leave out --from, --to, --anchor, --choice and --cycles"),
        (["--output", "no/such/folder.svg"], "cannot write the report to no/such/folder.svg"),
    ],
)
def test_what_makes_no_sense_is_refused_in_words(
    clamp: str, arguments: list[str], words: str, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["chart", clamp, *arguments]) == 2
    shown = capsys.readouterr()
    assert words in shown.err and shown.err.startswith("seqcheck: error: ") and shown.out == ""
    assert os.listdir() == [clamp]


def test_an_input_is_never_overwritten(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    Path("odd.txt").write_text(CLAMP, "utf-8")
    Path("sheet.csv").write_text("cylinders:\n  clamp:\n    extend: 390..440 ms\n", "utf-8")
    assert main(["chart", "odd.txt", "--output", "odd.txt"]) == 2
    assert main(["chart", "odd.txt", "--times", "sheet.csv", "--output", "sheet.csv"]) == 2
    assert Path("odd.txt").read_text("utf-8") == CLAMP


def test_a_text_that_cannot_be_read_gives_its_errors_and_no_file(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.chdir(tmp_path)
    Path("bad.steps").write_text(CLAMP.replace("on V1", "on V2"), "utf-8")
    assert main(["chart", "bad.steps", "--output", "bad.svg"]) == 2
    assert "bad.steps:5:" in capsys.readouterr().out
    assert os.listdir() == ["bad.steps"]
    assert main(["chart", "none.steps"]) == 2


def test_standard_input(clamp: str, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    class Stream(io.TextIOWrapper):
        pass

    monkeypatch.setattr("sys.stdin", Stream(io.BytesIO(CLAMP.encode("utf-8")), "utf-8"))
    assert main(["chart", "-"]) == 0
    assert "Clamp: a settled cycle of main" in capsys.readouterr().out


def test_a_first_sequence_that_never_comes_round_is_shown_as_far_as_it_was_played(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """``main`` waits for good while two others come to ever new states: nothing is played on for."""
    (tmp_path / "stuck.steps").write_text(
        "controller { scan 8..12 ms }\n"
        "flag done\n"
        "sequence main { step a { dwell 100 ms }  step stuck { until done }  step never { set done  dwell 5 ms } }\n"
        "sequence side { step ready { dwell 30 ms }  step go { dwell 50 ms } }\n"
        "sequence other { step ready { dwell 31 ms }  step go { dwell 57 ms } }\n"
        "never main.a and side.ready and other.ready for 100 s\n",
        "utf-8",
    )
    assert main(["chart", str(tmp_path / "stuck.steps")]) == 0
    assert "sequence main from its start as far as it was played" in capsys.readouterr().out
