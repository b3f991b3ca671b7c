from __future__ import annotations

import json
from collections.abc import Callable
from dataclasses import replace

import pytest
from rich.cells import cell_len

from seqcheck.compare.differences import (
    Change,
    Difference,
    DurationChange,
    FileComparison,
    FindingChange,
    MarginChange,
    Part,
)
from seqcheck.machine.findings import Duration, Severity
from seqcheck.report.comparison import (
    LONGEST_SECTION,
    comparison_lines,
    render_comparison,
    spelled_growth,
    spelled_margin,
)
from seqcheck.report.comparison_json import render_comparison_json
from seqcheck.report.layout import WIDTH
from tests.report.samples import no_watchdog, short_pulse, unknown_valve

Golden = Callable[[str, str], None]
CHANGED, NEW, GONE = Difference.CHANGED, Difference.NEW, Difference.GONE


def watchdog(old_us: int | None, new_us: int | None, difference: Difference = CHANGED) -> MarginChange:
    return MarginChange(difference, "tight-watchdog", "main.raise", "main.raise", old_us, new_us, False)


def worse() -> FileComparison:
    """Something of everything."""
    return FileComparison(
        "old/stapler.steps",
        "new/stapler.steps",
        "Crate stapler",
        findings=(
            FindingChange(NEW, short_pulse(), None, True),
            FindingChange(CHANGED, short_pulse(accepted="known"), short_pulse(margin_us=-5000, certain=True), False),
            FindingChange(GONE, no_watchdog(), None, False),
        ),
        margins=(
            replace(watchdog(40_000, 6_000), worse=True),
            MarginChange(CHANGED, "short-pulse", "V3", "main.tap", 6_000, 7_500, False),
            MarginChange(NEW, "short-pulse", "V2", "main.tap", None, 9_000, False),
            MarginChange(NEW, "short-pulse", "V3", "main.top", None, 8_000, False),
            watchdog(70_000, None, GONE),
        ),
        cycles=(DurationChange("main", Duration(1_000, 2_000, 3_000), Duration(1_000, 2_000, 15_000), True),),
        choices=(
            DurationChange("main, when in line 9", Duration(1_000, 1_000, 3_000), Duration(1_000, 1_000, None), False),
        ),
        steps=(
            DurationChange(
                "main.clamp+", Duration(408_500, 457_750, 495_000), Duration(408_500, 457_750, 507_000), False
            ),
            DurationChange("main.wait", None, Duration(20_000, 25_000, None), False),
        ),
        changes=(
            Change(Part.DEVICE, "sensor B9", NEW),
            Change(Part.TIME, "coil Y1", CHANGED, "on", "18..28 ms", "18..40 ms"),
            Change(Part.STEP, "step main.wait", NEW, new="after main.clamp+"),
            Change(Part.STEP, "sequence main", CHANGED, "after main.raise", "repeat 2", "repeat 3"),
            Change(Part.RULE, "limit cycle main", GONE),
        ),
    )


SAME = FileComparison("old/a.steps", "new/a.steps", "A")
UNREADABLE = FileComparison("old/b.steps", "new/b.steps", None, (unknown_valve(),), compared=False)
ADDED = FileComparison(None, "new/c.steps", "C", findings=(FindingChange(NEW, short_pulse(), None, True),))
REMOVED = FileComparison("old/d.steps", None, "D")
STORED = FileComparison("a.steps", "a.steps", "A", left_out=("the old side is a stored report",), stored=True)


@pytest.mark.parametrize(
    ("name", "files"),
    [
        ("comparison.txt", (worse(),)),
        ("comparison_same.txt", (SAME,)),
        ("comparison_stored.txt", (STORED,)),
        ("comparison_several.txt", (SAME, UNREADABLE, ADDED, REMOVED)),
    ],
)
def test_golden_pages_of_compare(name: str, files: tuple[FileComparison, ...], golden: Golden) -> None:
    golden(name, render_comparison(files))


def test_golden_json_of_compare(golden: Golden) -> None:
    golden("comparison.json", render_comparison_json((worse(), SAME, UNREADABLE, ADDED, REMOVED, STORED)))


@pytest.mark.parametrize(
    ("margin", "words"),
    [
        (watchdog(40_000, 6_000), "margin of tight-watchdog in main.raise 40 ms down to 6 ms"),
        (watchdog(6_000, 40_000), "margin of tight-watchdog in main.raise 6 ms up to 40 ms"),
        (watchdog(6_000, -500), "margin of tight-watchdog in main.raise 6 ms down to broken by 500 us"),
        (watchdog(6_000, None), "margin of tight-watchdog in main.raise 6 ms down to open"),
        (watchdog(None, 6_000), "margin of tight-watchdog in main.raise open up to 6 ms"),
        (watchdog(None, 6_000, NEW), "margin of tight-watchdog in main.raise is new: 6 ms"),
        (watchdog(6_000, None, GONE), "margin of tight-watchdog in main.raise is gone: it was 6 ms"),
        (
            MarginChange(CHANGED, "short-pulse", "V3", "main.tap", 1, 0, False),
            "margin of short-pulse of V3 in main.tap 1 us down to 0 ms",
        ),
        (MarginChange(CHANGED, "x", "V3", None, 1, 0, False), "margin of x of V3 1 us down to 0 ms"),
    ],
)
def test_margins_in_words(margin: MarginChange, words: str) -> None:
    assert spelled_margin(margin) == words


@pytest.mark.parametrize(
    ("old", "new", "words"),
    [
        ((5, 7, 10), (5, 7, 22), "12 us slower at most"),
        ((5, 7, 22), (5, 7, 10), "12 us quicker at most"),
        ((5, 7, 10), (4, 7, 11), "1 us slower at most, 1 us quicker at least"),
        ((5, 7, 10), (5, 8, 10), "1 us slower typically"),
        ((5, 7, 10), (5, 7, None), "open at most"),
        ((5, 7, None), (6, 7, 10), "no longer open at most, 1 us slower at least"),
    ],
)
def test_times_in_words(old: tuple[int, int, int | None], new: tuple[int, int, int | None], words: str) -> None:
    assert spelled_growth(DurationChange("main", Duration(*old), Duration(*new), False)) == words


def test_a_long_section_is_cut_and_says_so() -> None:
    changes = tuple(Change(Part.DEVICE, f"sensor B{number}", NEW) for number in range(LONGEST_SECTION + 3))
    page = render_comparison((replace(SAME, changes=changes),))
    assert f"B{LONGEST_SECTION - 1} is new\n    3 more left out here\n" in page
    assert "left out" not in render_comparison((replace(SAME, changes=changes[:LONGEST_SECTION]),))


def test_the_words_alone_carry_what_is_worse() -> None:
    lines = [line.text for line in comparison_lines((worse(),))]
    assert lines[0].endswith("worse: 1 new finding, 1 cycle slower, 1 margin")
    assert lines[lines.index("  Worse") + 1].startswith("    new: stapler.steps:25:20: error (possible) short-pulse")


@pytest.mark.parametrize("hostile", ["\x1b[2J\x1b]0;x\x07", "[red]x[/red]", "昇" * 500, "x" * 5000, "a\nb\r\x85c"])
@pytest.mark.parametrize("encoding", ["utf-8", "ascii"])
def test_hostile_text_stays_within_the_page(hostile: str, encoding: str) -> None:
    file = replace(
        worse(),
        old=hostile,
        new=hostile,
        machine=hostile,
        findings=(FindingChange(NEW, short_pulse(subject=hostile, message=hostile), None, True),),
        margins=(MarginChange(CHANGED, hostile, hostile, hostile, 2, 1, True),),
        steps=(DurationChange(hostile, None, Duration(1, 1, 1), False),),
        changes=(Change(Part.DEVICE, hostile, CHANGED, hostile, hostile, hostile),),
        left_out=(hostile,),
    )
    for line in comparison_lines(
        (file, replace(UNREADABLE, old=hostile, problems=(unknown_valve(hostile),))), encoding
    ):
        assert line.text.isprintable() and cell_len(line.text) <= WIDTH
        line.text.encode(encoding)


def test_json_says_what_is_there_and_leaves_out_what_is_not() -> None:
    first, *rest = json.loads(render_comparison_json((worse(), UNREADABLE)))["comparisons"]
    assert first["verdict"] == "worse"
    new, changed, gone = first["findings"]
    assert (new["change"], new["worse"], "was" in new) == ("new", True, False)
    assert changed["was"] == {"severity": "error", "certain": True, "margin_us": -5000}
    assert (changed["accepted"], gone["change"], "accepted" in gone) == ("known", "gone", False)
    assert first["margins"][0] | {"worse": 1} == {
        "change": "changed", "worse": 1, "kind": "tight-watchdog", "subject": "main.raise", "step": "main.raise",
        "old_margin_us": 40_000, "new_margin_us": 6_000,
    }  # fmt: skip
    assert "old_margin_us" not in first["margins"][2] and "new_margin_us" not in first["margins"][4]
    assert first["steps"]["main.wait"] == {"new": {"min_us": 20_000, "typical_us": 25_000, "max_us": None}}
    assert first["changes"][1] == {
        "part": "time", "name": "coil Y1", "change": "changed", "aspect": "on", "old": "18..28 ms", "new": "18..40 ms",
    }  # fmt: skip
    assert rest[0]["errors"][0]["message"] == "there is no valve V9; did you mean V1?"


def test_a_verdict_of_each_sort() -> None:
    note = FindingChange(NEW, no_watchdog(), None, False)
    assert [file.verdict for file in (worse(), SAME, UNREADABLE, ADDED, REMOVED)] == [
        "worse", "same", "unreadable", "worse", "changed",
    ]  # fmt: skip
    assert replace(SAME, findings=(note,)).verdict == "changed"
    assert replace(SAME, steps=worse().steps).verdict == "changed"
    assert note.finding.severity is Severity.NOTE
