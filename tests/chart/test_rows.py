"""The rows of what is not on or off by a coil alone: flags, signals, taps, motor valves, gates that two valves hold."""

from __future__ import annotations

from pathlib import Path

from seqcheck.chart.asked import Part
from seqcheck.chart.model import HIGH, LOW, Chart, RowKind
from tests.chart.charts import PROCESS, SORTER, chart, row

MS = 1000


def levels(drawn: Chart, name: str) -> list[tuple[int, int]]:
    return [(edge.typical_us, edge.level) for edge in row(drawn, name).edges]


def texts(drawn: Chart, name: str) -> list[str]:
    return [edge.text for edge in row(drawn, name).edges]


def test_a_flag_is_set_and_reset(tmp_path: Path) -> None:
    drawn = chart(tmp_path, SORTER)
    told = row(drawn, "told")
    assert (told.kind, told.label, told.begin_level) == (RowKind.FLAG, "clerk knows", HIGH)
    assert levels(drawn, "told") == [(0, LOW), (320 * MS, HIGH)] and told.end_level == HIGH
    two = chart(tmp_path, SORTER, Part(cycles=2))
    assert levels(two, "told") == [
        (time * MS, level) for time, level in ((0, LOW), (320, HIGH), (350, LOW), (670, HIGH))
    ]
    assert texts(two, "told")[:2] == ["flag told is reset", "flag told is set"]


def test_every_sequence_has_a_band_and_may_be_the_anchor(tmp_path: Path) -> None:
    drawn = chart(tmp_path, SORTER)
    assert [one.name for one in drawn.rows][:2] == ["main", "clerk"]
    assert [band.name for band in row(drawn, "clerk").bands] == ["wipe", "idle", "note"]
    from_note = chart(tmp_path, SORTER, Part(anchor="note"))
    assert from_note.anchor == "entering step clerk.note" and from_note.begin_us == -320 * MS
    assert levels(from_note, "K2")[-1] == (0, HIGH)
    from_idle = chart(tmp_path, SORTER, Part(anchor="clerk.idle"))
    assert (from_idle.begin_us, from_idle.end_us) == (-40 * MS, 310 * MS)


def test_a_choice_finds_a_signal_from_outside(tmp_path: Path) -> None:
    """It is on at the read that asks, and nobody knows more."""
    drawn = chart(tmp_path, SORTER.replace("output K1", "controller { scan 10 ms }\noutput K1"))
    good = row(drawn, "good")
    (found, over) = good.edges
    assert (found.level, found.text) == (HIGH, "choice in line 11 finds good on")
    assert (over.typical_us - found.typical_us, over.level) == (10 * MS, LOW)
    assert all(drawn.rows[point.row].name != "good" for point in drawn.path)


def test_a_motor_valve_stands_between_its_ends(tmp_path: Path) -> None:
    """400 of 1000 ms, then any part of the travel from wherever it stands: 0 to 1000, drawn as 500 ms."""
    drawn = chart(tmp_path, PROCESS)
    inlet = row(drawn, "VM")
    assert inlet.ends == ("closed", "open")
    there = HIGH * 400 // 1000
    assert levels(drawn, "VM") == [
        (0, LOW),
        (400 * MS, there),
        (600 * MS, there),
        (1100 * MS, HIGH),
        (2100 * MS, HIGH),
        (3100 * MS, LOW),
    ]
    assert texts(drawn, "VM")[:2] == ["VM begins to open", "VM is stopped or turned on its way to open"]
    opened = inlet.edges[3]
    assert (opened.earliest_us, opened.latest_us) == (600 * MS, 1600 * MS)
    assert all(edge.lasting for edge in inlet.edges)


def test_a_tap_that_is_normally_open_is_high_at_rest(tmp_path: Path) -> None:
    drawn = chart(tmp_path, PROCESS)
    vent = row(drawn, "VT")
    assert (vent.begin_level, vent.end_level) == (HIGH, HIGH)
    assert texts(drawn, "VT") == ["VT begins to close", "VT is fully closed", "VT begins to open", "VT is fully open"]
    assert levels(drawn, "VT")[1] == (640 * MS, LOW) and levels(drawn, "VT")[3] == (2160 * MS, HIGH)


def test_a_gate_stands_below_the_last_of_its_valves(tmp_path: Path) -> None:
    """It goes once the later valve is there, at 3300 + 20 ms, and comes back when the first one of both is back."""
    drawn = chart(tmp_path, PROCESS)
    names = [one.name for one in drawn.rows]
    assert names[names.index("V2") :][:4] == ["V2", "gate", "B1", "B2"]
    gate = levels(drawn, "gate")
    assert gate == [(0, LOW), (3320 * MS, LOW), (3520 * MS, HIGH), (3550 * MS, HIGH)]
    assert drawn.end_us == (3550 + 150) * MS


def test_a_signal_that_follows_switches_after_its_time(tmp_path: Path) -> None:
    """On 300 ms after the inlet begins to open (it is open from then on), off 100 ms after it is closed."""
    drawn = chart(tmp_path, PROCESS)
    flow = row(drawn, "flow")
    assert (flow.kind, flow.address, flow.begin_level) == (RowKind.SIGNAL, "%I0.7", LOW)
    assert levels(drawn, "flow") == [(300 * MS, HIGH), (3200 * MS, LOW)]


def test_a_broken_never_is_marked_where_the_last_of_its_parts_comes(tmp_path: Path) -> None:
    """The vent is no longer open from 640 ms on: fully closed."""
    drawn = chart(tmp_path, PROCESS)
    (mark,) = [one for one in drawn.marks if one.finding.kind == "broken-never"]
    assert mark.row is not None and drawn.rows[mark.row].name == "VT"
    assert mark.time_us == 640 * MS
