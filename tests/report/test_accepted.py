"""What a text accepts, on every page and in JSON: there, with its reason, and counted apart."""

from __future__ import annotations

import json
from collections.abc import Callable
from dataclasses import replace

from seqcheck.machine.findings import Margin, Severity
from seqcheck.report.json import render_json
from seqcheck.report.layout import page
from seqcheck.report.tables import margins_lines, times_lines
from seqcheck.report.text import render_text
from tests.report.samples import healthy, no_watchdog, place, short_pulse

REASON = "all spools of this series were measured below 17 ms"
ACCEPTED = short_pulse(accepted=REASON)


def test_golden_page(golden: Callable[[str, str], None]) -> None:
    thin = short_pulse(severity=Severity.WARNING, margin_us=2_000, run=(), replayed=None, accepted="enough here")
    counted = short_pulse(place=place(31), subject="V4", step="main.back")
    noted = replace(no_watchdog(), accepted="the line has its own")
    golden("accepted.txt", render_text([healthy(ACCEPTED), healthy(counted, ACCEPTED, thin, noted)]))


def test_json_has_the_reason_last_and_only_where_there_is_one() -> None:
    report = json.loads(render_json([healthy(short_pulse(), ACCEPTED)]))["reports"][0]
    plain, accepted = report["findings"]
    assert accepted == plain | {"accepted": REASON}
    assert list(accepted)[-1] == "accepted" and "accepted" not in plain
    assert report["verdict"] == "findings"
    assert json.loads(render_json([healthy(ACCEPTED)]))["reports"][0]["verdict"] == "clean"


def test_the_tightest_margin_is_one_that_is_not_accepted() -> None:
    margin = Margin(ACCEPTED.kind, ACCEPTED.subject, ACCEPTED.step, ACCEPTED.place, -3_000)
    plain = replace(healthy(short_pulse()), margins=(margin, *healthy().margins))
    assert "Tightest  broken by 3 ms" in render_text([plain])
    assert "Tightest  32 ms left" in render_text([replace(plain, findings=(ACCEPTED,))])


def test_the_page_of_margins_marks_what_is_accepted() -> None:
    margin = Margin(ACCEPTED.kind, ACCEPTED.subject, ACCEPTED.step, ACCEPTED.place, -3_000)
    report = replace(healthy(ACCEPTED), margins=(margin, *healthy().margins))
    lines = page(margins_lines(report)).splitlines()
    assert lines[3].endswith("line  accepted")
    assert [line.endswith("  yes") for line in lines[4:8]] == [True, False, False, False]
    assert "accepted" not in page(margins_lines(healthy(short_pulse())))


def test_the_figures_still_hold_only_without_it() -> None:
    for lines in (times_lines, margins_lines):
        shown = " ".join(page(lines(healthy(ACCEPTED))).split())
        assert "But 1 finding (1 accepted): the figures hold only for runs without them" in shown
        assert "But" not in page(lines(healthy(replace(no_watchdog(), accepted="the line has its own"))))


def test_a_machine_that_accepts_only_a_note_is_clean_without_a_but() -> None:
    text = render_text([healthy(replace(no_watchdog(), accepted="the line has its own"))])
    assert text.startswith("stapler.steps: Crate stapler: clean for all times in tolerance\n")
    assert "accepted no-watchdog: main: the line has its own" in text
