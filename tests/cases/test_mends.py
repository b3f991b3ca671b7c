"""What a finding says would mend it does mend it: the advice is followed, and the finding is gone."""

from __future__ import annotations

from pathlib import Path

import pytest

from seqcheck.language.source import Source
from seqcheck.pipeline import examine, examine_source

HERE = Path(__file__).parent

#: Case, kind, words of the advice, and the change of the text that follows it.
MENDS = (
    ("pulse_too_short", "short-pulse", "25 ms is safe", "20 ms  until", "25 ms  until"),
    ("ideal_pulse", "short-pulse", "20 ms is safe", "17 ms", "20 ms"),
    ("dwell_too_short", "early-dwell", "743 ms is safe", "dwell 690 ms", "dwell 743 ms"),
    ("watchdog_always", "tight-watchdog", "within 495 ms is safe", "within 400 ms", "within 495 ms"),
    (
        "stale_slow_sensor",
        "stale-signal",
        "at least 56 ms longer",
        "until B1 }",
        "until B1 }\n    step wait { dwell 56 ms }",
    ),
    (
        "race",
        "command-race",
        "let main.halt wait for main.run",
        "step two { dwell 105 ms }",
        "step two { dwell 105 ms } step wait { until main.run }",
    ),
    (
        "pulse_shorter_than_a_scan_lost",
        "short-pulse",
        "25 ms is safe",
        "pulse Y4 3 ms",
        "pulse Y4 25 ms",
    ),
    (
        "handover_one_write",
        "coil-handover",
        "at least 24.5 ms between",
        "until B4 }",
        "until B4 }\n step calm { dwell 24500 us }",
    ),
    ("handover_two_writes", "coil-handover", "at least 4.5 ms more", "top { dwell 20 ms }", "top { dwell 24500 us }"),
    ("short_spring_on", "short-pulse", "keep Y1 energized at least 12.5 ms longer", "dwell 20 ms", "dwell 32500 us"),
    ("short_spring_off", "short-pulse", "leave Y1 released at least 9.5 ms longer", "dwell 35 ms", "dwell 44500 us"),
    ("dwell_too_short", "cut-stroke", "at least 14.5 ms longer", "dwell 690 ms", "dwell 704500 us"),
    (
        "second_cylinder_cut",
        "cut-stroke",
        "at least 59.5 ms longer",
        "until B4 }",
        "until B4 }  step more { on Y2  dwell 59500 us }",
    ),
    ("pulse_into_next_cycle", "opposed-coils", "at most 90 ms ends in time", "pulse Y5 300 ms", "pulse Y5 90 ms"),
    ("opposed_branches", "opposed-coils", "end the command of Y2 first", "on Y2  dwell 100 ms", "on Y2  dwell 30 ms"),
    # 2 % of a stroke of at least 400 ms are 8 ms.
    ("conjunction_passing", "missed-signal", "at least 7 ms longer (a wider range", "30..90 %", "30..92 %"),
    ("follows_may_be_swallowed", "missed-signal", "at least 29 ms longer", "dwell 30 ms", "dwell 59 ms"),
    # 1.2 % of a stroke of at least 2000 ms are 24 ms.
    ("stop_overshoots", "overshoot", "24 ms sooner, or move that edge of B9", "45..48 %", "45..49.2 %"),
    ("choose_within_expires", "tight-watchdog", "within 204 ms is safe", "within 203999 us", "within 204 ms"),
    ("else_in_a_task", "tight-watchdog", "within 489 ms is safe", "within 480 ms", "within 489 ms"),
    (
        "choose_sensor_race",
        "choice-race",
        "let the step before wait until B2 is sure to be as it will stay",
        "dwell 490 ms",
        "dwell 490 ms  until B2",
    ),
    (
        "sequences_not_tied",
        "not-settled",
        "let side wait once a round for a step of main to begin, say `until not main.a` and then `until main.a`",
        "step c {",
        "step off { until not main.a }\n    step tie { until main.a }\n    step c {",
    ),
    ("chase_in_another_sequence", "endless-loop", "or dwell", "step there { }", "step there { dwell 5 ms }"),
    (
        "chase_in_another_sequence",
        "endless-loop",
        "give the controller its scan time",
        "sequence main",
        "controller { scan 8..12 ms }\nsequence main",
    ),
)


@pytest.mark.parametrize(("name", "kind", "advice", "old", "new"), MENDS)
def test_the_advice_mends(name: str, kind: str, advice: str, old: str, new: str) -> None:
    file = HERE / f"{name}.steps"
    found = [one for one in examine(str(file)).findings if one.kind == kind]
    told = [one for one in found if one.mend is not None and advice in one.mend]
    assert told, [one.mend for one in found]
    mended = file.read_text(encoding="utf-8").replace(old, new)
    report = examine_source(Source(str(file), mended))
    assert not report.problems
    left = {(one.kind, one.subject, one.step) for one in report.findings}
    assert {(one.kind, one.subject, one.step) for one in told} - left


def test_every_kind_that_advises_has_its_advice_followed() -> None:
    """But for those whose advice is about what is written of the machine: comments, and times that nobody gave."""
    faulty = (Path(__file__).parents[2] / "examples" / "faulty").glob("*.steps")
    advising = {one.kind for file in faulty for one in examine(str(file)).findings if one.mend is not None}
    assert advising - {kind for _, kind, *_ in MENDS} == {"stale-accept"}
