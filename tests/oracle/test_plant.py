"""Valves, cylinders and sensors of the player on cases worked by hand, and what it refuses."""

from __future__ import annotations

import pytest

from seqcheck.machine.devices import Controller, ControllerKind
from seqcheck.machine.model import Machine
from seqcheck.machine.time import NO_TIME, Span
from tests.oracle.build import (
    IDEAL,
    bistable,
    centred,
    cylinder,
    machine,
    ms,
    spring,
    step,
)
from tests.oracle.draws import given, least, typical
from tests.oracle.look import LONG, kinds, left, times_of
from tests.oracle.player import play
from tests.oracle.strokes import Pace, full_stroke, marks_of, rest_of_stroke

# --- valves ---


def test_bistable_valve_keeps_what_it_has_reached() -> None:
    case = machine(
        IDEAL,
        step("out", "pulse Y1 30", until="B2"),
        step("in", "pulse Y2 30", until="B1"),
        valves=(bistable("V1", "Y1", "Y2", ms(20)),),
        cylinders=(cylinder("clamp", "V1", ms(400), ms(300), ("B1", 0, 0), ("B2", 100, 100)),),
    )
    run = play(case, typical, 1, LONG)
    assert run.cycle_starts["main"] == (0, 740_000)
    assert [(drawn.name, drawn.n) for drawn in run.draws if drawn.what == "valve"][:2] == [("Y1 on", 0), ("Y2 on", 0)]
    assert times_of(run, "coil Y1 released") == [30_000]
    assert times_of(run, "valve V1 at b") == [440_000]
    assert run.incidents == ()


def test_both_coils_let_the_valve_go_on_as_it_was() -> None:
    controller = Controller(output_on=ms(0, 50), output_off=ms(0, 50))
    case = machine(
        controller,
        step("out", "on Y2", until="B4"),
        step("in", "on Y3", until="B3"),
        valves=(centred("V2", "Y2", "Y3", ms(20), ms(30)),),
        cylinders=(cylinder("lift", "V2", ms(400), ms(300), ("B3", 0, 0), ("B4", 100, 100)),),
    )
    run = play(case, given({("output", "Y2", 1): 50_000}, least), 1, LONG)
    # Y3 comes at 420, Y2 goes at 470: the valve is asked for b only then.
    assert times_of(run, "valve V2 asked for b") == [470_000]
    assert min(times_of(run, "valve V2 asked for centre")) == 790_000
    assert left(run, "in") == [790_000]


def test_valve_asked_back_before_it_moved_stays_where_it_is() -> None:
    case = machine(
        IDEAL,
        step("out", "on Y1", dwell=10),
        step("wait", dwell=100),
        valves=(spring("V1", "Y1", ms(20), ms(30)),),
        cylinders=(cylinder("clamp", "V1", ms(400), ms(300)),),
        once=True,
    )
    run = play(case, typical, 1, LONG)
    assert times_of(run, "valve V1 at a") == []
    assert not any(line.text.startswith("cylinder") for line in run.log)
    assert [(drawn.name, drawn.n) for drawn in run.draws if drawn.what == "valve"] == [("Y1 on", 0)]


def test_shift_is_numbered_by_the_coil_that_moves_the_valve() -> None:
    case = machine(
        Controller(output_off=ms(0, 50)),
        step("out", "on Y2", until="B4"),
        step("in", "on Y3", until="B3"),
        step("part", "on Y2", dwell=100),
        step("more", "set Y2", until="B4"),
        valves=(centred("V2", "Y2", "Y3", ms(20), ms(30)),),
        cylinders=(cylinder("lift", "V2", ms(400), ms(300), ("B3", 0, 0), ("B4", 100, 100)),),
        once=True,
    )
    delays = {("output", "Y2", 1): 50_000, ("valve", "Y3 on", 0): 20_000, ("valve", "Y2 on", 1): 20_000}
    run = play(case, given(delays, least), 1, LONG)
    # Y3 is alone only as Y2 goes: the shift is that of Y3. Y3 goes as Y2 comes: nothing is asked for in between.
    assert [(drawn.name, drawn.n) for drawn in run.draws if drawn.what == "valve"] == [
        ("Y2 on", 0),
        ("Y3 on", 0),
        ("Y3 off", 0),
        ("Y2 on", 1),
    ]


def test_what_is_drawn_of_a_stroke_is_numbered_by_the_stroke() -> None:
    case = machine(
        IDEAL,
        step("part", "on Y2", until="B5"),
        step("rest", dwell=100),
        step("back", "on Y3", until="B1"),
        step("out", "on Y2", until="B2"),
        valves=(centred("V2", "Y2", "Y3", ms(20), ms(10)),),
        cylinders=(cylinder("lift", "V2", ms(400), ms(300), *MID, overrun=ms(5)),),
        once=True,
    )
    draws = play(case, typical, 1, LONG).draws
    assert [drawn.n for drawn in draws if drawn.what == "lag"] == [0, 2]
    assert [drawn.n for drawn in draws if drawn.what == "overrun"] == [0, 2]
    assert [drawn.n for drawn in draws if (drawn.what, drawn.name) == ("mark", "lift 450000")] == [0, 1, 2]
    assert [drawn.n for drawn in draws if (drawn.what, drawn.name) == ("mark", "lift 500000")] == [0, 2]


# --- cylinders ---

MID = (("B1", 0, 0), ("B5", 45, 50), ("B2", 96, 100))


def test_marks_of_a_full_stroke_stay_apart_and_share_the_unevenness() -> None:
    made, sensors = cylinder("lift", "V", ms(400, 500), ms(300), *MID, uneven=20)
    assert marks_of(sensors) == (0, 450_000, 500_000, 960_000, 1_000_000)
    # 0.45 * 400 * 0.8 and 0.45 * 500 * 1.2, the middle 0.45 * 450
    pace = Pace(made, True, ms(20, 30))
    assert pace.to_mark(450_000) == Span(144_000, 202_500, 270_000)
    assert pace.to_mark(960_000).greatest == 487_200  # the last 0.04 take 0.04 * 400 * 0.8 = 12.8 of the 500 at least
    times = {450_000: 200_000, 500_000: 160_000, 960_000: 350_000, 1_000_000: 400_000}
    reached = full_stroke(pace, (450_000, 500_000, 960_000, 1_000_000), 0, 0, lambda mark, span: times[mark])
    # 50 %: 0.05 * 400 * 0.8 = 16 behind 45 %; 96 %: 0.46 * 400 * 0.8 = 147.2 behind that
    assert reached == ((450_000, 200_000), (500_000, 216_000), (960_000, 363_200), (1_000_000, 400_000))


def test_shares_round_outward() -> None:
    made, _ = cylinder("lift", "V", Span(7, 8, 10), ms(300), ("B5", 33, 50))
    assert Pace(made, True, NO_TIME).to_mark(330_000) == Span(2, 2, 4)
    assert Pace(made, True, NO_TIME).to_mark(500_000) == Span(3, 4, 5)
    assert Pace(made, True, NO_TIME).onward(330_000) == Span(2, 2, 4)


def test_rest_of_a_stroke_starts_anew_at_the_next_mark() -> None:
    made, _ = cylinder("lift", "V", ms(400, 500), ms(300), *MID, uneven=20)
    spans: dict[int, Span] = {}

    def middle(mark: int, span: Span) -> int:
        spans[mark] = span
        return span.typical

    pace = Pace(made, True, ms(20, 30))
    reached = rest_of_stroke(pace, 450_000, (500_000, 960_000, 1_000_000), 1_000_000, middle)
    assert spans == {
        500_000: Span(0, 15_000, 30_000),  # 0.05 * 500 * 1.2
        960_000: Span(147_200, 207_000, 276_000),  # 0.46 * 400 * 0.8, 0.46 * 450, 0.46 * 500 * 1.2
        1_000_000: Span(160_000, 225_000, 300_000),
    }
    assert reached == ((500_000, 1_015_000), (960_000, 1_222_000), (1_000_000, 1_240_000))
    # The end may come with the mark before it, only marks keep their distance.
    ahead = (500_000, 960_000, 1_000_000)
    reached = rest_of_stroke(pace, 450_000, ahead, 0, lambda mark, span: 200_000 if mark == 960_000 else span.least)
    assert reached == ((500_000, 0), (960_000, 200_000), (1_000_000, 200_000))


def test_marks_are_timed_from_the_coil_but_come_no_sooner_than_the_piston_moves() -> None:
    made, _ = cylinder("lift", "V", ms(400, 500), ms(300), *MID, from_coil=True)
    ahead = (450_000, 500_000, 960_000, 1_000_000)
    late = {450_000: 225_000, 500_000: 226_000, 960_000: 470_000, 1_000_000: 480_000}
    reached = full_stroke(Pace(made, True, ms(20, 40)), ahead, 0, 40_000, lambda mark, span: late[mark])
    # 45 %: 225 from the coil against 40 + 0.45 * (400 - 40) from where it moves; 50 %: 18 behind that
    assert reached == ((450_000, 225_000), (500_000, 243_000), (960_000, 470_000), (1_000_000, 480_000))


def test_valve_of_a_stroke_timed_from_the_coil_lies_before_the_first_part() -> None:
    made, _ = cylinder("lift", "V", ms(400, 500), ms(300), *MID, uneven=20, from_coil=True)
    pace = Pace(made, True, ms(20, 40))
    assert pace.moving == Span(360_000, 420_000, 480_000)
    assert pace.apart(500_000) == 144_000  # 0.5 * 360 * 0.8
    # 0.45 * 400 * 0.8 as if the valve took no time; 40 + 0.45 * 460 * 1.2 where it takes its longest
    assert pace.to_mark(450_000) == Span(144_000, 202_500, 288_400)
    assert pace.to_mark(960_000).greatest == 488_480  # 500 - 0.04 * 360 * 0.8
    assert pace.onward(500_000) == Span(144_000, 210_000, 288_000)
    assert pace.slowest(100_000) == 57_600
    # A valve that can take longer than the whole stroke leaves no time, not less than none.
    assert Pace(made, True, ms(300, 600)).moving == Span(0, 0, 200_000)
    assert Pace(made, True, ms(300, 600)).to_mark(450_000) == Span(144_000, 202_500, 500_000)


def _stroke_case(**more: object) -> Machine:
    return machine(
        IDEAL,
        step("out", "set Y1", until="B2"),
        step("in", "reset Y1", until="B1"),
        valves=(spring("V1", "Y1", ms(20), ms(30)),),
        cylinders=(cylinder("lift", "V1", ms(400), ms(300), *MID, **more),),  # type: ignore[arg-type]
    )


def test_stroke_from_the_valve_and_from_the_coil() -> None:
    run = play(_stroke_case(lag=ms(50)), least, 1, LONG)
    assert times_of(run, "cylinder lift leaves 0") == [70_000]
    assert times_of(run, "sensor B1 off") == [70_000]
    assert times_of(run, "cylinder lift at 450000")[0] == 227_500  # 20 + 50 + 0.45 * 350, later than 20 + 0.45 * 400
    assert times_of(run, "cylinder lift at 1000000") == [420_000]  # 96 % has come 50 + 336 behind the valve
    run = play(_stroke_case(from_coil=True), least, 1, LONG)
    assert times_of(run, "cylinder lift at 450000")[0] == 191_000  # 20 + 0.45 * (400 - 20): the valve has taken 20
    assert times_of(run, "cylinder lift at 1000000") == [400_000]  # 96 % at 384, the end from the coil


def test_sensors_switch_at_their_edges_in_both_directions() -> None:
    run = play(_stroke_case(), typical, 2, LONG)
    at = {text: times_of(run, text)[:1] for text in ("sensor B5 on", "sensor B5 off", "sensor B2 on", "sensor B2 off")}
    assert at == {
        "sensor B5 on": [200_000],  # 20 + 0.45 * 400
        "sensor B5 off": [220_000],
        "sensor B2 on": [404_000],  # 20 + 0.96 * 400: where the next step begins, before the end of the stroke
        "sensor B2 off": [446_000],  # end at 420, back from 434 on, 0.04 * 300
    }
    assert times_of(run, "sensor B5 on")[1] == 584_000  # back: 434 + 0.5 * 300
    assert times_of(run, "sensor B5 off")[1] == 599_000


def test_piston_stops_after_its_overrun_and_goes_on_from_there() -> None:
    case = machine(
        IDEAL,
        step("part", "on Y2", until="B5"),
        step("rest", dwell=100),
        step("more", "on Y2", until="B2"),
        step("hold", dwell=100),
        valves=(centred("V2", "Y2", "Y3", ms(20), ms(10)),),
        cylinders=(cylinder("lift", "V2", ms(400), ms(300), *MID, overrun=ms(5, 15)),),
        once=True,
    )
    run = play(case, given({("overrun", "lift", 0): 5000, ("mark", "lift 500000", 1): 7000}, least), 1, LONG)
    assert kinds(run) == []
    assert times_of(run, "cylinder lift stands")[0] == 215_000  # 45 % at 200, centre at 210
    assert times_of(run, "cylinder lift at 500000") == [327_000]  # asked at 300, valve at 320, the rest of the way
    run = play(case, given({("overrun", "lift", 0): 10_000}, least), 1, LONG)
    assert times_of(run, "cylinder lift at 500000") == [320_000]  # a mark at the very end of the overrun is not reached
    run = play(case, given({("overrun", "lift", 0): 10_001}, least), 1, LONG)
    assert times_of(run, "cylinder lift at 500000") == [220_000]


def test_piston_reversed_between_marks_comes_back_to_the_mark_behind_it() -> None:
    case = machine(
        IDEAL,
        step("out", "set Y1", until="B5"),
        step("in", "reset Y1", until="B1"),
        valves=(spring("V1", "Y1", ms(20), ms(10)),),
        cylinders=(cylinder("lift", "V1", ms(400), ms(300), *MID),),
    )
    run = play(case, given({("mark", "lift 450000", 1): 4000}, least), 1, LONG)
    assert kinds(run) == []
    assert times_of(run, "sensor B5 off") == [214_000]  # on at 200, valve back at 210
    assert left(run, "in")[0] == 349_000  # from there 0.45 * 300
    assert [drawn.name for drawn in run.draws if drawn.what == "lag"] == ["lift"]


def test_piston_reversed_before_it_left_its_end_has_not_moved() -> None:
    case = machine(
        IDEAL,
        step("out", "on Y1", dwell=30),
        step("in", dwell=100),
        valves=(spring("V1", "Y1", ms(20), ms(10)),),
        cylinders=(cylinder("lift", "V1", ms(400), ms(300), *MID, lag=ms(50)),),
        once=True,
    )
    run = play(case, typical, 1, LONG)
    assert kinds(run) == ["early-dwell", "cut-stroke"]
    assert not any(line.text.startswith("sensor") for line in run.log)


# --- sensors ---


def test_sensor_goes_through_delay_and_filter_and_is_seen_at_a_read() -> None:
    controller = Controller(ControllerKind.SCAN, ms(8, 12), NO_TIME, ms(2, 4), ms(6, 7))
    case = machine(
        controller,
        step("out", "set Y1", until="B2"),
        step("in", "reset Y1", until="not B2"),
        valves=(spring("V1", "Y1", ms(20), ms(20)),),
        cylinders=(cylinder("lift", "V1", ms(400), ms(300), ("B2", 100, 100), delay=ms(1, 3)),),
    )
    delays = {("delay", "B2", 0): 3000, ("filter", "B2", 0): 4000, ("see", "B2", 0): 12_000}
    run = play(case, given(delays, least), 1, LONG)
    assert left(run, "out")[0] == 8000 + 20_000 + 400_000 + 3000 + 4000 + 12_000
    assert left(run, "in")[0] == 447_000 + 8000 + 20_000 + 1000 + 6000


def test_change_taken_back_inside_the_filter_vanishes() -> None:
    controller = Controller(ControllerKind.SCAN, ms(8), NO_TIME, ms(25), ms(25))
    case = machine(
        controller,
        step("out", "set Y1", until="B2"),
        valves=(spring("V1", "Y1", ms(20), ms(20)),),
        cylinders=(cylinder("lift", "V1", ms(400), ms(300), ("B5", 45, 50), ("B2", 100, 100)),),
    )
    run = play(case, least, 1, LONG)
    assert times_of(run, "B5 on vanishes unseen") == [8000 + 20_000 + 200_000]
    assert times_of(run, "input B5 on") == []
    assert len([drawn for drawn in run.draws if drawn.name == "B5"]) == 2  # delay and filter of the first change only
    assert run.incidents == ()  # nobody waits for it


# --- what is refused ---


def test_what_is_not_played_is_refused() -> None:
    single = cylinder("lift", "V1", ms(400), ms(300), ("B5", 50, 50))
    valves = (spring("V1", "Y1", ms(20), ms(20)),)
    with pytest.raises(NotImplementedError, match="single point"):
        play(machine(IDEAL, step("one", dwell=1), valves=valves, cylinders=(single,)), typical, 1, LONG)
