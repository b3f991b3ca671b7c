"""Several sequences, flags, signals that follow, motor valves, stop valves, islands and rules, on cases worked by hand.

As in ``test_choices``: with a scan of 10 ms what the first step commands is written at 10.
"""

from __future__ import annotations

import pytest

from tests.oracle.draws import given, least, typical
from tests.oracle.look import LONG, entered, kinds, left, machine_of, measured, times_of
from tests.oracle.player import play
from tests.oracle.records import Run

SCAN = "controller { scan 10 ms }\n"
VALVE = "valve V1 5/2 spring { coil Y1  on 20 ms  off 30 ms }\n"
CLAMP = (
    VALVE + "cylinder clamp on V1 { extend 400 ms  retract 300 ms  sensor B1 at retracted  sensor B2 at extended }\n"
)
OUT_AND_IN = "sequence main once { step out { set Y1  until B2 }  step back { reset Y1  until B1 } }\n"


def ran(text: str, delays: dict[tuple[str, str, int], int] | None = None, cycles: int = 1) -> Run:
    return play(machine_of(text), given(delays or {}, least), cycles, LONG)


def at(run: Run, *texts: str) -> list[list[int]]:
    return [times_of(run, text) for text in texts]


def side(run: Run, step: str) -> tuple[list[int], list[int | None]]:
    visits = [visit for visit in run.visits if visit.step == f"side.{step}"]
    return [visit.entered for visit in visits], [visit.left for visit in visits]


# --- several sequences, flags ---


def test_step_of_another_sequence_is_known_from_the_floors_of_its_reads() -> None:
    run = ran(
        SCAN + "sequence main once { step one { dwell 30 ms }  step two { dwell 50 ms }  step three { dwell 50 ms } }\n"
        "sequence side { step dark { until main.two }  step lit { until not main.two } }"
    )
    # two is entered at 30 and left at 80: known 10 later each.
    assert side(run, "lit") == ([40_000], [90_000])
    assert run.cycle_starts == {"main": (0,), "side": (0, 90_000)}


def test_sequences_that_leave_on_one_event_share_the_read() -> None:
    run = ran(
        SCAN
        + CLAMP
        + "sequence main once { step out { set Y1  until B2 } }\nsequence side once { step wait { until B2 } }"
    )
    assert left(run, "out") == [430_000]
    assert side(run, "wait")[1] == [430_000]
    assert [drawn.name for drawn in run.draws if drawn.what == "round"] == ["start", "main.out"]


def test_run_goes_by_the_first_sequence_that_goes_round() -> None:
    text = (
        SCAN + "sequence one once { step a { dwell 30 ms } } sequence two { step b { dwell 20 ms } } sequence "
        "three { step c { } }"
    )
    run = ran(text, cycles=3)
    assert run.cycle_starts["two"] == (0, 20_000, 40_000, 60_000)
    assert run.cycle_starts["three"] == (0, 10_000, 20_000, 30_000, 40_000, 50_000, 60_000)


def test_flags_are_known_from_the_floor_and_reset_wins() -> None:
    run = ran(
        SCAN + "flag F  flag G\n"
        "sequence main once { step one { dwell 30 ms }  step two { set F  on G  dwell 40 ms }\n"
        "  together { step three { reset F  dwell 50 ms } } and { step four { set F  dwell 50 ms } } }\n"
        "sequence side { step dark { until F and G }  step lit { until not F }  step end { dwell 1 s } }"
    )
    assert side(run, "lit") == ([40_000], [80_000])  # set and on at 30, reset at 70 though another step sets it
    assert not [drawn for drawn in run.draws if drawn.what == "output"]


# --- signals that follow ---


def test_signal_follows_after_its_own_delay_the_filter_and_the_wait_for_a_read() -> None:
    run = ran(
        "controller { scan 10 ms  input on 3 ms off 4 ms }\n"
        + CLAMP
        + "signal eye follows clamp.extended on 80 ms off 20 ms\n"
        "sequence main once { step out { set Y1  until eye }  step back { reset Y1  until not eye } }",
        {("see", "eye", 0): 6000},
    )
    assert left(run, "out") == [519_000]  # 430 + 80 + 3 + 6
    assert left(run, "back") == [583_000]  # written at 529, valve back at 559, the piston leaves at once, 20 + 4
    assert [(drawn.what, drawn.n) for drawn in run.draws if drawn.name == "eye"] == [
        ("follow", 0),
        ("filter", 0),
        ("see", 0),
        ("follow", 1),
        ("filter", 1),
        ("see", 1),
    ]


def test_change_that_is_shorter_than_the_delay_is_swallowed() -> None:
    text = (
        SCAN + "output K1  signal eye follows K1 on 50 ms off 10 ms\nsequence main once { step a { on K1  "
        "dwell 40 ms } step b { until eye within 1 s } }"
    )
    run = ran(text)
    assert times_of(run, "eye on vanishes unseen") == []
    assert times_of(run, "input eye on") == []
    assert kinds(run) == ["dead-end", "tight-watchdog"]


def test_signal_has_what_it_follows_from_the_start_and_may_follow_a_signal() -> None:
    run = ran(
        SCAN + CLAMP + "signal home follows clamp.retracted off 5 ms  signal away follows not home on 7 ms\n"
        "sequence main once { step a { set Y1  until home }  step b { until away }  step c { until not home } }"
    )
    assert left(run, "a") == [10_000]
    assert left(run, "b") == [42_000]  # the piston leaves at 30, home is seen off at 35, away comes 7 later
    assert left(run, "c") == [52_000]


def test_signal_from_outside_is_on_until_the_last_step_that_waits_for_it_is_left() -> None:
    run = ran(
        SCAN + "signal go from outside after 20 ms  signal seen follows go\n"
        "sequence main once { together { step a { until go } } and { step b { until go  dwell 60 ms } }\n"
        "  step c { dwell 100 ms } }\n"
        "never go and main.a  limit from go to main.c 1 s\nnever seen"
    )
    # Seen at 20, as a is left; b is left at 60; the join reads at 70.
    assert measured(run) == [(None, None), (50_000, 50_000), (40_000, 40_000)]


# --- what rules see of cylinders, valves, coils and outputs ---


def test_aspects_of_a_cylinder() -> None:
    moves = CLAMP.replace("retract 300 ms", "retract 300 ms  lag 50 ms")
    rules = [f"never clamp.{aspect}\n" for aspect in ("extended", "retracted", "moving", "between")]
    run = ran(SCAN + moves + OUT_AND_IN + "".join(rules))
    # Out: valve at 30, leaves at 80, there at 430. Left at 430, written 440, valve 470, leaves 520, there 770.
    extended, retracted, moving, between = measured(run, "broken-never")
    assert extended == (90_000, 90_000)
    assert retracted[0] == 80_000
    assert moving == between == (250_000, 350_000)


def test_piston_that_is_stopped_does_not_move_but_is_between() -> None:
    run = ran(
        SCAN + "valve V2 5/3 closed centre { coil Y2 to a  coil Y3 to b  on 20 ms  off 30 ms }\n"
        "cylinder lift on V2 { extend 400 ms  retract 300 ms  overrun 5 ms  sensor B3 at retracted  "
        "sensor B9 at 40..60 % }\n"
        "sequence main once { step part { on Y2  until B9 }  step hold { dwell 200 ms }  step back { on Y3  "
        "until B3 } }\n"
        "never lift.moving  never lift.between  never V2.centre",
    )
    # Leaves at 30, 40 % at 190, written at 200, centre at 230, stands at 235.
    # hold until 390, written at 400, valve at 420, the next mark is there at once, and 0.4 * 300 from there.
    moving, between, centre = measured(run)
    assert moving == (120_000, 205_000)
    assert between == (510_000, 510_000)  # 30 to 540
    assert centre[1] is not None and centre[1] >= 170_000  # 230 to 400


def test_aspects_of_valves() -> None:
    pipes = (
        "valve P1 2/2 spring { coil Y7  on 20 ms  off 30 ms }  "
        "valve P2 2/2 spring normally open { coil Y8  on 20 ms  off 30 ms }\n"
    )
    rules = "".join(
        f"never {term}\n" for term in ("P1.open", "P1.a", "P1.shifting", "P2.closed", "not P2.open", "Y7", "K1")
    )
    run = ran(
        "controller { scan 10 ms  output 2 ms }\noutput K1\n"
        + pipes
        + "sequence main once { step one { on Y7  on Y8  on K1  dwell 100 ms }  step two { dwell 100 ms } }\n"
        + rules
    )
    # Energized from 12 to 112: open (not closed any more) 12 to 142, at a 32 to 112, shifting twice.
    opened, a, shifting, closed, shut, coil, output = measured(run)
    assert (opened, a, shifting) == ((130_000, 130_000), (80_000, 80_000), (20_000, 30_000))
    assert closed == shut == (80_000, 80_000)
    assert coil == output == (100_000, 100_000)


# --- motor valves ---


def motor(*steps: str) -> str:
    valve = "valve M 2/2 motor { coil M1 to a  coil M2 to b  travel 1 s }\n"
    return SCAN + valve + f"sequence main once {{ {' '.join(steps)} }}\nnever M.shifting  never M.open  never M.a"


def test_motor_valve_travels_from_end_to_end() -> None:
    run = ran(motor("step open { on M1  dwell 1.2 s }", "step shut { on M2  dwell 1.2 s }"))
    assert at(run, "valve M at a", "valve M at b") == [[1_010_000], [2_210_000]]
    assert measured(run) == [(1_000_000, 1_000_000), (2_200_000, 2_200_000), (200_000, 200_000)]
    assert kinds(run) == ["broken-never"] * 4  # it shifts twice


def test_motor_valve_stops_where_it_stands_and_goes_on_from_there() -> None:
    steps = "step open { on M1  dwell 400 ms }", "step hold { dwell 100 ms }", "step more { on M1  dwell 900 ms }"
    run = ran(motor(*steps), {("valve", "M1 on", 1): 300_000})
    # Moves from 10 to 410, stands between, goes on at 510: anything up to the whole way.
    assert at(run, "valve M at a") == [[810_000]]
    assert measured(run)[0] == (300_000, 400_000)
    assert kinds(run).count("short-pulse") == 1
    spans = [
        (drawn.n, drawn.span.least, drawn.span.typical, drawn.span.greatest)
        for drawn in run.draws
        if drawn.what == "valve"
    ]
    assert spans == [(0, 1_000_000, 1_000_000, 1_000_000), (1, 0, 500_000, 1_000_000)]


def test_motor_valve_reversed_on_the_way() -> None:
    run = ran(
        motor("step open { on M1  dwell 400 ms }", "step shut { on M2  dwell 900 ms }"), {("valve", "M2 on", 0): 7000}
    )
    assert at(run, "valve M at a", "valve M at b") == [[], [417_000]]


def test_motor_valve_goes_on_with_both_coils_and_stands_where_it_is_asked_to_be() -> None:
    run = ran(
        motor(
            "step shut { on M2  dwell 50 ms }",
            "step open { set M1  dwell 400 ms }",
            "step both { on M2  dwell 900 ms }",
        )
    )
    assert at(run, "valve M asked for b", "valve M at a") == [[], [1_060_000]]
    assert "short-pulse" not in kinds(run)


def test_cylinder_goes_by_the_end_that_its_motor_valve_was_at_last() -> None:
    text = (
        SCAN + "valve M 5/2 motor { coil M1 to a  coil M2 to b  travel 100 ms }\n"
        "cylinder gate on M { extend 400 ms  retract 300 ms  sensor B1 at retracted  sensor B2 at extended }\n"
        "sequence main once { step a { on M1  dwell 150 ms }  step b { on M2  dwell 30 ms }  step c { until B2 } }"
    )
    run = ran(text)
    assert left(run, "c") == [510_000]  # at a at 110, off for a moment after 160, out at 510 all the same
    assert "cut-stroke" not in kinds(run)


# --- cylinders on conditions ---

ARM = (
    SCAN + "valve V8 5/2 bistable { coil Y1 to a  coil Y2 to b  on 20 ms }\n"
    "valve V9 2/2 spring { coil Y9  on 10 ms  off 15 ms }\n"
    "cylinder arm out when V8.a and V9.open in when V8.b and V9.open {\n"
    "  extend 400 ms  retract 300 ms  overrun 5 ms  sensor B1 at retracted  sensor B5 at 40..60 %  "
    "sensor B2 at extended }\n"
)


def test_stop_valve_holds_the_piston_and_lets_it_go_on() -> None:
    run = ran(
        ARM
        + "sequence main once { step out { pulse Y1 50 ms  set Y9  until B5 }  step hold { reset Y9  dwell 100 ms }\n"
        "  step more { set Y9  until B2 }  step home { pulse Y2 50 ms  until B1 } }",
        {("mark", "arm 600000", 1): 30_000},
    )
    # V9 is open at 20, V8 at a at 30: out from 30, 40 % at 190. Shut: written 200, at 215, stands at 220.
    assert times_of(run, "cylinder arm starts out") == [30_000, 310_000]  # more at 290, written 300, open at 310
    assert times_of(run, "cylinder arm stands") == [220_000]
    assert left(run, "more") == [500_000]  # 60 % at 340, the other 40 % in 160
    assert left(run, "home") == [830_000]  # written 510, at b at 530, and in at once, as the stop valve is open
    assert kinds(run) == []


def test_cylinder_that_is_sent_both_ways_stands() -> None:
    run = ran(
        SCAN + VALVE + "valve V2 5/2 spring { coil Y2  on 20 ms  off 30 ms }\n"
        "cylinder arm out when V1.a in when V2.a { extend 400 ms  retract 300 ms  sensor B1 at retracted  "
        "sensor B2 at extended }\n"
        "sequence main once { step a { on Y1  dwell 200 ms }  step b { on Y1  on Y2  dwell 200 ms }  "
        "step c { on Y2  until B1 } }",
        {("mark", "arm 0", 1): 90_000},
    )
    assert times_of(run, "cylinder arm starts out") == [30_000]
    assert times_of(run, "cylinder arm stands") == [230_000]
    assert times_of(run, "cylinder arm starts in") == [440_000]  # V1 is back at 410 + 30
    assert left(run, "c") == [530_000]


# --- islands ---


def test_outputs_of_an_island_share_the_update_of_their_write() -> None:
    run = ran(
        "controller { scan 10 ms  input 3 ms  output 9 ms }\nio bus { update 2..6 ms  input on 1 ms off 2 ms  "
        "output on 1 ms off 4 ms }\n"
        "valve V1 5/2 spring { coil Y1 via bus  on 20 ms  off 30 ms }\noutput K1 via bus  output K2\n"
        "cylinder clamp on V1 { extend 400 ms  retract 300 ms  sensor B1 at retracted  "
        "sensor B2 at extended via bus }\n"
        "sequence main once { step out { set Y1  on K1  on K2  until B2 }  step off { dwell 50 ms }  "
        "step back { reset Y1  until B1 } }",
        {("update", "bus", 0): 5000, ("update", "B2", 0): 6000, ("update", "bus", 1): 3000},
    )
    # Written at 10: the island switches at 10 + 5 + 1, the controller's own output at 10 + 9.
    assert at(run, "coil Y1 energized", "output K1 on", "output K2 on") == [[16_000], [16_000], [19_000]]
    assert left(run, "out") == [443_000]  # 436 + 1 + 6
    assert times_of(run, "output K1 off") == [460_000]  # 453 + 3 + 4
    assert times_of(run, "coil Y1 released") == [509_000]  # 503 + 2 + 4: the third write for the island
    assert left(run, "back") == [842_000]  # 539 + 300 + 3
    assert [(drawn.name, drawn.n) for drawn in run.draws if drawn.what == "update"] == [
        ("bus", 0),
        ("B2", 0),
        ("bus", 1),
        ("bus", 2),
        ("B2", 1),
    ]


# --- rules ---


def told(run: Run) -> list[tuple[int, str, str]]:
    return [(each.time, each.kind, each.subject) for each in run.incidents]


def test_never_is_broken_by_what_lasts_longer() -> None:
    text = SCAN + "sequence main once { step a { dwell 30 ms }  step b { dwell 40 ms } }\n"
    run = ran(text + "never main.b for 39.999 ms  never main.b for 40 ms  never main.a and main.b")
    assert told(run) == [(69_999, "broken-never", "never main.b for 39.999 ms")]
    assert measured(run) == [(40_000, 40_000), (40_000, 40_000), (None, None)]
    assert [rule.broken for rule in run.rules] == [True, False, False]
    assert not run.incidents[0].diverts


def test_instant_of_no_length_breaks_nothing() -> None:
    run = ran("output K1\nsequence main once { step a { on K1 }  step b { dwell 5 ms } }\nnever K1  never main.a")
    assert told(run) == []


def test_limit_from_one_to_the_next_other() -> None:
    text = (
        SCAN + CLAMP + "sequence main once { step out { set Y1  until B2 }  step back { reset Y1  until B1 }  "
        "step again { set Y1  until B2 } }\n"
    )
    rules = (
        "limit from Y1 to B2 420 ms  limit from Y1 to B2 419 ms  limit from Y1 to B2 421..500 ms  "
        "limit from main.back to B2 2 s"
    )
    run = ran(text + rules)
    # Y1 is energized at 10, B2 seen at 430. Back: 440, 470, seen 770; again: 780, 800, 1200.
    assert measured(run) == [(420_000, 420_000)] * 3 + [(770_000, 770_000)]
    assert told(run)[:2] == [
        (429_000, "over-limit", "limit from Y1 to B2 419 ms"),
        (430_000, "over-limit", "limit from Y1 to B2 421..500 ms"),
    ]


def test_limit_that_is_met_at_the_same_instant_takes_no_time() -> None:
    run = ran(
        "sequence main once { step a { dwell 5 ms }  step b { dwell 5 ms } }\nlimit from main.b to not main.a 1 ms"
    )
    assert measured(run) == [(0, 0)]


def test_limit_of_what_never_comes_is_told_at_its_end() -> None:
    run = ran(SCAN + "output K1\nsequence main once { step a { dwell 200 ms } }\nlimit from main.a to K1 50 ms")
    assert told(run) == [(50_000, "over-limit", "limit from main.a to K1 50 ms")]


@pytest.mark.parametrize(("limit", "broken"), [("50 ms", []), ("49 ms", [119_000, 239_000])])
def test_limit_of_a_cycle_counts_from_leaving_a_step_that_waits_for_someone(limit: str, broken: list[int]) -> None:
    text = (
        SCAN
        + "signal go from outside after 70 ms\nsequence main { step ready { until go }  step work { dwell 50 ms } }\n"
    )
    run = ran(text + f"limit cycle {limit}", cycles=2)
    assert [(cycle.start, cycle.begin, cycle.end) for cycle in run.cycles["main"]] == [
        (0, 70_000, 120_000),
        (120_000, 190_000, 240_000),
    ]
    assert [time for time, _, _ in told(run)] == broken


def test_limit_of_a_plain_cycle() -> None:
    run = play(machine_of(SCAN + CLAMP + OUT_AND_IN.replace(" once", "") + "limit cycle 700 ms"), typical, 1, LONG)
    assert entered(run, "out")[:2] == [0, run.cycle_starts["main"][1]]
    # Each way 10 to the write, valve, stroke, and typically half a round to the read that sees its end.
    assert run.cycle_starts["main"][1] == 10_000 + 420_000 + 5000 + 10_000 + 330_000 + 5000
    assert told(run) == [(700_000, "over-limit", "limit cycle 700 ms")]


# --- what is refused ---


def test_output_with_times_of_its_own_is_not_looked_at() -> None:
    text = "output K1 { on 5 ms }\nsequence main once { step a { on K1  dwell 20 ms } }\nnever K1"
    with pytest.raises(NotImplementedError, match="times of its own"):
        ran(text)
