"""Which way a chart shows: what is asked for, what is done where nothing is, and what cannot be."""

from __future__ import annotations

from pathlib import Path

import pytest

from seqcheck.chart.asked import Part, Unplaceable
from seqcheck.chart.model import Chart
from tests.chart.charts import SORTER, SORTING, chart, row

_EXAMPLES = Path(__file__).parents[2] / "examples"
MS = 1000


def shown(folder: Path, *choices: str, text: str = SORTER, cycles: int = 1) -> Chart:
    return chart(folder, text, Part(choices=choices, cycles=cycles))


def steps(drawn: Chart, sequence: str = "main") -> list[str]:
    return [band.name for band in row(drawn, sequence).bands]


def taken(drawn: Chart) -> list[tuple[int, int | None, int]]:
    return [(one.edge.typical_us, one.branch, one.of) for one in row(drawn, "main").decisions]


def test_each_choice_takes_its_first_branch(tmp_path: Path) -> None:
    """20, 100 and 200 ms, and the 30 ms that the clerk takes."""
    drawn = shown(tmp_path)
    assert steps(drawn) == ["load", "look", "keep", "tell"]
    assert (drawn.begin_us, drawn.end_us) == (0, 350 * MS)
    assert taken(drawn) == [(120 * MS, 1, 2)]
    assert "The way shown: in line 10 when good (branch 1 of 2)." in drawn.notes
    assert f"Another way: --choice {SORTING}=2." in drawn.notes


@pytest.mark.parametrize("asked", [f"{SORTING}=2", f"{SORTING}=otherwise", "rest=2", "main.rest=otherwise", "keep=2"])
def test_a_way_that_never_comes_round_shows_its_loop(tmp_path: Path, asked: str) -> None:
    drawn = shown(tmp_path, asked)
    assert steps(drawn) == ["rest", "look"]
    assert drawn.end_us - drawn.begin_us == 150 * MS
    assert "once round the loop in which main stays" in drawn.title
    assert drawn.anchor == f"the choice in line {SORTING}"
    assert steps(drawn, "clerk") == ["idle"]


def test_one_branch_after_another(tmp_path: Path) -> None:
    drawn = shown(tmp_path, f"{SORTING}=2", f"{SORTING}=2", f"{SORTING}=1")
    assert steps(drawn) == ["load", "look", "rest", "look", "rest", "look", "keep", "tell"]
    assert taken(drawn) == [(120 * MS, 2, 2), (270 * MS, 2, 2), (420 * MS, 1, 2)]
    assert drawn.end_us == (2 * 150 + 350) * MS
    assert "otherwise (branch 2 of 2), then when good (branch 1 of 2)" in drawn.notes[0]


def test_cycles_behind_it_go_the_last_way(tmp_path: Path) -> None:
    drawn = shown(tmp_path, f"{SORTING}=2", f"{SORTING}=1", cycles=3)
    assert steps(drawn) == ["load", "look", "rest", "look", "keep", "tell", *["load", "look", "keep", "tell"] * 2]
    assert drawn.end_us == (150 + 3 * 350) * MS
    assert drawn.cycle_starts == tuple(time * MS for time in (0, 500, 850, 1200))


def test_where_first_branches_never_come_round_another_one_is_taken(tmp_path: Path) -> None:
    """The skid fills and drains for ever as long as the water is cloudy."""
    for sheet in _EXAMPLES.glob("rinse_skid*.yaml"):
        (tmp_path / sheet.name).write_bytes(sheet.read_bytes())
    text = (_EXAMPLES / "rinse_skid.steps").read_text("utf-8")
    drawn = chart(tmp_path, text)
    assert taken(drawn)[0][1] == 2 and "close_vent" in steps(drawn)
    assert "a settled cycle of main" in drawn.title
    again = chart(tmp_path, text, Part(choices=("close_vent=1", "close_vent=2")))
    assert [branch for _, branch, _ in taken(again)] == [1, 2] and steps(again).count("dose") == 2


_WITHIN = "choose { when good { step trim { dwell 60 ms } } otherwise { step scrap { dwell 70 ms } } }"
_AGAIN = _WITHIN.replace("trim", "file").replace("scrap", "burn")
NESTED = SORTER.replace("step rest { dwell 50 ms }  jump look", _WITHIN)
TWICE = NESTED.replace(_WITHIN, f"{_WITHIN} {_AGAIN}")


def test_a_choice_within_another_is_led_to(tmp_path: Path) -> None:
    drawn = shown(tmp_path, "scrap=otherwise", text=NESTED)
    assert steps(drawn) == ["load", "look", "scrap", "tell"]
    assert [branch for _, branch, _ in taken(drawn)] == [2, 2]


def test_what_hangs_on_the_times_of_the_machine_goes_as_a_known_run_goes(tmp_path: Path) -> None:
    """At typical times the sensor is too late for the choice; where it comes in time the other branch is taken."""
    text = (_EXAMPLES / "faulty" / "choice_race.steps").read_text("utf-8")
    assert steps(chart(tmp_path, text)) == ["lower", "calm", "reject", "raise"]
    other = chart(tmp_path, text, Part(choices=("pass=1",)))
    assert steps(other) == ["lower", "calm", "pass", "raise"]
    in_time = next(edge for edge in row(other, "BP2").edges if edge.level)
    usual = next(edge for edge in row(chart(tmp_path, text), "BP2").edges if edge.level)
    assert in_time.typical_us < taken(other)[0][0] and in_time.typical_us < usual.typical_us


#: The piston is there long before the choice asks.
DECIDED = """
valve V1 5/2 spring { coil Y1  on 18..28 ms  off 25..40 ms }
cylinder arm on V1 { extend 380..450 ms  retract 300..360 ms  sensor B1 at retracted  sensor B2 at extended }
sequence main {
    arm+
    choose { when B2 { step yes { dwell 100 ms } } otherwise { step no { dwell 100 ms } } }
    arm-
}
"""


@pytest.mark.parametrize(
    ("text", "choice", "words"),
    [
        (SORTER, "9=1", "no choose begins in line 9; there is one in line 10"),
        (SORTER, "10=3", "the choose in line 10 has the branches 1 to 2 or otherwise"),
        (SORTER, "10=0", "the branches 1 to 2 or otherwise"),
        (SORTER, "10", "write the line of a choose, or a step inside it, and a branch: 10=1"),
        (SORTER, "=1", "and a branch: 10=1"),
        (SORTER, "look=1", "step look is in no branch of a choose; there is one in line 10"),
        (SORTER, "kep=1", "there is no step kep; did you mean keep?"),
        (TWICE, "12=1", "2 choices begin in line 12; name a step inside"),
        (DECIDED, "no=2", "no known run goes so; by the machine itself it takes branch 1"),
    ],
)
def test_what_cannot_be_shown_is_refused_in_words(tmp_path: Path, text: str, choice: str, words: str) -> None:
    with pytest.raises(Unplaceable) as refusal:
        shown(tmp_path, choice, text=text)
    assert words in str(refusal.value)


def test_a_choice_that_the_way_does_not_come_to(tmp_path: Path) -> None:
    with pytest.raises(Unplaceable, match="a cycle that goes so does not come to the choose in line 12"):
        shown(tmp_path, "10=1", "trim=1", text=NESTED)
    with pytest.raises(Unplaceable, match="comes to the choose in line 10 once, not more often"):
        shown(tmp_path, "10=1", "10=1", text=SORTER)
