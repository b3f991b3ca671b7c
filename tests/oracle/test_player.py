"""The controller of the player on cases worked by hand: the rules of the design, one after the other.

Times in the checks are microseconds; the sums behind them stand beside them in milliseconds.
"""

from __future__ import annotations

from itertools import pairwise

import pytest

from seqcheck.machine.devices import Controller, ControllerKind
from seqcheck.machine.model import Machine
from seqcheck.machine.time import NO_TIME, Span
from tests.oracle.build import (
    IDEAL,
    cylinder,
    machine,
    ms,
    repeat,
    scan,
    signal,
    spring,
    step,
    task,
    together,
)
from tests.oracle.controller import EndlessLoop
from tests.oracle.draws import Draw, OutOfSpan, at_corners, at_random, given, greatest, least, typical
from tests.oracle.look import LONG, entered, left, times_of
from tests.oracle.player import play
from tests.oracle.worked import worked_case

# --- the worked case, DESIGN section 7 ---


@pytest.mark.parametrize(("draw", "cycle"), [(least, 1_905_000), (typical, 2_139_500), (greatest, 2_374_000)])
def test_worked_case_cycle(draw: Draw, cycle: int) -> None:
    run = play(worked_case(), draw, 3, LONG)
    assert run.cycle_starts == {"main": (0, cycle, 2 * cycle, 3 * cycle)}
    assert run.incidents == ()


@pytest.mark.parametrize("seed", range(20))
def test_worked_case_stays_within_its_bounds(seed: int) -> None:
    for draw in (at_random(seed), at_corners(seed)):
        starts = play(worked_case(), draw, 4, LONG).cycle_starts["main"]
        cycles = [following - start for start, following in pairwise(starts)]
        assert all(1_905_000 <= cycle <= 2_374_000 for cycle in cycles)


def test_worked_case_handover_is_half_a_millisecond_either_way() -> None:
    late = {("output", "Y2", 1): 1000, ("output", "Y3", 0): 500}
    run = play(worked_case(), given(late, typical), 1, LONG)
    assert times_of(run, "coil Y2 released")[0] - times_of(run, "coil Y3 energized")[0] == 500
    early = {("output", "Y2", 1): 500, ("output", "Y3", 0): 1000}
    run = play(worked_case(), given(early, typical), 1, LONG)
    assert times_of(run, "coil Y3 energized")[0] - times_of(run, "coil Y2 released")[0] == 500


# --- draws ---


def test_given_delay_outside_its_span_is_refused() -> None:
    with pytest.raises(OutOfSpan, match=r"valve Y1 on number 0: 99 us is not in 18000\.\.28000 us"):
        play(worked_case(), given({("valve", "Y1 on", 0): 99}, typical), 1, LONG)


def test_draws_are_recorded_with_their_spans() -> None:
    run = play(worked_case(), greatest, 1, LONG)
    first = run.draws[0]
    assert (first.what, first.name, first.n, first.span, first.value) == ("round", "start", 0, ms(8, 12), 12_000)
    readers = [drawn.name for drawn in run.draws if drawn.what == "round"]
    assert readers == ["start", "main.clamp", "main.raise", "main.lower", "main.open"]
    shifts = [(drawn.name, drawn.n) for drawn in run.draws if drawn.what == "valve"]
    assert shifts == [("Y1 on", 0), ("Y2 on", 0), ("Y2 off", 0), ("Y3 on", 0), ("Y1 off", 0), ("Y3 off", 0)]
    assert {drawn.span for drawn in run.draws if drawn.what == "see"} == {Span(0, 6000, 12_000)}


# --- reads, floors, writes ---


def test_step_without_exit_takes_one_round() -> None:
    run = play(machine(scan(8, 12), step("one"), step("two")), greatest, 1, LONG)
    assert run.cycle_starts["main"] == (0, 24_000)


def test_task_floor_is_the_interval_and_write_is_the_run() -> None:
    controller = task(ms(20), ms(3))
    run = play(machine(controller, step("one", "on K1"), step("two"), outputs=("K1",)), typical, 1, LONG)
    assert entered(run, "two") == [20_000]
    assert times_of(run, "output K1 on") == [3000]
    assert times_of(run, "output K1 off") == [23_000]


def test_dwell_ends_at_the_first_read_after_it() -> None:
    run = play(machine(scan(8, 12), step("wait", dwell=100)), greatest, 1, LONG)
    assert left(run, "wait")[0] == 112_000
    run = play(machine(scan(8, 12), step("wait", dwell=2)), least, 1, LONG)
    assert left(run, "wait")[0] == 8000


def test_ideal_controller_takes_no_time() -> None:
    run = play(machine(IDEAL, step("wait", "on K1", dwell=5), outputs=("K1",)), greatest, 2, LONG)
    assert run.cycle_starts["main"] == (0, 5000, 10_000)
    assert times_of(run, "output K1 on") == [0]


def test_ideal_controller_without_any_time_is_an_endless_loop() -> None:
    with pytest.raises(EndlessLoop):
        play(machine(IDEAL, step("one"), step("two")), typical, 10_000, LONG)


def test_commands_of_one_read_go_out_in_one_write() -> None:
    controller = Controller(ControllerKind.SCAN, ms(8, 12), NO_TIME, NO_TIME, NO_TIME, ms(0, 1), ms(0, 2))
    case = machine(controller, step("one", "on K1"), step("two", "on K2"), outputs=("K1", "K2"))
    delays = {("round", "start", 0): 9000, ("round", "main.one", 0): 11_000, ("output", "K1", 1): 2000}
    run = play(case, given(delays, least), 2, LONG)
    assert times_of(run, "output K1 on")[:1] == [9000]
    assert times_of(run, "output K2 on")[:1] == [20_000]
    assert times_of(run, "output K1 off")[:1] == [22_000]


def test_threads_that_leave_on_one_event_share_the_read() -> None:
    case = machine(
        scan(8, 12),
        step("out", "set Y1", until="B2"),
        together(4, (step("d", "reset Y1", until="B1"),), (step("c", until="B1"), step("e"))),
        valves=(spring("V1", "Y1", ms(20), ms(20)),),
        cylinders=(cylinder("clamp", "V1", ms(400), ms(300), ("B1", 0, 0), ("B2", 100, 100)),),
    )
    run = play(case, typical, 1, LONG)
    assert left(run, "c") == left(run, "d")
    readers = [drawn.name for drawn in run.draws if drawn.what == "round"]
    assert readers == ["start", "main.out", "main.c", "main.e", "join 4:5"]


def test_threads_that_leave_on_different_events_read_each_for_themselves() -> None:
    case = machine(scan(8, 12), together(4, (step("a", dwell=50),), (step("b", dwell=50),)))
    run = play(case, typical, 1, LONG)
    assert left(run, "a")[0] == left(run, "b")[0] == 56_000
    assert [drawn.name for drawn in run.draws if drawn.what == "round"] == ["start", "main.a", "main.b", "join 4:5"]


def test_join_read_comes_at_the_last_floor_of_the_branches() -> None:
    case = machine(scan(8, 12), together(4, (step("a", dwell=50),), (step("b", dwell=55),)), step("after"))
    delays = {("round", "main.a", 0): 12_000, ("round", "main.b", 0): 8000, ("dwell", "main.a", 0): 4000}
    run = play(case, given(delays, least), 1, LONG)
    assert left(run, "a") == [54_000]
    assert left(run, "b") == [55_000]
    assert entered(run, "after") == [66_000]


def test_nested_branches_join_inside_out() -> None:
    inner = together(7, (step("a", dwell=10),), (step("b", dwell=20),))
    case = machine(scan(10, 10), together(4, (inner,), (step("c", dwell=5),)), step("after"))
    run = play(case, least, 1, LONG)
    # b leaves at 20, the inner join reads at 30, the outer one at 40.
    assert entered(run, "after") == [40_000]
    assert [drawn.name for drawn in run.draws if drawn.what == "round"][-3:] == ["join 7:5", "join 4:5", "main.after"]


def test_repeat_goes_round_and_visits_count_cycles() -> None:
    run = play(machine(scan(10, 10), repeat(3, step("tap")), step("rest")), typical, 2, LONG)
    assert entered(run, "tap") == [0, 10_000, 20_000, 40_000, 50_000, 60_000, 80_000]
    assert [visit.cycle for visit in run.visits if visit.step == "main.tap"] == [0, 0, 0, 1, 1, 1, 2]
    assert run.visits[-1].left is None


def test_sequence_that_runs_once_ends() -> None:
    run = play(machine(scan(10, 10), step("one"), once=True), typical, 2, LONG)
    assert run.cycle_starts["main"] == (0,)
    assert [(visit.step, visit.left) for visit in run.visits] == [("main.one", 10_000)]
    assert run.incidents == ()


def test_run_stops_at_its_limit() -> None:
    run = play(machine(scan(10, 10), step("one"), step("two")), typical, 100, 35_000)
    assert [visit.entered for visit in run.visits] == [0, 10_000, 20_000, 30_000]


# --- commands and what is known of them ---


def test_command_is_known_from_the_floor_of_its_read() -> None:
    case = machine(
        scan(10, 10),
        together(4, (step("on", "on K1", dwell=50),), (step("wait", until="K1"), step("gone", until="not K1"))),
        outputs=("K1",),
    )
    run = play(case, least, 1, LONG)
    assert left(run, "wait") == [10_000]
    assert left(run, "gone") == [60_000]  # on leaves at 50, known at the floor of that read


def test_step_is_known_from_the_floor_of_its_read() -> None:
    branch = (step("first", dwell=30), step("second", dwell=100))
    case = machine(scan(10, 10), together(4, branch, (step("wait", until="main.second and not main.first"),)))
    assert left(play(case, least, 1, LONG), "wait") == [40_000]


def test_stored_command_outlives_its_step_and_reset_wins_over_set() -> None:
    case = machine(
        scan(10, 10),
        step("one", "set K1"),
        step("two"),
        together(4, (step("three", "reset K1"),), (step("four", "set K1", "pulse K1 50"),)),
        outputs=("K1",),
    )
    run = play(case, least, 1, LONG)
    assert times_of(run, "output K1 on") == [10_000]
    assert times_of(run, "output K1 off") == [30_000]
    assert not [drawn for drawn in run.draws if drawn.what == "pulse"]


def test_pulse_ends_at_the_first_read_after_its_time() -> None:
    case = machine(scan(8, 12), step("one", "pulse K1 60"), step("two", dwell=500), outputs=("K1",))
    run = play(case, given({("pulse", "K1", 0): 5000, ("round", "pulse K1", 0): 9000}, least), 1, LONG)
    assert times_of(run, "output K1 on") == [8000]
    assert times_of(run, "output K1 off") == [74_000]  # read at 60 + 5, written 9 later
    run = play(machine(scan(8, 12), step("one", "pulse K1 2", dwell=50), outputs=("K1",)), least, 1, LONG)
    assert times_of(run, "output K1 off") == [16_000]  # no read before the floor of the starting one


def test_change_that_is_overtaken_by_the_next_one_never_comes() -> None:
    slow = Controller(output_on=ms(50), output_off=ms(1))
    case = machine(slow, step("one", "on K1", dwell=10), step("two", dwell=200), outputs=("K1",), once=True)
    run = play(case, least, 1, LONG)
    assert times_of(run, "output K1 on") == []


def test_change_at_the_same_instant_as_the_one_before_comes_behind_it() -> None:
    case = machine(IDEAL, step("one", "on K1"), step("two", "on K2", dwell=200), outputs=("K1", "K2"), once=True)
    run = play(case, least, 1, LONG)
    assert [line.text for line in run.log if line.text.startswith("output K1")] == ["output K1 on", "output K1 off"]
    assert times_of(run, "output K1 on") == times_of(run, "output K1 off") == [0]


def test_reset_ends_a_pulse_without_a_read_of_its_own() -> None:
    case = machine(scan(10, 10), step("one", "pulse K1 60"), step("two", "reset K1", dwell=200), outputs=("K1",))
    run = play(case, least, 1, LONG)
    assert times_of(run, "output K1 off") == [20_000]
    assert "pulse K1" not in [drawn.name for drawn in run.draws if drawn.what == "round"]


# --- steady ---


def _steady_case(time: float, **more: float) -> Machine:
    return machine(
        scan(10, 10),
        together(
            4,
            (step("blink", "on K1", dwell=30), step("dark", dwell=20), step("light", "set K1", dwell=300)),
            (step("wait", until="K1", steady=time, **more),),
        ),
        step("out", "reset K1"),
        outputs=("K1",),
    )


def test_steady_counts_from_the_read_that_sees_the_condition() -> None:
    run = play(_steady_case(15), given({("steady", "main.wait", 0): 4000}, least), 1, LONG)
    assert left(run, "wait") == [29_000]  # known at 10


def test_steady_is_called_off_and_counts_anew() -> None:
    run = play(_steady_case(80), given({("steady", "main.wait", 1): 3000}, least), 1, LONG)
    # Known on at 10, off at 40 (blink left at 30), on at 60 (light entered at 50).
    assert left(run, "wait") == [143_000]


def test_steady_time_that_was_over_counts_anew_after_a_break() -> None:
    # On from 10 to 40 and from 60: 10 ms are over at 20, but the dwell holds the step until 62.
    assert left(play(_steady_case(10, dwell=62), least, 1, LONG), "wait") == [70_000]


def test_steady_counts_from_before_the_step() -> None:
    case = machine(scan(10, 10), step("one", "set K1", dwell=100), step("wait", until="K1", steady=95), outputs=("K1",))
    run = play(case, least, 1, LONG)
    assert entered(run, "wait") == [100_000]
    assert left(run, "wait") == [110_000]  # 10 + 95 is over at 105, the floor at 110


# --- outside signals ---


def test_outside_signal_comes_after_the_step_begins_to_wait() -> None:
    controller = scan(8, 12, filtering=ms(2, 4))
    case = machine(controller, step("ready", until="start"), step("go"), signals=(signal("start", ms(50, 90)),))
    delays = {("outside", "start", 0): 70_000, ("filter", "start", 0): 3000, ("see", "start", 0): 11_000}
    assert left(play(case, given(delays, least), 1, LONG), "ready")[0] == 84_000


def test_outside_signal_without_after_comes_at_any_time() -> None:
    case = machine(scan(8, 12), step("ready", until="not start"), signals=(signal("start", None),))
    assert left(play(case, greatest, 1, LONG), "ready")[0] == 60_012_000
    assert left(play(case, least, 1, LONG), "ready")[0] == 8000


def test_each_visit_awaits_its_own_outside_signal() -> None:
    branches = (step("a", until="start"),), (step("b", dwell=40), step("c", until="start"))
    case = machine(scan(10, 10), together(4, *branches), signals=(signal("start", ms(0, 90)),))
    run = play(case, given({("outside", "start", 0): 70_000, ("outside", "start", 1): 20_000}, least), 1, LONG)
    assert left(run, "a") == [70_000]
    assert left(run, "c") == [60_000]
