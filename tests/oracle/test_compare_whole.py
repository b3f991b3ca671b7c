"""The comparison itself: each of its rules agrees with a report that is right, and speaks up against a wrong one."""

from __future__ import annotations

from dataclasses import replace

from seqcheck.machine.findings import Duration, Finding, Report, Severity
from seqcheck.machine.places import Place
from tests.oracle.compare_whole import Examined, disagreements, runs_of
from tests.oracle.look import machine_of

CLAMP = """
controller { scan 10 ms }
valve V1 5/2 spring { coil Y1  on 20 ms  off 30 ms }
cylinder clamp on V1 { extend 400..500 ms  retract 300 ms  sensor B1 at retracted  sensor B2 at extended }
"""
BACK = "step back { reset Y1  until B1 }"


def finding(kind: str, subject: str, line: int, margin: int | None = None) -> Finding:
    place = Place("hand.steps", line, 1, line, 2)
    return Finding(kind, Severity.ERROR, False, subject, None, place, "", margin, None, (), None)


def rules_apart(text: str, *findings: Finding, **more: Duration) -> set[str]:
    """Which rules do not hold where the report has these findings, and the greatest of a cycle or a step by name."""
    cycles = tuple((name, bounds) for name, bounds in more.items() if name == "main")
    steps = tuple((f"main.{name}", bounds) for name, bounds in more.items() if name != "main")
    report = Report("hand.steps", "hand", findings, cycles=cycles, steps=steps)
    machine = machine_of(text)
    return {each.rule for each in disagreements(Examined(machine, report), runs_of(machine, 0, 8))}


def test_bounds() -> None:
    text = CLAMP + f"sequence main {{ step out {{ set Y1  until B2 }}  {BACK} }}"
    # out: 10 + 20 + 400..500 + 0..10, back: 10 + 30 + 300 + 0..10
    right = Duration(430_000, 0, 540_000)
    assert rules_apart(text, out=right, main=Duration(770_000, 0, 890_000)) == set()
    assert rules_apart(text, out=replace(right, greatest=None)) == set()
    assert rules_apart(text, out=replace(right, greatest=500_000)) == {"bounds"}
    assert rules_apart(text, out=right, main=Duration(860_000, 0, 890_000)) == {"bounds"}


def test_incidents_have_to_be_foreseen() -> None:
    text = CLAMP + f"sequence main {{ step out {{ set Y1  dwell 200 ms }}  {BACK} }}"
    assert rules_apart(text) == {"foreseen"}
    assert rules_apart(text, finding("early-dwell", "main.out", 5)) == set()
    assert rules_apart(text, finding("early-dwell", "main.back", 5)) == {"foreseen"}


def test_rules_have_to_be_told_of_as_badly_as_they_are_broken() -> None:
    text = CLAMP + f"sequence main {{ step out {{ set Y1  until B2 }}  {BACK} }}\nlimit from Y1 to B2 430 ms"
    subject = "limit from Y1 to B2 430 ms"  # 420 to 530
    assert rules_apart(text) == {"foreseen"}
    assert rules_apart(text, finding("over-limit", subject, 6, -100_000)) == set()
    assert rules_apart(text, finding("over-limit", subject, 6, -1000)) == {"margin"}
    assert rules_apart(text, finding("over-limit", subject, 6)) == set()


def race(dwell: int) -> str:
    choose = "choose { when B2 { step good { dwell 50 ms } } otherwise { step late { until B2 } } }"
    return CLAMP + f"sequence main {{ step out {{ set Y1 }}  step hold {{ dwell {dwell} ms }}\n  {choose}\n  {BACK} }}"


def test_choices_that_are_a_matter_of_time_have_to_be_told_of() -> None:
    assert rules_apart(race(460)) == {"race"}
    assert rules_apart(race(460), finding("choice-race", "main.late", 6)) == set()
    assert rules_apart(race(600)) == set()


def test_what_someone_outside_decides_is_no_race() -> None:
    choose = "choose { when part { step good { dwell 50 ms } } otherwise { step late { dwell 70 ms } } }"
    text = f"signal part from outside after 5..80 ms\nsequence main {{ step one {{ dwell 9 ms }}\n{choose} }}"
    assert rules_apart(text) == set()
    stands = choose.replace("otherwise", "when other")
    assert rules_apart(f"signal other from outside after 5..80 ms\n{text}".replace(choose, stands)) == set()


def test_a_choice_that_stood_may_be_taken_at_the_very_instant() -> None:
    """Whoever is outside may bring the part at once: typical times have it so."""
    choose = "choose { when part { step good { dwell 50 ms } } when other { step late { dwell 70 ms } } }"
    signals = "signal part from outside\nsignal other from outside after 5..80 ms\n"
    assert rules_apart(f"{signals}sequence main {{ step one {{ dwell 9 ms }}\n{choose} }}") == set()


def test_watchdog_of_a_choice_is_known_by_its_line() -> None:
    choose = "choose { when B2 { step good { } } } within 450 ms else back"
    text = CLAMP + f"sequence main {{ step out {{ set Y1 }}\n  {choose}\n  {BACK} }}"
    told = finding("tight-watchdog", "the choice", 6), finding("cut-stroke", "clamp", 7)
    assert rules_apart(text, *told) == set()
    assert rules_apart(text, told[1]) == {"foreseen"}
