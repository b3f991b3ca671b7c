"""``compare`` from the command line, on real texts and the real engine."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path

import pytest

from seqcheck.commandline import main

Output = pytest.CaptureFixture[str]

#: An invented lift. main.clamp+ takes 408.5 to 507 ms, main.raise 630.5 to 759 ms (the sums of a step: round, output,
#: valve, stroke, filter, wait for a read); its exit holds a read's wait of 12 ms sooner, 747 ms at the latest.
LIFT = """machine "Crate lift"
controller { scan 8..12 ms   input 2..4 ms   output 0.5..1 ms }
valve V1 5/2 spring { coil Y1   on 18..28 ms   off 25..40 ms }
valve V2 5/3 closed centre { coil Y2 to a   coil Y3 to b   on 20..30 ms   off 30..45 ms }
cylinder clamp on V1 { extend 380..450 ms   retract 300..360 ms   sensor B1 at retracted   sensor B2 at extended }
cylinder lift on V2 { extend 600..700 ms   retract 500..620 ms   sensor B3 at retracted   sensor B4 at extended }
sequence main {
    every step within 1 s
    clamp+
    step raise { on Y2   until B4   within 787 ms }
    step lower { on Y3   until B3 }
    clamp-
}
"""
#: The clamp's valve may take 12 ms more; the watchdog of raise is 34 ms shorter.
SLOWER = LIFT.replace("on 18..28 ms", "on 18..40 ms").replace("within 787 ms", "within 753 ms")
BROKEN = LIFT.replace("within 787 ms", "within 700 ms")


@pytest.fixture
def here(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.chdir(tmp_path)
    for name, text in (("lift.steps", LIFT), ("slower.steps", SLOWER), ("broken.steps", BROKEN)):
        Path(name).write_text(text, encoding="utf-8")
    return tmp_path


def compared(capsys: Output, *arguments: str) -> list[dict[str, object]]:
    main(["compare", *arguments, "--format", "json"])
    found = json.loads(capsys.readouterr().out)
    assert (found["format"], found["version"]) == ("seqcheck-comparison", 1)
    comparisons: list[dict[str, object]] = found["comparisons"]
    return comparisons


def test_a_reviewer_sees_what_a_change_did(here: Path, capsys: Output) -> None:
    assert main(["compare", "lift.steps", "slower.steps"]) == 1
    out = capsys.readouterr().out
    assert "main.clamp+  12 ms slower at most: 408.5..519 ms, was 408.5..507 ms\n" in out
    assert "margin of tight-watchdog in main.raise 40 ms down to 6 ms\n" in out
    assert "cycle of main 12 ms slower at most: 1.905..2.386 s, was 1.905..2.374 s\n" in out
    assert "coil Y1: on 18..40 ms, was 18..28 ms\n" in out
    assert "step main.raise: within 753 ms, was 787 ms\n" in out


@pytest.mark.parametrize(
    ("arguments", "status"),
    [
        (["lift.steps", "lift.steps"], 0),
        (["slower.steps", "lift.steps"], 0),
        (["lift.steps", "slower.steps", "--allow", "33999us"], 1),
        (["lift.steps", "slower.steps", "--allow", "34 ms"], 0),
        (["lift.steps", "broken.steps", "--allow", "10s"], 1),
        (["lift.steps", "broken.steps", "--allow", "10s", "--fail-on", "never"], 0),
        (["lift.steps", "broken.steps", "--allow", "10s", "--fail-on", "short-pulse"], 0),
        (["lift.steps", "broken.steps", "--allow", "10s", "--fail-on", "tight-watchdog"], 1),
        (["broken.steps", "broken.steps"], 0),
        (["broken.steps", "lift.steps"], 0),
        (["lift.steps", "none.steps"], 2),
        (["none.steps", "lift.steps"], 2),
        (["lift.steps", "."], 2),
        ([".", "lift.steps"], 2),
        (["lift.steps"], 2),
        (["lift.steps", "slower.steps", "--allow", "much"], 2),
        (["lift.steps", "slower.steps", "--fail-on", "short-plse"], 2),
        (["lift.steps", "slower.steps", "--times", "none.yaml"], 2),
        (["-", "-"], 2),
    ],
)
def test_exit_statuses(arguments: list[str], status: int, here: Path, capsys: Output) -> None:
    assert main(["compare", *arguments]) == status
    assert "Traceback" not in capsys.readouterr().err


def test_reformatting_and_moving_lines_shows_no_difference(here: Path, capsys: Output) -> None:
    devices, sequence = LIFT.split("sequence main")
    lines = devices.splitlines()
    moved = f"# Reviewed.\n\nsequence main{sequence}" + "\n\n".join(line.replace("   ", "\n\t") for line in lines[::-1])
    Path("moved.steps").write_text(moved, encoding="utf-8")
    assert main(["compare", "lift.steps", "moved.steps"]) == 0
    assert capsys.readouterr().out.startswith("moved.steps: Crate lift: no difference\n")


def test_a_renamed_step_is_told_and_its_margins_still_compared(here: Path, capsys: Output) -> None:
    Path("renamed.steps").write_text(LIFT.replace("step raise", "step hoist"), encoding="utf-8")
    (found,) = compared(capsys, "lift.steps", "renamed.steps")
    assert found["changes"] == [
        {"part": "step", "name": "step main.raise", "change": "changed", "aspect": "name",
         "old": "main.raise", "new": "main.hoist"}
    ]  # fmt: skip
    assert (found["margins"], found["steps"], found["verdict"]) == ([], {}, "changed")


def test_a_sheet_of_times_lies_over_both_sides(here: Path, capsys: Output) -> None:
    Path("measured.yaml").write_text("valves:\n  V1: {on: 20..22 ms}\n", encoding="utf-8")
    (found,) = compared(capsys, "lift.steps", "slower.steps", "--times", "measured.yaml")
    assert (found["cycles"], found["steps"]) == ({}, {})


def test_a_new_sheet_beside_the_text_is_compared_by_its_times(here: Path, capsys: Output) -> None:
    Path("times.yaml").write_text("valves:\n  V1: {on: 18..40 ms}\n", encoding="utf-8")
    Path("sheet.steps").write_text('timing "times.yaml"\n' + LIFT, encoding="utf-8")
    (found,) = compared(capsys, "lift.steps", "sheet.steps")
    assert found["changes"] == [
        {"part": "time", "name": "coil Y1", "change": "changed", "aspect": "on", "old": "18..28 ms", "new": "18..40 ms"}
    ]


def test_a_reserve_is_asked_of_both_sides(here: Path, capsys: Output) -> None:
    (found,) = compared(capsys, "lift.steps", "slower.steps", "--reserve", "10ms")
    new = [(one["change"], one["kind"], one["severity"], one["margin_us"]) for one in found["findings"]]  # type: ignore[attr-defined]
    assert new == [("new", "tight-watchdog", "warning", 6_000)]
    (found,) = compared(capsys, "slower.steps", "slower.steps", "--reserve", "10ms")
    assert found["verdict"] == "same"


def test_what_cannot_be_examined_is_still_compared_by_its_parts(here: Path, capsys: Output) -> None:
    wide = " and ".join(["(lift.moving or lift.between or clamp.moving)"] * 4)
    rules = f"never lift.moving and clamp.moving\nnever {wide}\n"
    Path("outside.steps").write_text(LIFT + rules, encoding="utf-8")
    assert main(["compare", "lift.steps", "outside.steps"]) == 2
    out = " ".join(capsys.readouterr().out.split())
    assert "not compared: one of the two sides could not be examined" in out
    assert "never clamp.moving and lift.moving is new" in out


# Folders


def folders(here: Path) -> None:
    for name, text in (
        ("old/same.steps", LIFT), ("old/k/lift.steps", LIFT), ("old/gone.steps", BROKEN),
        ("new/same.steps", LIFT), ("new/k/lift.steps", SLOWER), ("new/added.steps", BROKEN),
    ):  # fmt: skip
        Path(name).parent.mkdir(parents=True, exist_ok=True)
        Path(name).write_text(text, encoding="utf-8")


def test_folders_are_matched_by_the_names_below_them(here: Path, capsys: Output) -> None:
    folders(here)
    found = compared(capsys, "old", "new")
    assert [(one["old"], one["new"], one["verdict"]) for one in found] == [
        (None, "new/added.steps", "worse"),
        ("old/gone.steps", None, "changed"),
        ("old/k/lift.steps", "new/k/lift.steps", "worse"),
        ("old/same.steps", "new/same.steps", "same"),
    ]
    assert main(["compare", "old", "new"]) == 1
    assert capsys.readouterr().out.endswith("\n4 texts: 2 worse, 1 changed, 1 without a difference\n")


def test_many_texts_in_several_processes_give_the_same(here: Path, capsys: Output) -> None:
    folders(here)
    for number in range(8):
        Path(f"old/{number}.steps").write_text(LIFT, encoding="utf-8")
        Path(f"new/{number}.steps").write_text(SLOWER, encoding="utf-8")
    assert compared(capsys, "old", "new", "--jobs", "2") == compared(capsys, "old", "new", "--jobs", "1")


def test_an_unreadable_text_in_a_folder_leaves_the_others_compared(here: Path, capsys: Output) -> None:
    folders(here)
    Path("new/same.steps").write_text("sequence", encoding="utf-8")
    assert [one["verdict"] for one in compared(capsys, "old", "new")] == ["worse", "changed", "worse", "unreadable"]
    assert main(["compare", "old", "new"]) == 2


def test_a_folder_without_texts_is_status_2(here: Path, capsys: Output) -> None:
    Path("empty").mkdir()
    assert main(["compare", "empty", "."]) == 2
    assert "there is no *.steps file" in capsys.readouterr().out


# Stored reports


def stored(here: Path, *names: str) -> None:
    main(["check", *names, "--format", "json", "--output", "base.json"])


def test_a_stored_report_is_an_old_side(here: Path, capsys: Output) -> None:
    stored(here, "lift.steps")
    assert main(["compare", "base.json", "slower.steps"]) == 1
    out = capsys.readouterr().out
    assert "margin of tight-watchdog in main.raise 40 ms down to 6 ms\n" in out
    assert "main.clamp+  12 ms slower at most" in out
    assert "Left out: the old side is a stored report" in " ".join(out.split())
    assert "Y1" not in out


def test_a_stored_report_of_a_folder_is_matched_by_name(here: Path, capsys: Output) -> None:
    folders(here)
    stored(here, "old")
    found = compared(capsys, "base.json", "new")
    assert [(one["old"], one["new"], one["verdict"]) for one in found] == [
        (None, "new/added.steps", "worse"),
        ("old/k/lift.steps", "new/k/lift.steps", "worse"),
        ("old/same.steps", "new/same.steps", "same"),
        ("old/gone.steps", None, "changed"),
    ]
    (one,) = compared(capsys, "base.json", "new/k/lift.steps")
    assert (one["old"], one["verdict"]) == ("old/k/lift.steps", "worse")


@pytest.mark.parametrize(
    ("names", "words"),
    [
        (("base.json", "slower.steps"), "the stored report holds nothing of slower.steps"),
        (("lift.steps", "base.json"), "only the old side may be one"),
        (("bad.json", "lift.steps"), "this is no JSON"),
        (("bad.json", "."), "this is no JSON"),
    ],
)
def test_stored_reports_that_do_not_fit_are_refused(
    names: tuple[str, str], words: str, here: Path, capsys: Output
) -> None:
    stored(here, "lift.steps", "broken.steps")
    Path("bad.json").write_text("{oops", encoding="utf-8")
    assert main(["compare", *names]) == 2
    assert words in " ".join(capsys.readouterr().out.split())


def test_a_stored_report_of_an_unreadable_text_is_status_2(here: Path, capsys: Output) -> None:
    Path("lift.steps").write_text("sequence", encoding="utf-8")
    stored(here, "lift.steps")
    assert main(["compare", "base.json", "slower.steps"]) == 2


# Output


def test_outputs_hold_what_would_have_been_printed(here: Path, capsys: Output) -> None:
    main(["compare", "lift.steps", "slower.steps"])
    page = capsys.readouterr().out
    main(["compare", "lift.steps", "slower.steps", "--format", "json"])
    form = capsys.readouterr().out
    pair = ["--format", "text", "--output", "page.txt", "--format", "json", "--output", "page.json"]
    assert main(["compare", "lift.steps", "slower.steps", *pair]) == 1
    assert capsys.readouterr() == ("", "")
    assert (Path("page.txt").read_text("utf-8"), Path("page.json").read_text("utf-8")) == (page, form)


@pytest.mark.parametrize("output", ["lift.steps", "slower.steps", "times.yaml", ""])
def test_an_output_never_overwrites_an_input(output: str, here: Path, capsys: Output) -> None:
    Path("times.yaml").write_text("valves:\n  V1: {on: 18..40 ms}\n", encoding="utf-8")
    Path("lift.steps").write_text('timing "times.yaml"\n' + LIFT, encoding="utf-8")
    before = Path(output).read_text("utf-8") if output else ""
    assert main(["compare", "lift.steps", "slower.steps", "--output", output]) == 2
    assert "seqcheck: error: " in capsys.readouterr().err
    assert not output or Path(output).read_text("utf-8") == before


def test_standard_input_may_be_one_side(here: Path, checkout: Path) -> None:
    command = [sys.executable, "-m", "seqcheck", "compare", "-", "slower.steps"]
    done = subprocess.run(
        command, input=LIFT.encode(), env={"PYTHONPATH": str(checkout)}, capture_output=True, check=False
    )
    assert (done.returncode, done.stderr) == (1, b"")
    assert b"main.raise 40 ms down to 6 ms" in done.stdout


def test_two_runs_give_the_same_bytes(here: Path, capsys: Output) -> None:
    folders(here)
    pages = []
    for form in ("text", "json", "text", "json"):
        main(["compare", "old", "new", "--format", form])
        pages.append(capsys.readouterr().out)
    assert pages[:2] == pages[2:]
    assert str(here) not in "".join(pages)


# Choices

#: By hand: a step with a dwell of D takes D to D + 12 ms (the wait for a read), so does a cycle of one of them.
SORTER = """machine "Sorter"
controller { scan 8..12 ms }
signal good from outside
sequence main {
    step look { dwell 100 ms }
    choose {
        when good { step keep { dwell 200 ms } }
        otherwise { step drop { dwell 400 ms } }
    }
}
"""
LONGER = f"# Reviewed.\n{SORTER.replace('dwell 200 ms', 'dwell 300 ms')}"


def test_a_cycle_by_choice_that_changed_is_told_and_is_not_worse(here: Path, capsys: Output) -> None:
    """The greatest cycle is the other branch's, which stays."""
    for name, text in (("old.steps", SORTER), ("new.steps", LONGER)):
        Path(name).write_text(text, encoding="utf-8")
    assert main(["compare", "old.steps", "new.steps"]) == 0
    out = " ".join(capsys.readouterr().out.split())
    assert "Cycle times by choice main, when in line 8 100 ms slower at most, 100 ms slower at least" in out
    assert ": 400..424 ms, was 300..324 ms" in out
    (found,) = compared(capsys, "old.steps", "new.steps")
    told = {
        "main, when in line 8": {
            "old": {"min_us": 300_000, "max_us": 324_000},
            "new": {"min_us": 400_000, "max_us": 424_000},
        }
    }
    assert (found["choices"], found["verdict"]) == (told, "changed")
    stored(here, "old.steps")
    assert compared(capsys, "base.json", "new.steps")[0]["choices"] == told
    older = json.loads(Path("base.json").read_text(encoding="utf-8"))
    del older["reports"][0]["choices"]
    Path("base.json").write_text(json.dumps(older), encoding="utf-8")
    assert compared(capsys, "base.json", "new.steps")[0]["choices"] == {}


def test_a_choice_with_another_branch_is_left_out_and_said_so(here: Path, capsys: Output) -> None:
    more = SORTER.replace("otherwise", "when start { step stop { dwell 1 s } }\n        otherwise")
    for name, text in (("old.steps", SORTER), ("new.steps", f"signal start from outside\n{more}")):
        Path(name).write_text(text, encoding="utf-8")
    (found,) = compared(capsys, "old.steps", "new.steps")
    assert found["choices"] == {}
    assert found["left_out"] == [
        "the choices of main have more branches or fewer, so its cycle times by choice are not compared"
    ]
    main(["compare", "old.steps", "new.steps"])
    out = capsys.readouterr().out
    assert "Against old.steps" in out and "the stored report" not in out
