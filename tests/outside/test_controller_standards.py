"""What IEC 61131-3 (function charts, timers) and IEC 60848 (rules of evolution) say, as far as the language has it.

Clauses of the third edition of IEC 61131-3 (2013) are given from memory, and so are those of IEC 60848; the numbers
follow from the clauses by hand. The controller is ideal where nothing else is said, so that all times are exact.
"""

from __future__ import annotations

import pytest

from seqcheck.language.source import Source
from seqcheck.machine.findings import Duration, Report
from seqcheck.pipeline import examine_source

LAMPS = "output K  output L\n"


def examined(sequence: str, controller: str = "", more: str = "") -> Report:
    report = examine_source(Source("standard.steps", f"{controller}\n{LAMPS}{more}\n{sequence}"))
    assert not report.problems, report.problems
    return report


def steps_ms(report: Report) -> dict[str, float]:
    """How long each step takes, where that is one time."""
    assert all(one.least == one.greatest for _, one in report.steps), report.steps
    return {name.removeprefix("main."): one.least / 1000 for name, one in report.steps}


def on_for_ms(branch: str) -> float:
    """How long output K is commanded in one cycle of a branch, told by another branch that watches it."""
    watcher = "step dark { until K }  step lit { until not K }  step rest { dwell 1 s }"
    return steps_ms(examined(f"sequence main {{ together {{ {branch} }} and {{ {watcher} }} }}"))["lit"]


# Timers, IEC 61131-3 6.6.3.5.5


def test_a_pulse_lasts_its_time_whatever_its_input_does() -> None:
    """TP: Q is 1 for exactly PT; PT 40 with IN 10 gives 40. Here the step that begins the pulse is IN."""
    assert on_for_ms("step a { dwell 5 ms }  step b { pulse K 40 ms  dwell 10 ms }  step c { dwell 100 ms }") == 40


@pytest.mark.parametrize("length", [39, 41])
def test_an_on_delay_needs_its_whole_time(length: int) -> None:
    """TON: Q is 1 once ET is PT and IN still 1; PT 40 with IN 39 gives nothing. ``steady`` is an on-delay."""
    switching = f"step a {{ dwell 5 ms }}  step b {{ on K  dwell {length} ms }}  step c {{ dwell 300 ms }}"
    report = examined(
        f"sequence main once {{ together {{ {switching} }} and {{ step d {{ until K steady 40 ms }} }} }}"
    )
    kinds = {one.kind for one in report.findings if one.certain} - {"unused"}
    assert kinds == ({"missed-signal", "dead-end"} if length == 39 else set())
    assert steps_ms(report).get("d") == (None if length == 39 else 5 + 40)


def test_an_off_delay_ends_its_time_after_its_input() -> None:
    """TOF: Q is 0 once ET is PT after IN has gone; PT 40 with IN 10 gives 50."""
    switching = "step a { on K  dwell 10 ms }  step b { dwell 200 ms }"
    watching = "step c { until not K steady 40 ms  dwell 1 ms }"
    report = examined(f"sequence main once {{ together {{ {switching} }} and {{ step x {{ until K }} {watching} }} }}")
    assert steps_ms(report)["c"] == 50


def test_an_on_delay_evaluated_once_a_scan() -> None:
    """TON with PT 25 evaluated every 10 ms: from the input edge to the scan with Q = 1 in 30..40 ms, simulated with
    simpy at 1000 phases. Here each wait for a read is drawn anew, which contains that."""
    report = examined(
        "sequence main { step a { set Y until B }  step b { dwell 25 ms }  step c { reset Y  dwell 2 s } }",
        "controller { scan 10 ms }",
        "valve V 5/2 spring { coil Y on 1 ms off 1 ms }\n"
        "cylinder C on V { extend 100 ms retract 100 ms sensor B at extended }",
    )
    wait, timer = dict(report.steps)["main.a"], dict(report.steps)["main.b"]
    edge = 10_000 + 1_000 + 100_000
    assert timer.greatest is not None and wait.greatest is not None
    assert wait.least + timer.least - edge <= 30_000
    assert wait.greatest + timer.greatest - edge >= 40_000
    assert timer == Duration(25_000, 30_000, 35_000)


# Steps and their actions, IEC 61131-3 6.7; rules of evolution, IEC 60848 4.5


def test_the_initial_step_is_active_at_the_start_and_again_after_the_last() -> None:
    """IEC 60848 rule 1; the course closes to a cycle of 30 ms."""
    report = examined("sequence main { step a { dwell 10 ms }  step b { dwell 20 ms } }")
    assert steps_ms(report) == {"a": 10, "b": 20}
    assert dict(report.cycles)["main"] == Duration(30_000, 30_000, 30_000)


def test_an_action_without_qualifier_lasts_as_long_as_its_step() -> None:
    """Qualifier N, table 57: 100 ms for a step of 100 ms."""
    assert on_for_ms("step a { dwell 5 ms }  step b { on K  dwell 100 ms }  step c { dwell 100 ms }") == 100


def test_a_continuous_action_of_two_steps_in_a_row_is_not_interrupted() -> None:
    """IEC 60848: an assignment holds while any of its steps is active."""
    assert (
        on_for_ms(
            "step a { dwell 5 ms }  step b { on K  dwell 30 ms }  step c { on K  dwell 20 ms }  step d {dwell 90 ms}"
        )
        == 50
    )


def test_what_is_set_stays_until_it_is_reset() -> None:
    """Qualifiers S and R: from the step that sets to the one that resets, over those in between."""
    steps = (
        "step a { dwell 5 ms }  step b { set K  dwell 10 ms }  step c { dwell 30 ms }  step d { reset K  dwell 90 ms }"
    )
    assert on_for_ms(steps) == 40


def test_reset_wins_over_set() -> None:
    """Qualifier R is overriding: set and reset by two steps that become active at once, K stays off."""
    steps = "together { step a { set K  dwell 10 ms } } and { step b { reset K  dwell 10 ms } }"
    report = examined(f"sequence main once {{ {steps}  step c {{ until not K  dwell 1 ms }} }}")
    assert steps_ms(report)["c"] == 1


def test_a_transition_waits_for_all_the_steps_before_it() -> None:
    """IEC 60848 rule 2: the convergence of 10 and 30 ms is passed after 30 ms; rule 3: both branches begin at once."""
    branches = "together { step a { dwell 10 ms } } and { step b { dwell 30 ms } }"
    report = examined(f"sequence main {{ {branches}  step c {{ dwell 1 ms }} }}")
    assert steps_ms(report) == {"a": 10, "b": 30, "c": 1}
    assert dict(report.cycles)["main"].greatest == 31_000


def test_a_step_is_a_condition_while_it_is_active() -> None:
    """The step flag X: true from activation to deactivation, 25 ms."""
    branches = "together { step a { dwell 7 ms }  step b { dwell 25 ms }  step z { dwell 50 ms } } and {"
    report = examined(f"sequence main {{ {branches} step c {{ until main.b }}  step d {{ until not main.b }} }} }}")
    assert steps_ms(report)["d"] == 25


def test_one_step_a_scan_in_a_chain() -> None:
    """IEC 61131-3: after a transition the next one is tested only once its step has taken effect, so a chain takes a
    scan for each step; IEC 60848 alone would run through it in no time."""
    report = examined("sequence main { step a { }  step b { }  step c { } }", "controller { scan 8..12 ms }")
    assert dict(report.steps) == {f"main.{name}": Duration(8_000, 10_000, 12_000) for name in "abc"}
    assert dict(report.cycles)["main"] == Duration(24_000, 30_000, 36_000)


def test_divergence_has_its_priority_from_left_to_right() -> None:
    """IEC 61131-3: of two transitions whose conditions both hold the left one is cleared."""
    choice = "choose { when K { step b { dwell 7 ms } }  when K and not L { step c { dwell 9 ms } } }"
    report = examined(f"sequence main {{ step a {{ set K  dwell 1 ms }}  {choice} }}")
    assert "main.b" in dict(report.steps) and "main.c" not in dict(report.steps)
