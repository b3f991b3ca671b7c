"""Which part of a machine a chart shows, where sequences share nothing, and what it says of the others."""

from __future__ import annotations

from pathlib import Path

import pytest

from seqcheck.chart.asked import Part, Unplaceable
from seqcheck.chart.model import Chart
from seqcheck.chart.page_moves import move_times
from tests.chart.charts import CLAMP, SORTER, chart, chart_of_finding, studied_text

MS = 1000
#: The pulse of the second sequence is too short for its valve; there is a sequence between the two of a part.
THREE = """
machine "Stamp with a lamp"
valve V1 5/2 spring { coil Y1  on 20 ms  off 30 ms }
valve V2 5/2 bistable { coil Y2 to a  coil Y3 to b  on 10..40 ms }
output H1
output spare
signal good from outside
sequence main {
    step out { set Y1  dwell 100 ms }
    step back { reset Y1  dwell 100 ms }
}
sequence lamp {
    step lit { on H1  dwell 70 ms }
    choose { when good { step dark { dwell 60 ms } } otherwise { step pause { dwell 90 ms } } }
}
sequence kick {
    step there { pulse Y2 30 ms  dwell 100 ms }
    step rest { pulse Y3 50 ms  dwell 100 ms }
}
"""
CHOOSING = 14


def shown(folder: Path, part: Part | None = None) -> Chart:
    return chart(folder, THREE, part)


def names(drawn: Chart) -> list[str]:
    return [row.name for row in drawn.rows]


def left_out(drawn: Chart) -> list[str]:
    return [note for note in drawn.notes if note.startswith("Not shown: ")]


def test_the_part_of_the_first_sequence_and_what_nobody_uses(tmp_path: Path) -> None:
    drawn = shown(tmp_path)
    assert names(drawn) == ["main", "Y1", "V1", "spare"]
    assert (drawn.begin_us, drawn.end_us) == (0, 200 * MS)
    assert left_out(drawn) == [
        "Not shown: lamp, kick, which share nothing with main, so that there is no time in common; --anchor STEP shows"
        " the sequence of that step."
    ]


@pytest.mark.parametrize(
    "part",
    [
        Part(anchor="lit"),
        Part(anchor="lamp.lit"),
        Part(from_step="lit", to_step="dark"),
        Part(rows=("lamp", "H1")),
        Part(choices=(f"{CHOOSING}=1",)),
        Part(anchor="lit", choices=("dark=1",), rows=("H1", "good", "lamp")),
    ],
)
def test_the_part_of_what_is_asked_for(tmp_path: Path, part: Part) -> None:
    drawn = shown(tmp_path, part)
    assert set(names(drawn)) <= {"lamp", "H1", "good"} and {"lamp", "H1"} <= set(names(drawn))
    assert drawn.title.endswith("cycle of lamp")
    (note,) = left_out(drawn)
    assert note.startswith("Not shown: main, kick, which share nothing with lamp,")


@pytest.mark.parametrize(
    ("part", "refusal"),
    [
        (Part(anchor="lit", from_step="out"), "--anchor lit: this shares nothing with main"),
        (Part(anchor="lit", rows=("lamp", "Y1")), "--rows Y1: this shares nothing with lamp"),
        (Part(rows=("Y1", "Y2")), "--rows Y2: this shares nothing with main"),
        (Part(anchor="out", choices=("dark=1",)), "--choice dark=1: this shares nothing with main"),
    ],
)
def test_what_no_part_has_all_of_is_refused(tmp_path: Path, part: Part, refusal: str) -> None:
    with pytest.raises(Unplaceable) as refused:
        shown(tmp_path, part)
    assert str(refused.value).startswith(refusal)


def test_a_name_that_is_nowhere_is_told_as_ever(tmp_path: Path) -> None:
    with pytest.raises(Unplaceable, match=r"there is no step lid; did you mean lit\?"):
        shown(tmp_path, Part(anchor="lid"))
    with pytest.raises(Unplaceable, match="there is no row H7"):
        shown(tmp_path, Part(rows=("H7",)))


def test_the_run_of_a_finding_is_of_its_part(tmp_path: Path) -> None:
    drawn = chart_of_finding(tmp_path, THREE, 1)
    assert drawn.marks[0].finding.kind == "short-pulse"
    assert names(drawn) == ["kick", "Y2", "Y3", "V2"]
    assert drawn.marks[0].row is not None
    (note,) = left_out(drawn)
    assert note.startswith("Not shown: main, lamp, which share nothing with kick,")


def test_only_what_concerns_the_part_is_noted(tmp_path: Path) -> None:
    """The pulse may be long enough or not: that is a matter of kick alone."""
    uncertain = "The times hold for runs in which each finding comes about, or does not, as at typical times."
    assert uncertain not in shown(tmp_path).notes
    assert uncertain in shown(tmp_path, Part(anchor="there")).notes


def test_the_moves_for_commissioning_are_of_all_parts(tmp_path: Path) -> None:
    _, studied = studied_text(tmp_path, THREE)
    moves = [move for move, _ in move_times(studied.machine, studied.studies)]
    assert [(one.step, one.device) for one in moves] == [
        ("main.out", "V1"),
        ("main.back", "V1"),
        ("kick.there", "V2"),
        ("kick.rest", "V2"),
    ]


@pytest.mark.parametrize("text", [CLAMP, SORTER])
def test_nothing_is_noted_where_nothing_is_left_out(tmp_path: Path, text: str) -> None:
    assert left_out(chart(tmp_path, text)) == []
