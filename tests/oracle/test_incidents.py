"""Every kind of incident shown once by the player on a case worked by hand, and the mended case without it."""

from __future__ import annotations

from seqcheck.machine.devices import Controller, ControllerKind
from seqcheck.machine.model import Machine
from seqcheck.machine.steps import Item, Step
from seqcheck.machine.time import NO_TIME, Span
from tests.oracle.build import (
    IDEAL,
    bistable,
    centred,
    cylinder,
    machine,
    ms,
    scan,
    signal,
    spring,
    step,
    together,
)
from tests.oracle.draws import Draw, given, greatest, least, typical
from tests.oracle.look import LONG
from tests.oracle.player import play
from tests.oracle.worked import worked_case

Told = tuple[int, str, str, str | None]


def told(case: Machine, draw: Draw = typical, cycles: int = 1) -> list[Told]:
    run = play(case, draw, cycles, LONG)
    return [(each.time, each.kind, each.subject, each.step) for each in run.incidents]


def clamp_case(*steps: Item, controller: Controller = IDEAL, once: bool = True) -> Machine:
    """A cylinder on a spring valve: 20 ms to shift, 30 ms back, 400 ms out, 300 ms in."""
    return machine(
        controller,
        *steps,
        valves=(spring("V1", "Y1", ms(20), ms(30)),),
        cylinders=(cylinder("clamp", "V1", ms(400), ms(300), ("B1", 0, 0), ("B5", 45, 50), ("B2", 100, 100)),),
        once=once,
    )


def lift_case(*steps: Step, gap: int | None = None, controller: Controller = IDEAL) -> Machine:
    """A cylinder on a valve with a closed centre: 20 ms to shift, 30 ms to the centre, 400 ms out, 300 ms in."""
    return machine(
        controller,
        *steps,
        valves=(centred("V2", "Y2", "Y3", ms(20), ms(30), gap),),
        cylinders=(cylinder("lift", "V2", ms(400), ms(300), ("B3", 0, 0), ("B6", 45, 50), ("B4", 100, 100)),),
        once=True,
    )


def pusher_case(*steps: Step, gap: int | None = None, decay: Span = NO_TIME, controller: Controller = IDEAL) -> Machine:
    """A cylinder on a bistable valve: 20 ms to shift, 400 ms out, 300 ms in, its end sensors 0..4 and 96..100 %."""
    return machine(
        controller,
        *steps,
        valves=(bistable("V3", "Y4", "Y5", ms(20), gap, decay),),
        cylinders=(cylinder("pusher", "V3", ms(400), ms(300), ("B7", 0, 4), ("B8", 96, 100)),),
        once=True,
    )


# --- coils ---


def test_opposed_coils() -> None:
    faulty = pusher_case(step("out", "set Y4", until="B8"), step("in", "on Y5", dwell=50), step("hold", dwell=400))
    assert told(faulty)[0] == (404_000, "opposed-coils", "V3", "main.in")
    mended = pusher_case(
        step("out", "set Y4", until="B8"), step("in", "reset Y4", "on Y5", until="B7"), step("hold", dwell=400)
    )
    assert told(mended) == []


def test_coil_handover_below_the_gap() -> None:
    steps = step("out", "on Y2", until="B4"), step("rest", dwell=10), step("in", "on Y3", until="B3")
    assert told(lift_case(*steps, gap=10_001)) == [(430_000, "coil-handover", "V2", "main.in")]
    assert told(lift_case(*steps, gap=10_000)) == []


def test_coil_handover_while_the_opposed_coil_decays() -> None:
    steps = step("out", "on Y4", until="B8"), step("rest", dwell=10), step("in", "on Y5", until="B7")
    spent = given({("decay", "Y4", 0): 6000}, least)
    assert told(pusher_case(*steps, gap=5000, decay=ms(0, 6)), spent) == [(414_000, "coil-handover", "V3", "main.in")]
    assert told(pusher_case(*steps, gap=4000, decay=ms(0, 6)), spent) == []


def test_coil_handover_while_the_opposed_coil_is_energized() -> None:
    case = worked_case(gap=0)
    late = {("output", "Y2", 1): 1000, ("output", "Y3", 0): 500}
    assert [incident[1:] for incident in told(case, given(late, typical))] == [("coil-handover", "V2", "main.lower")]
    assert told(case) == []  # at the same instant: a tie


def test_short_pulse() -> None:
    steps = step("out", "on Y1", dwell=15), step("rest", dwell=100)
    assert (15_000, "short-pulse", "V1", "main.out") in told(clamp_case(*steps))
    pulse = pusher_case(step("out", "pulse Y4 20", until="B8"), step("rest", dwell=100))
    assert told(pulse) == []  # over at the very instant at which the valve has got there
    pulse = pusher_case(step("out", "pulse Y4 19.999", until="B8"), step("rest", dwell=100))
    assert told(pulse)[0] == (19_999, "short-pulse", "V3", "main.out")


def test_return_to_centre_taken_over_by_the_other_coil_is_no_short_pulse() -> None:
    taken = lift_case(step("out", "on Y2", until="B4"), step("rest", dwell=10), step("in", "on Y3", until="B3"))
    assert told(taken) == []
    same = lift_case(step("out", "on Y2", until="B4"), step("rest", dwell=10), step("in", "on Y2", dwell=50))
    assert told(same)[0] == (430_000, "short-pulse", "V2", "main.in")


# --- strokes ---


def test_cut_stroke_by_reversal() -> None:
    steps = step("out", "on Y1", dwell=300), step("rest", dwell=400)
    assert (330_000, "cut-stroke", "clamp", "main.out") in told(clamp_case(*steps))


def test_cut_stroke_by_stop() -> None:
    steps = step("out", "on Y2", dwell=300), step("rest", dwell=400)
    assert (330_000, "cut-stroke", "lift", "main.out") in told(lift_case(*steps))


def test_stop_or_reversal_on_an_own_sensor_cuts_nothing() -> None:
    assert told(lift_case(step("out", "on Y2", until="B6"), step("rest", dwell=400))) == []
    assert told(clamp_case(step("out", "on Y1", until="B5"), step("rest", dwell=400))) == []
    # Some time after the sensor, in the same stroke
    later = step("out", "on Y2", until="B6"), step("more", "on Y2", dwell=50), step("rest", dwell=400)
    assert told(lift_case(*later)) == []
    # An earlier stroke does not count.
    earlier = step("out", "set Y1", until="B2"), step("in", "reset Y1", dwell=200), step("again", "set Y1", dwell=500)
    assert "cut-stroke" in [kind for _, kind, _, _ in told(clamp_case(*earlier))]


def test_stroke_that_ends_as_the_valve_turns_is_not_cut() -> None:
    steps = step("out", "pulse Y1 390", until="B2"), step("rest", dwell=400)
    assert told(clamp_case(*steps)) == []
    steps = step("out", "pulse Y1 389.999", until="B2", within=1000), step("rest", dwell=400)
    assert told(clamp_case(*steps))[0] == (419_999, "cut-stroke", "clamp", "main.out")


def test_early_dwell() -> None:
    assert told(clamp_case(step("out", "set Y1", dwell=419), step("rest", dwell=100))) == [
        (419_000, "early-dwell", "main.out", "main.out")
    ]
    # The piston comes at the very instant at which the step is left.
    assert told(clamp_case(step("out", "set Y1", dwell=420), step("rest", dwell=100))) == []
    # Another cylinder that stands still is none of its business.
    two = machine(
        IDEAL,
        step("out", "set Y1", dwell=420),
        valves=(spring("V1", "Y1", ms(20), ms(30)), spring("V4", "Y9", ms(20), ms(30))),
        cylinders=(
            cylinder("clamp", "V1", ms(400), ms(300), ("B2", 100, 100)),
            cylinder("gate", "V4", ms(400), ms(300), ("B9", 100, 100)),
        ),
        once=True,
    )
    assert told(two) == []
    # Not its own command: the coil is commanded from before.
    assert told(clamp_case(step("out", "set Y1", dwell=420), step("again", "set Y1", dwell=1))) == []


# --- signals ---


def test_stale_signal() -> None:
    stale = clamp_case(
        step("out", "set Y1", until="B2"), step("in", "reset Y1", dwell=10), step("out_again", "set Y1", until="B2")
    )
    assert (430_000, "stale-signal", "B2", "main.out_again") in told(stale)
    fresh = clamp_case(
        step("out", "set Y1", until="B2"), step("in", "reset Y1", until="B1"), step("out_again", "set Y1", until="B2")
    )
    assert told(fresh) == []


def test_command_that_moves_nothing_makes_no_stale_signal() -> None:
    assert told(lift_case(step("home", "on Y3", until="B3", dwell=50), step("rest", dwell=100))) == []
    assert told(pusher_case(step("home", "pulse Y5 50", until="B7"), step("rest", dwell=100))) == []


def _passing_case(
    controller: Controller, steady: float | None = None, dwell: float | None = None, until: str = "B5"
) -> Machine:
    """The piston passes B5 (45..50 %) from 200 to 220 ms after the coil."""
    waits = step("wait", until=until, steady=steady, dwell=dwell), step("rest", dwell=1000)
    return machine(
        controller,
        together(4, (step("out", "set Y1", until="B2"),), waits),
        valves=(spring("V1", "Y1", ms(20), ms(30)),),
        cylinders=(cylinder("clamp", "V1", ms(400), ms(300), ("B5", 45, 50), ("B2", 100, 100)),),
        once=True,
    )


def test_missed_signal_inside_the_filter() -> None:
    slow = Controller(input_on=ms(20, 21), input_off=ms(1))
    assert told(_passing_case(slow), least) == []
    assert told(_passing_case(slow), greatest)[0] == (220_000, "missed-signal", "B5", "main.wait")


def test_missed_signal_between_two_reads() -> None:
    controller = Controller(ControllerKind.SCAN, ms(25))
    late = given({("see", "B5", 0): 20_001}, least)
    assert told(_passing_case(controller), late)[0] == (245_000, "missed-signal", "B5", "main.wait")
    tie = given({("see", "B5", 0): 20_000}, least)
    assert told(_passing_case(controller), tie) == []
    filtered = Controller(ControllerKind.SCAN, ms(25), input_off=ms(3))
    tie = given({("see", "B5", 0): 23_000}, least)
    assert told(_passing_case(filtered), tie) == []  # the input goes at the very instant of the read


def test_missed_signal_that_goes_before_the_step_is_left() -> None:
    assert told(_passing_case(IDEAL, dwell=221))[0] == (220_000, "missed-signal", "B5", "main.wait")
    assert told(_passing_case(IDEAL, dwell=220)) == []  # seen to go at the very instant of leaving
    assert told(_passing_case(Controller(input_off=ms(1)), dwell=221)) == []


def test_bounce_before_the_exit_holds_is_no_missed_signal() -> None:
    """What steady is for; nor need several parts come together at the first try. Nothing else comes: a dead end."""
    assert told(_passing_case(IDEAL, steady=19)) == []
    assert [kind for _, kind, _, _ in told(_passing_case(IDEAL, steady=21))] == ["dead-end"]
    assert [kind for _, kind, _, _ in told(_passing_case(IDEAL, dwell=221, until="B5 and not B2"))] == ["dead-end"]


def test_signal_from_before_the_step_is_not_missed() -> None:
    back = step("in", "reset Y1", until="B1"), step("out_again", "set Y1", until="B2")
    seen_before = clamp_case(
        step("out", "set Y1", until="B2"), together(4, (step("wait", until="B2", dwell=600),), back)
    )
    assert told(seen_before) == []
    # B5 comes at 200 and goes at 220, inside the filter; the step begins to wait between the two.
    waits = step("rest", dwell=210), step("wait", until="B5")
    came_before = clamp_case(
        together(4, (step("out", "set Y1", until="B2"),), waits), controller=Controller(input_on=ms(25))
    )
    run = play(came_before, typical, 1, LONG)
    assert "B5 on vanishes unseen" in [line.text for line in run.log if line.time == 220_000]
    assert [incident.kind for incident in run.incidents] == ["dead-end"]


def test_missed_signal_of_a_negated_term() -> None:
    """The piston leaves its end at 450 and is back at 471 at the earliest."""

    def case(filtering: Span) -> Machine:
        back = step("in", "reset Y1", dwell=31), step("out_again", "set Y1", dwell=500)
        return clamp_case(
            step("out", "set Y1", until="B2"),
            together(4, (step("wait", until="not B2"),), back),
            controller=Controller(input_off=filtering),
        )

    missed = (471_000, "missed-signal", "B2", "main.wait")
    assert missed in told(case(ms(25)), least)
    assert "missed-signal" not in [kind for _, kind, _, _ in told(case(ms(21)), least)]


# --- watchdogs and dead ends ---


def test_tight_watchdog() -> None:
    def steps(within: float) -> tuple[Step, Step]:
        return step("out", "set Y1", until="B2", within=within), step("rest", dwell=100)

    controller = scan(8, 12)
    # 12 + 20 + 400: the input changes at 432, it is seen up to 12 later.
    assert told(clamp_case(*steps(432), controller=controller), greatest) == []
    assert told(clamp_case(*steps(431), controller=controller), greatest) == [
        (431_000, "tight-watchdog", "main.out", "main.out")
    ]


def test_watchdog_asks_for_the_dwell_and_the_steady_time() -> None:
    def dwelling(within: float) -> Machine:
        return clamp_case(step("wait", until="B1", dwell=100, within=within), controller=scan(8, 12))

    assert told(dwelling(100), greatest) == []
    assert told(dwelling(99.999), greatest) == [(99_999, "tight-watchdog", "main.wait", "main.wait")]

    def steady(within: float) -> Machine:
        return clamp_case(step("out", "set Y1", until="B2", steady=50, within=within), controller=scan(10, 10))

    # 10 + 20 + 400, seen 10 later, steady for 50
    assert told(steady(490), greatest) == []
    assert told(steady(489.999), greatest) == [(489_999, "tight-watchdog", "main.out", "main.out")]


def test_watchdog_is_silent_where_an_outside_signal_may_come_at_any_time() -> None:
    def ready(after: Span | None) -> Machine:
        return machine(IDEAL, step("ready", until="start", within=50), signals=(signal("start", after),), once=True)

    assert told(ready(None), greatest) == []
    assert told(ready(ms(20, 51)), greatest) == [(50_000, "tight-watchdog", "main.ready", "main.ready")]
    assert told(ready(ms(20, 50)), greatest) == []


def test_dead_end() -> None:
    case = clamp_case(step("wait", until="B2", within=500), once=False)
    assert told(case) == [
        (0, "dead-end", "main.wait", "main.wait"),
        (500_000, "tight-watchdog", "main.wait", "main.wait"),
    ]
    ended = clamp_case(step("out", "set Y1", until="B2"), once=True)
    assert told(ended) == []


def test_outside_signal_awaited_is_no_dead_end() -> None:
    case = machine(IDEAL, step("ready", until="start"), signals=(signal("start", None),), once=True)
    assert told(case) == []


def test_play_stops_at_the_first_incident() -> None:
    case = clamp_case(step("out", "on Y1", dwell=300), step("rest", dwell=400))
    assert len(told(case)) == 2
    run = play(case, typical, 1, LONG, stop_at_first=True)
    assert [(each.time, each.kind) for each in run.incidents] == [(300_000, "early-dwell")]
    assert run.log[-1].time == 300_000
