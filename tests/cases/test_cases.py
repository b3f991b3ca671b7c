"""The hand-worked cases: each text says in its comments what is found in it, and derives the number.

Every expectation was worked out by hand from the meaning of the language. The head of each text writes out the sums;
the runner compares findings and cycles in full, margins and handovers where given.
"""

from __future__ import annotations

from pathlib import Path

import pytest

from seqcheck.machine.findings import Finding, Margin, Report
from seqcheck.pipeline import examine
from tests.cases.expectations import Exchange, Found, Kept, Lasts, Way, expectations_of

HERE = Path(__file__).parent
CASES = sorted(file.stem for file in HERE.glob("*.steps"))


#: Kinds whose subject is the text of the rule.
RULES = {"broken-never", "over-limit"}


def _subject(one: Finding | Margin) -> str:
    return "rule" if one.kind in RULES else one.subject


def _found(report: Report) -> set[Found]:
    return {Found(one.place.line, one.kind, _subject(one), one.margin_us, one.certain) for one in report.findings}


def _lasts(durations: tuple[tuple[str, object], ...]) -> set[Lasts]:
    return {Lasts(name, span.least, span.greatest, span.exact) for name, span in durations}  # type: ignore[attr-defined]


@pytest.mark.parametrize("name", CASES)
def test_case(name: str) -> None:
    file = HERE / f"{name}.steps"
    expected = expectations_of(file.read_text(encoding="utf-8"))
    report = examine(str(file))
    assert not report.problems
    assert _found(report) == expected.findings
    assert _lasts(report.cycles) == expected.cycles
    assert expected.steps <= _lasts(report.steps)
    margins = {
        Kept(one.place.line, one.kind, _subject(one), one.margin_us)
        for one in report.margins
        if one.margin_us is not None
    }
    assert expected.kept <= margins
    table = {
        Exchange(one.place.line, one.from_coil, one.to_coil, one.least_gap_us, one.greatest_overlap_us)
        for one in report.handovers
    }
    assert expected.handovers <= table
    ways = {Way(one.place.line, *_lasts(((one.sequence, one.duration),))) for one in report.choices}
    assert expected.ways <= ways


@pytest.mark.parametrize("name", CASES)
def test_a_finding_with_a_margin_has_a_run_that_shows_it(name: str) -> None:
    report = examine(str(HERE / f"{name}.steps"))
    for finding in report.findings:
        if finding.margin_us is not None:
            assert finding.run
        assert not finding.certain or finding.replayed is not False


def test_every_case_expects_something() -> None:
    assert len(CASES) >= 25
    for name in CASES:
        expected = expectations_of((HERE / f"{name}.steps").read_text(encoding="utf-8"))
        assert any((expected.findings, expected.kept, expected.cycles, expected.ways, expected.steps)), name
