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
