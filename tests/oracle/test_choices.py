"""Choices, jumps, ways out and the exits of steps, on cases worked by hand.

Times in the checks are microseconds; the sums behind them stand beside them in milliseconds. With a scan of 10 ms the
start reads at 0 and its floor and write lie at 10: a coil that the first step commands is energized at 10, its valve
has shifted at 30, the stroke of 400 ends at 430.
"""

from __future__ import annotations

from tests.oracle.draws import given, least
from tests.oracle.look import LONG, branches, entered, kinds, left, machine_of, times_of
from tests.oracle.player import play
from tests.oracle.records import Run

CLAMP = """
controller { scan 10 ms }
valve V1 5/2 spring { coil Y1  on 20 ms  off 30 ms }
cylinder clamp on V1 { extend 400 ms  retract 300 ms  sensor B1 at retracted  sensor B2 at extended }
"""
SIGNALS = "controller { scan 10 ms  input 3 ms }  signal part from outside after 0..90 ms\n"


def ran(text: str, delays: dict[tuple[str, str, int], int] | None = None, cycles: int = 1) -> Run:
    return play(machine_of(text), given(delays or {}, least), cycles, LONG)


def readers(run: Run) -> list[str]:
    return [drawn.name for drawn in run.draws if drawn.what == "round"]


# --- choose at its read ---


def on_sensor(dwell: int, rest: str = "otherwise { step late { until B2 } }") -> str:
    return CLAMP + (
        f"sequence main {{ step out {{ set Y1 }}  step hold {{ dwell {dwell} ms }}\n"
        f"  choose {{ when B2 {{ step good {{ dwell 50 ms }} }} {rest} }}\n"
        "  step back { reset Y1  until B1 } }"
    )


def test_choice_goes_by_what_is_seen_at_its_read() -> None:
    # out leaves at 10, hold at 10 + 421 = 431, just as the end of the stroke is seen, 430 + 1.
    run = ran(on_sensor(421), {("see", "B2", 0): 1000})
    assert branches(run) == [0]
    assert entered(run, "good") == [431_000]
    assert (run.choices[0].arrived, run.choices[0].time) == (431_000, 431_000)
    # Seen a millisecond later it is too late; the step of the branch taken waits for the floor of the read, 441.
    run = ran(on_sensor(421), {("see", "B2", 0): 2000})
    assert branches(run) == [1]
    assert (entered(run, "late"), left(run, "late")) == ([431_000], [441_000])


def test_choice_that_stands_is_made_as_the_first_condition_is_seen() -> None:
    run = ran(on_sensor(100, "when not B1 and B2 { step never { } }"))
    # Come to at 110; B2 is seen at 430, where both hold: the first in the text wins.
    assert branches(run) == [0]
    assert (run.choices[0].arrived, run.choices[0].time) == (110_000, 430_000)
    assert "choose 6:3" in readers(run)
    assert readers(run).index("choose 6:3") == readers(run).index("main.good") - 1


def test_choice_that_stands_is_made_no_sooner_than_its_floor() -> None:
    run = ran(on_sensor(419, "when not B1 and B2 { step never { } }"), {("see", "B2", 0): 2000})
    assert (run.choices[0].arrived, run.choices[0].time) == (429_000, 439_000)  # seen at 432, floor 439


def test_what_changes_at_the_read_itself_is_not_known_to_its_choice() -> None:
    run = ran(
        "controller { scan 10 ms }  output K1  flag F\n"
        "sequence main { step one { on K1  dwell 30 ms }\n"
        "  choose { when not K1 { step off { } } when K1 { step on { set F } } }\n"
        "  choose { when F { step set_ { reset F  dwell 20 ms } } otherwise { step unset { reset F  dwell 20 ms } } } }"
    )
    # K1 drops at the very read at which the choice is come to. The flag set at 30 is known at 40, as on is left.
    assert entered(run, "on") == [30_000]
    assert entered(run, "set_") == [40_000]


def test_reader_of_a_choice_that_stands_shares_the_read_with_steps() -> None:
    run = ran(
        CLAMP + "sequence main once { together { step out { set Y1  until B2 } }\n"
        "  and { choose { when B2 { step x { } } } } }"
    )
    assert left(run, "out") == entered(run, "x") == [430_000]
    assert readers(run) == ["start", "choose 6:9", "main.x", "join 5:22"]


def test_empty_branch_goes_on_behind_the_choice_at_the_same_read() -> None:
    run = ran(on_sensor(500).replace("step good { dwell 50 ms }", ""))
    assert branches(run) == [0]
    assert entered(run, "back") == left(run, "hold") == [510_000]


# --- signals from outside ---


def asked(more: str) -> str:
    first, last = "step one { dwell 40 ms }", "step last { dwell 5 ms }"
    return SIGNALS + f"sequence main {{ {first}\n  choose {{ {more} }}\n  {last} }}"


EITHER = "when part { step yes { } } otherwise { step no { } }"
PLACE = "part 3:3"


def test_what_is_asked_from_outside_is_drawn_for_each_occasion() -> None:
    run = ran(asked(EITHER), {("asks", PLACE, 1): 1}, cycles=3)
    assert branches(run)[:3] == [1, 0, 1]
    assert [taken.occasion for taken in run.choices[:3]] == [0, 1, 2]
    assert run.choices[1].asked == (("part", True),)
    assert not [drawn for drawn in run.draws if drawn.what == "outside"]


def test_one_answer_serves_all_conditions_of_a_choice() -> None:
    three = "when part and one { step a { } } when not part { step b { } } otherwise { step c { } }"
    for answer, branch in ((0, 1), (1, 0)):
        run = ran(asked(three), {("asks", PLACE, 0): answer})
        assert branches(run) == [branch]  # one is known as active still at the read that leaves it
        assert len([drawn for drawn in run.draws if drawn.what == "asks"]) == 1


def test_signal_that_a_standing_choice_waits_for_comes_as_it_comes_for_a_step() -> None:
    text = asked("when part { step yes { } }")
    delays = {("outside", "part", 0): 70_000, ("filter", "part", 0): 3000, ("see", "part", 0): 5000}
    run = ran(text, delays)
    assert (run.choices[0].arrived, run.choices[0].time) == (40_000, 118_000)  # 40 + 70 + 3 + 5
    run = ran(text, {("outside", "part", 0): 1000})
    assert run.choices[0].time == 50_000  # there at 44, the floor of the read at 40 is 50


def test_answer_that_is_right_stays_right_while_the_choice_stands() -> None:
    text = CLAMP + (
        "signal part from outside after 5 ms\n"
        "sequence main { step out { set Y1 }\n  choose { when part and B2 { step a { } } when not part and B2 {} }\n"
        "  step back { reset Y1  until B1 } }"
    )
    run = ran(text, {("asks", "part 7:3", 0): 1})
    assert branches(run) == [0]
    assert run.choices[0].time == 430_000
    # The one that was not so comes after 5 ms: 15, at the floor of the read at 10 it is 20.
    assert [drawn.n for drawn in run.draws if drawn.what == "outside"] == [0]


def test_choice_in_a_choice_is_made_at_the_same_read() -> None:
    inner = "choose { when one { step b { } } otherwise { step c { } } }"
    run = ran(asked(f"when part {{ {inner} }} otherwise {{ }}"), {("asks", PLACE, 0): 1})
    assert branches(run) == [0, 0]
    assert entered(run, "b") == [40_000]


def test_signal_comes_once_for_all_that_begin_to_wait_at_one_read() -> None:
    text = SIGNALS + "sequence main once { together { step a { until part } } and { step b { until part } } }"
    run = ran(text, {("outside", "part", 0): 60_000})
    assert left(run, "a") == left(run, "b") == [63_000]
    assert len([drawn for drawn in run.draws if drawn.what == "outside"]) == 1


def test_signal_that_nobody_waits_for_any_more_does_not_come() -> None:
    text = SIGNALS + (
        "signal push from outside after 30 ms\n"
        "sequence main once { step a { until part or push }  step b { dwell 200 ms }  step c { until part } }"
    )
    run = ran(text, {("outside", "part", 0): 80_000, ("filter", "part", 1): 3000, ("outside", "part", 1): 20_000})
    assert left(run, "a") == [33_000]
    assert left(run, "c") == [256_000]  # b leaves at 233, 20 + 3 behind it
    assert len(times_of(run, "signal part comes")) == 1
    assert [drawn.n for drawn in run.draws if (drawn.what, drawn.name) == ("filter", "part")] == [1]


# --- or, not, steady ---


def lights(exit: str) -> str:
    """K1 is known on from 10 to 60, K2 from 50 to 110, and neither before or later."""
    branches = (
        "step a { on K1  dwell 50 ms }",
        "step b { dwell 40 ms }  step c { on K2  dwell 60 ms }",
        f"step wait {{ {exit} }}",
    )
    together = " and ".join(f"{{ {branch} }}" for branch in branches)
    return f"controller {{ scan 10 ms }}  output K1  output K2  sequence main once {{ together {together} }}"


def test_exit_with_or_is_left_as_the_first_of_its_alternatives_is_known() -> None:
    assert left(ran(lights("until K2 or main.c")), "wait") == [50_000]
    assert left(ran(lights("until K2 or K1")), "wait") == [10_000]
    assert left(ran(lights("until not K1 and not (K2 or main.b)")), "wait") == [110_000]


def test_steady_lasts_from_one_alternative_to_the_other() -> None:
    assert left(ran(lights("until K1 or K2  steady 90 ms")), "wait") == [100_000]  # 10 + 90, over the change
    # Without K2 it breaks at 60, and never comes again.
    assert left(ran(lights("until K1 or K1  steady 90 ms")), "wait") == []
    # K1 alone from 10 to 50, then again from 110 on with neither.
    assert left(ran(lights("until not K2  steady 70 ms")), "wait") == [180_000]


# --- within .. else ---


def way_out(within: float, exit: str = "until B2") -> str:
    return CLAMP + (
        f"sequence main once {{ step out {{ set Y1  {exit}  within {within} ms else fault }}  jump end\n"
        "  step fault { dwell 30 ms }  step end { dwell 500 ms } }"
    )


def test_watchdog_goes_to_its_step_at_the_first_read_after_it() -> None:
    run = ran(way_out(300), {("watchdog", "main.out", 0): 7000})
    assert (left(run, "out"), entered(run, "fault")) == ([307_000], [307_000])
    assert [(each.kind, each.subject, each.diverts) for each in run.incidents] == [
        ("tight-watchdog", "main.out", False)
    ]
    assert run.incidents[0].time == 300_000
    assert [visit.expired for visit in run.visits] == [True, False, False]


def test_read_that_goes_there_does_not_take_the_exit_any_more() -> None:
    run = ran(way_out(429), {("watchdog", "main.out", 0): 4000})  # B2 is seen at 430
    assert entered(run, "fault") == [433_000]


def test_inputs_that_have_changed_in_time_are_waited_for() -> None:
    run = ran(way_out(430), {("see", "B2", 0): 9000})
    assert left(run, "out") == [439_000]
    assert entered(run, "fault") == []
    assert kinds(run) == []


def test_watchdog_goes_no_sooner_than_the_floor_of_the_read() -> None:
    assert entered(ran(way_out(2)), "fault") == [10_000]


def test_watchdog_that_waits_for_someone_outside_is_no_incident() -> None:
    text = (
        "controller { scan 10 ms }  signal go from outside\n"
        "sequence main { step ask { until go  within 50 ms else again }  step ok { dwell 20 ms }\n"
        "  step again { dwell 30 ms } }"
    )
    run = ran(text, {("outside", "go", 0): 60_000})
    assert entered(run, "again")[0] == 50_000
    assert run.incidents == ()


def test_choice_that_waits_too_long_goes_to_the_step_of_its_watchdog() -> None:
    text = CLAMP + (
        "sequence main once { step out { set Y1 }\n"
        "  choose { when B2 { step good { } } } within 300 ms else fault\n"
        "  step fault { dwell 30 ms } }"
    )
    run = ran(text, {("watchdog", "choose 6:3", 0): 2000})
    assert branches(run) == [None]
    assert entered(run, "fault") == [312_000]  # come to at 10
    assert [(each.kind, each.subject) for each in run.incidents] == [("tight-watchdog", "choose 6:3")]
    run = ran(text.replace("300 ms", "420 ms"))
    assert branches(run) == [0]


# --- jump ---


def looped(body: str) -> str:
    return SIGNALS + f"sequence main {{ step first {{ dwell 20 ms }}\n  {body}\n  step last {{ dwell 20 ms }} }}"


AGAIN = "choose { when part { jump %s } otherwise { } }"


def test_jump_inside_a_loop_keeps_its_count() -> None:
    body = "repeat 2 { step a { dwell 20 ms }  %s  step b { dwell 20 ms } }" % (AGAIN % "a")
    run = ran(looped(body), {("asks", "part 3:38", 0): 1})
    # a, back, a, b in the first round; a, b in the second
    assert entered(run, "a") == [20_000, 40_000, 80_000]
    assert entered(run, "b") == [60_000, 100_000]


def test_loop_that_is_left_forgets_its_count() -> None:
    body = "step head { dwell 20 ms } repeat 3 { step a { dwell 20 ms } %s }" % (AGAIN % "head")
    run = ran(looped(body), {("asks", "part 3:63", 1): 1})
    # Left in its second round, it does three more.
    assert len(entered(run, "a")) == 5
    assert len(entered(run, "head")) == 2


def test_loop_that_is_jumped_into_begins_its_first_round() -> None:
    body = "repeat 2 { step a { dwell 20 ms } step b { dwell 20 ms } } %s" % (AGAIN % "b")
    run = ran(looped(body), {("asks", "part 3:62", 0): 1})
    assert len(entered(run, "a")) == 3  # two, then b again in a first round, and the second round whole
    assert len(entered(run, "b")) == 4


def test_jump_to_the_first_step_begins_a_cycle() -> None:
    run = ran(looped("%s" % (AGAIN % "first")), {("asks", "part 3:3", 0): 1}, cycles=2)
    assert run.cycle_starts["main"] == (0, 20_000, 60_000)
    assert [(cycle.start, cycle.end) for cycle in run.cycles["main"]] == [(0, 20_000), (20_000, 60_000)]
    assert [visit.cycle for visit in run.visits if visit.step == "main.first"] == [0, 1, 2]


def test_watchdog_that_goes_to_the_first_step_begins_a_cycle() -> None:
    text = CLAMP + (
        "sequence main { step back { reset Y1  dwell 50 ms }  step out { set Y1  until B2  within 100 ms else back } }"
    )
    assert ran(text).cycle_starts["main"] == (0, 150_000)
