"""Qualifiers and timers of IEC 61131-3 and rules of evolution of IEC 60848 that need flags, signals, choices or rules.

Clauses of the third edition of IEC 61131-3 (2013) and of IEC 60848 are given from memory; the numbers follow from them
by hand. The controller is ideal where nothing else is said, so that all times are exact.
"""

from __future__ import annotations

import pytest

from seqcheck.language.source import Source
from seqcheck.machine.findings import Report
from seqcheck.pipeline import examine_source

#: Longer than anything is on here, so that what is left of it tells how long that was.
LONG = 1_000_000


def examined(sequences: str, more: str = "", controller: str = "") -> Report:
    report = examine_source(Source("standard.steps", f"{controller}\n{more}\n{sequences}"))
    assert not report.problems, report.problems
    return report


def on_for_ms(name: str, sequences: str, more: str = "") -> float:
    """How long ``name`` is on without a break, at most: what is left of a second in which it may be. 0: never on."""
    report = examined(f"{sequences}\nnever {name} for 1 s", f"output K\n{more}")
    assert not {one.kind for one in report.findings if one.happens} - {"unreachable", "dead-end"}, report.findings
    left = [one.margin_us for one in report.margins if one.kind == "broken-never"]
    assert all(one is not None for one in left)
    return max((LONG - one for one in left if one is not None), default=0) / 1000


# Qualifiers with a time, IEC 61131-3 table 57, on a step of 100 ms


@pytest.mark.parametrize(("limit", "on"), [(30, 30), (200, 100)])
def test_l_ends_with_its_time_or_its_step(limit: int, on: int) -> None:
    """L: active for the shorter of the step and T; L#30 gives 30, L#200 100. A pulse that the next step resets."""
    steps = f"step b {{ pulse K {limit} ms  dwell 100 ms }}  step c {{ reset K  dwell 300 ms }}"
    assert on_for_ms("K", f"sequence main {{ {steps} }}") == on


@pytest.mark.parametrize(("delay", "on"), [(30, 70), (200, 0)])
def test_d_begins_after_its_time_if_the_step_is_still_active(delay: int, on: int) -> None:
    """D: D#30 gives 70 (from 30 to 100), D#200 nothing. A signal that follows the step, with a delay."""
    timer = f"signal timer follows main.b on {delay} ms"
    main = "sequence main { step a { dwell 5 ms }  step b { dwell 100 ms }  step c { dwell 300 ms } }"
    action = "sequence action { step idle { until timer }  step active { on K  until not main.b } }"
    assert on_for_ms("K", main + action, timer) == on


@pytest.mark.parametrize("active", [10, 100])
def test_sd_is_delayed_and_stored_whether_the_step_lasts_or_not(active: int) -> None:
    """SD#30: on 30 ms after the step began, even if that took but 10, until it is reset 150 ms after it began: 120."""
    more = "flag wanted  signal timer follows wanted on 30 ms"
    main = f"step a {{ dwell 5 ms }}  step b {{ set wanted  dwell {active} ms }}  step c {{ dwell {150 - active} ms }}"
    rest = "step d { reset K  reset wanted  dwell 300 ms }"
    action = "sequence action { step idle { until timer }  step store { set K  until not timer } }"
    assert on_for_ms("K", f"sequence main {{ {main}  {rest} }} {action}", more) == 120


@pytest.mark.parametrize(("active", "on"), [(100, 120), (10, 0)])
def test_ds_is_stored_only_if_the_step_lasts(active: int, on: int) -> None:
    """DS#30: set 30 ms after the step began if it is still active, until the reset at 150 ms: 120, or never."""
    timer = "signal timer follows main.b on 30 ms"
    last = f"step c {{ dwell {150 - active} ms }}  step d {{ reset K  dwell 300 ms }}"
    main = f"step a {{ dwell 5 ms }}  step b {{ dwell {active} ms }}  {last}"
    action = "sequence action { step idle { until timer }  step store { set K  until not timer } }"
    assert on_for_ms("K", f"sequence main {{ {main} }} {action}", timer) == on


def test_sl_has_its_time_even_if_the_step_ends() -> None:
    """SL#40 on a step of 10 ms gives 40."""
    assert on_for_ms("K", "sequence main { step b { pulse K 40 ms  dwell 10 ms }  step c { dwell 300 ms } }") == 40


def test_a_reset_ends_sl_before_its_time() -> None:
    """SL#40, reset by R after 25 ms: 25."""
    steps = "step b { pulse K 40 ms  dwell 25 ms }  step c { reset K  dwell 300 ms }"
    assert on_for_ms("K", f"sequence main {{ {steps} }}") == 25


# Timers, IEC 61131-3 6.6.3.5.5, as signals that follow their input


@pytest.mark.parametrize(("length", "on"), [(39, 0), (41, 1)])
def test_an_on_delay_follows_what_outlasts_it(length: int, on: int) -> None:
    """TON with PT 40: IN of 39 gives nothing; IN of 41 gives Q for 1 ms."""
    main = f"sequence main {{ step b {{ on K  dwell {length} ms }}  step c {{ dwell 300 ms }} }}"
    assert on_for_ms("timer", main, "signal timer follows K on 40 ms") == on


def test_an_off_delay_follows_at_once_and_ends_later() -> None:
    """TOF with PT 40: IN of 10 gives Q for 50."""
    main = "sequence main { step b { on K  dwell 10 ms }  step c { dwell 300 ms } }"
    assert on_for_ms("timer", main, "signal timer follows K off 40 ms") == 50


def test_an_off_delay_goes_on_where_its_input_comes_back_in_time() -> None:
    """TOF with PT 40: IN of 10, a break of 30, IN of 10: Q without a break for 10 + 30 + 10 + 40 = 90."""
    main = "step b { on K  dwell 10 ms }  step c { dwell 30 ms }  step d { on K  dwell 10 ms }  step e { dwell 300 ms }"
    assert on_for_ms("timer", f"sequence main {{ {main} }}", "signal timer follows K off 40 ms") == 90


# Rules of evolution, IEC 60848 4.5


@pytest.mark.parametrize(("awaited", "apart"), [("main.go", None), ("p.p1", -12_000)])
def test_transitions_that_can_clear_at_once_do(awaited: str, apart: int | None) -> None:
    """Rule 4: two charts that wait for one step go on in one instant; one that waits for the other a round later."""
    main = "sequence main { step rest { dwell 100 ms }  step go { dwell 50 ms } }"
    first = "sequence p { step p0 { until main.go }  step p1 { until main.rest } }"
    second = f"sequence q {{ step q0 {{ until {awaited} }}  step q1 {{ until main.rest }} }}"
    report = examined(f"{main} {first} {second} never p.p1 and not q.q1", controller="controller { scan 8..12 ms }")
    broken = [one.margin_us for one in report.findings if one.kind == "broken-never"]
    assert broken == ([] if apart is None else [apart])
    assert {"p", "q"} <= dict(report.cycles).keys()


def test_a_step_left_and_entered_at_once_stays_active() -> None:
    """Rule 5: its action is not interrupted; a rest between would be told."""
    chart = "sequence main { step a { on K  dwell 10 ms } }  never not K for 1 ms"
    assert not [one for one in examined(chart, "output K").findings if one.kind == "broken-never"]
    rest = "sequence main { step a { on K  dwell 10 ms }  step b { dwell 2 ms } }  never not K for 1 ms"
    broken = [one for one in examined(rest, "output K").findings if one.kind == "broken-never"]
    assert [one.margin_us for one in broken] == [-1000]


def test_a_selection_takes_one_branch_and_converges() -> None:
    """A divergence of exclusive transitions: 10, then 20 or 30, then 40 ms; both ways and no other come up."""
    branches = "choose { when part { step b { dwell 20 ms } } when not part { step c { dwell 30 ms } } }"
    report = examined(
        f"sequence main {{ step a {{ dwell 10 ms }} {branches} step d {{ dwell 40 ms }} }}", "signal part from outside"
    )
    assert [(one.duration.least, one.duration.greatest) for one in report.choices] == [
        (70_000, 70_000),
        (80_000, 80_000),
    ]


def test_a_step_may_be_skipped_and_a_sequence_repeated() -> None:
    """Skip of steps and backward sequence: 10 (and 20, unless it is skipped) and 5 ms, as often as asked for."""
    skip = "choose { when skip { } otherwise { step b { dwell 20 ms } } }"
    again = "choose { when again { jump back } otherwise { } }"
    first = "step a { dwell 10 ms }  step back { dwell 5 ms }"
    text = f"sequence main {{ {first} {skip} step c {{ dwell 1 ms }} {again} }}"
    cycle = dict(examined(text, "signal skip from outside  signal again from outside").cycles)["main"]
    assert (cycle.least, cycle.greatest) == (16_000, None)


def test_a_transition_of_a_selection_takes_no_scan_of_its_own() -> None:
    """IEC 61131-3: a step and the transition behind it take a scan together; two steps with a selection: 16..24."""
    choice = "choose { when part { step b { } } otherwise { step c { } } }"
    report = examined(
        f"sequence main {{ step a {{ }} {choice} }}", "signal part from outside", "controller { scan 8..12 ms }"
    )
    cycle = dict(report.cycles)["main"]
    assert (cycle.least, cycle.greatest) == (16_000, 24_000)
