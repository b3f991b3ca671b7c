"""What is said of the findings in the hand-worked cases: one of each wording, with the figures of the heads."""

from __future__ import annotations

from pathlib import Path

import pytest

from seqcheck.pipeline import examine

HERE = Path(__file__).parent

#: Case, kind, what is said, and what would mend it.
WORDS = (
    (
        "centre_again_too_soon",
        "short-pulse",
        "Y2 can be energized again 9.5 ms before V2 has reached centre",
        "leave Y2 released at least 9.5 ms longer",
    ),
    (
        "centre_again_too_soon",
        "unused",
        "Y3 is never used",
        None,
    ),
    (
        "choose_flag_of_the_step_before",
        "unreachable",
        "no run enters main.drop",
        None,
    ),
    (
        "choose_limit_cycle_broken",
        "over-limit",
        "a cycle of main can take 1 us longer than 423.999 ms",
        None,
    ),
    (
        "choose_sensor_race",
        "choice-race",
        "the choice behind main.settle can take `otherwise in line 13` instead, B2 changing 5 ms after the read that"
        " asks it",
        "let the step before wait until B2 is sure to be as it will stay",
    ),
    (
        "choose_two_sensors_race",
        "choice-race",
        "the choice behind main.start can take `when in line 16` instead, B4 coming 54.5 ms before B2",
        "let the step before wait until B4 is sure to be as it will stay",
    ),
    (
        "choose_two_sensors_touch_wrong_way",
        "choice-race",
        "the choice behind main.start can take `when in line 13` instead, B4 coming 1 us before B2",
        "let the step before wait until B4 is sure to be as it will stay",
    ),
    (
        "choose_way_between_undercut",
        "over-limit",
        "`limit from K1 to K2 145501 us..430 ms` can be undercut by 1 us",
        None,
    ),
    (
        "choose_within_expires",
        "tight-watchdog",
        "the watchdog of the choice with main.weigh can expire 1 us before it is taken",
        "within 204 ms is safe",
    ),
    (
        "conjunction_passing",
        "missed-signal",
        "B9 can come and go 6.5 ms too soon for main.both to act on it",
        "let B9 stay so at least 7 ms longer (a wider range, a slower move), or read faster",
    ),
    (
        "cut_in_every_run",
        "early-dwell",
        "main.press can be left 241 ms before ram is fully extended",
        "a dwell of at least 491 ms is safe",
    ),
    (
        "cut_in_every_run",
        "cut-stroke",
        "ram can be turned back 207.5 ms before it is fully extended",
        "wait for its end sensor first, or at least 207.5 ms longer",
    ),
    (
        "dead_end",
        "dead-end",
        "main.back is never left: it waits for B1, and nothing brings that any more",
        None,
    ),
    (
        "dwell_too_short",
        "early-dwell",
        "main.up can be left 53 ms before lift is fully extended",
        "a dwell of at least 743 ms is safe",
    ),
    (
        "dwell_too_short",
        "cut-stroke",
        "lift can be stopped 14.5 ms before it is fully extended",
        "wait for its end sensor first, or at least 14.5 ms longer",
    ),
    (
        "else_always",
        "tight-watchdog",
        "the watchdog of main.grip can expire 95 ms before the step is done",
        "within 495 ms is safe",
    ),
    (
        "else_always_leaves_steps_out",
        "tight-watchdog",
        "the watchdog of the choice with main.grip can expire 83 ms before it is taken",
        "within 483 ms is safe",
    ),
    (
        "else_always_leaves_steps_out",
        "unreachable",
        "no run enters main.ok, nor 1 more",
        None,
    ),
    (
        "else_expires",
        "tight-watchdog",
        "the watchdog of main.grip can expire 1 us before the step is done",
        "within 495 ms is safe",
    ),
    (
        "fill_and_drain",
        "broken-never",
        "`never fill.open and drain.open` can be broken (it runs through), for up to 1.2005 s",
        None,
    ),
    (
        "fill_then_drain",
        "broken-never",
        "`never fill.open and drain.open` can be broken, for up to 4.5 ms",
        None,
    ),
    (
        "follows_may_be_swallowed",
        "missed-signal",
        "held can come and go 28.5 ms too soon for main.ok to act on it",
        "let held stay so at least 29 ms longer",
    ),
    (
        "handover_bistable_pulses",
        "coil-handover",
        "Y4 can be energized 14 ms too soon after Y5, which the gap of 40 ms of V3 forbids",
        "let at least 14 ms more pass between the two coils",
    ),
    (
        "ideal_pulse",
        "short-pulse",
        "Y4 can be released 3 ms before V3 has reached a",
        "a pulse of at least 20 ms is safe",
    ),
    (
        "limit_way",
        "over-limit",
        "`limit from Y1 to B2 300 ms` can be exceeded by 194 ms",
        None,
    ),
    (
        "limit_way",
        "over-limit",
        "`limit from Y1 to B2 493999 us` can be exceeded by 1 us",
        None,
    ),
    (
        "limit_way",
        "over-limit",
        "`limit from Y1 to B2 400.001..500 ms` can be undercut by 1 us",
        None,
    ),
    (
        "motor_both_coils",
        "opposed-coils",
        "M1 and M2 can be commanded at once, for up to 112 ms",
        "end the command of M1 first",
    ),
    (
        "motor_reversed",
        "broken-never",
        "`never V7.open for 1716499 us` can be broken, for up to 1 us longer than the 1.716499 s tolerated",
        None,
    ),
    (
        "never_for",
        "broken-never",
        "`never clamp.between for 449999 us` can be broken, for up to 1 us longer than the 449.999 ms tolerated",
        None,
    ),
    (
        "never_or",
        "broken-never",
        "`never (K1 or K2) and K3` can be broken, for up to 25 ms",
        None,
    ),
    (
        "never_or_for",
        "broken-never",
        "`never K1 or K2 for 224999 us` can be broken, for up to 1 us longer than the 224.999 ms tolerated",
        None,
    ),
    (
        "never_or_for_a_break_or_none",
        "broken-never",
        "`never K1 or K2 for 200 ms` can be broken, for up to 15 ms longer than the 200 ms tolerated",
        None,
    ),
    (
        "never_signal_as_read",
        "broken-never",
        "`never part and K1` can be broken, for up to 10 ms",
        None,
    ),
    (
        "never_three",
        "broken-never",
        "`never K1 and K2 and K3` can be broken, for up to 25 ms",
        None,
    ),
    (
        "on_in_two_branches",
        "command-race",
        "main.two and main.one both work Y1, and which comes last is a matter of 7 ms",
        "let main.one wait for main.two",
    ),
    (
        "pulse_least_safe",
        "short-pulse",
        "Y5 can be released 1 us before V3 has reached b",
        "a pulse of at least 25 ms is safe",
    ),
    (
        "pulse_shorter_than_a_scan_lost",
        "dead-end",
        "main.out is never left: it waits for B6, and nothing brings that any more (main.back never entered)",
        None,
    ),
    (
        "pulse_too_short",
        "short-pulse",
        "Y5 can be released 4.5 ms before V3 has reached b",
        "a pulse of at least 25 ms is safe",
    ),
    (
        "second_cylinder_cut",
        "cut-stroke",
        "table can be turned back 59.5 ms before it is fully extended",
        "wait for its end sensor first, or at least 59.5 ms longer",
    ),
    (
        "sequences_not_tied",
        "not-settled",
        "main and side come to ever new states: only what was played is proved, 14 rounds of main at least",
        "let side wait once a round for a step of main to begin, say `until not main.a` and then `until main.a`",
    ),
    (
        "shared_valve_order_broken",
        "broken-never",
        "`never A.moving and B.moving` can be broken, for up to 1 us",
        None,
    ),
    (
        "short_spring_off",
        "short-pulse",
        "Y1 can be energized again 9.5 ms before V1 has reached b",
        "leave Y1 released at least 9.5 ms longer",
    ),
    (
        "stale_not_yet_gone",
        "stale-signal",
        "main.wait can find B1 still on from before, 19 ms too early",
        "let the step before last at least 19 ms longer, or wait for B1 to change first",
    ),
    (
        "stop_overshoots",
        "overshoot",
        "lift can run on 24 ms past the edge of B9 before it stands, and B9 is asked then",
        "stop the cylinder at least 24 ms sooner, or move that edge of B9 further on",
    ),
)


@pytest.mark.parametrize(("name", "kind", "message", "mend"), WORDS)
def test_a_finding_is_told_in_these_words(name: str, kind: str, message: str, mend: str | None) -> None:
    report = examine(str(HERE / f"{name}.steps"))
    assert (message, mend) in {(one.message, one.mend) for one in report.findings if one.kind == kind}
