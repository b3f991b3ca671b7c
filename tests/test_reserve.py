"""A reserve asked of every margin: what holds, but with less left than that, is a warning of its kind."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest

from seqcheck.language.durations import format_duration
from seqcheck.language.source import Source
from seqcheck.machine.findings import Finding, Report, Severity
from seqcheck.pipeline import examine, examine_source
from tests.test_accepting import LIFT, STAMP, behind

CASES = sorted((Path(__file__).parent / "cases").rglob("*.steps"))
AN_HOUR = 3_600_000_000

#: The pulse of ``press`` holds by exactly 2.5 ms: 20 ms are 4.5 ms short.
THIN = STAMP.replace("YS1 20 ms", "YS1 27 ms")


def report_of(text: str, reserve_us: int) -> Report:
    report = examine_source(Source("stamp.steps", text), (), reserve_us)
    assert not report.problems
    return report


@pytest.mark.parametrize(("reserve_us", "found"), [(0, False), (2_500, False), (2_501, True), (5_000, True)])
def test_a_margin_under_the_reserve_is_found(reserve_us: int, found: bool) -> None:
    report = report_of(THIN, reserve_us)
    assert [one.kind for one in report.findings] == (["short-pulse"] if found else [])
    assert report.verdict == ("findings" if found else "clean")


def test_the_whole_finding() -> None:
    (finding,) = report_of(THIN, 5_000).findings
    place = next(one.place for one in report_of(THIN, 0).margins if one.margin_us == 2_500)
    assert replace(finding, source=None) == Finding(
        kind="short-pulse",
        severity=Severity.WARNING,
        certain=False,
        subject="VS",
        step="main.press",
        place=place,
        message="only 2.5 ms left: beyond that YS1 can be released before VS has reached a",
        margin_us=2_500,
        replayed=None,
        run=(),
        mend="for a reserve of 5 ms: a pulse of at least 30 ms is safe",
    )


def test_nothing_left_is_thin_and_not_broken() -> None:
    (finding,) = report_of(STAMP.replace("YS1 20 ms", "YS1 24500 us"), 1).findings
    assert (finding.margin_us, finding.severity) == (0, Severity.WARNING)
    assert finding.message.startswith("only 0 ms left: ")


@pytest.mark.parametrize(("pulse", "found"), [("29499 us", True), ("29500 us", False), ("30 ms", False)])
def test_the_mend_gives_the_reserve(pulse: str, found: bool) -> None:
    report = report_of(STAMP.replace("YS1 20 ms", f"YS1 {pulse}"), 5_000)
    assert [one.kind for one in report.findings] == (["short-pulse"] if found else [])


@pytest.mark.parametrize(
    ("case", "advice", "old", "new", "less"),
    [
        ("pulse_shorter_than_a_scan", "a pulse of at least 16 ms", "pulse Y4 3 ms", "pulse Y4 16 ms", "pulse Y4 15 ms"),
        ("dwell_exact", "a dwell of at least 748 ms", "dwell 743 ms", "dwell 748 ms", "dwell 747999 us"),
    ],
)
def test_the_advice_of_a_case_gives_the_reserve(case: str, advice: str, old: str, new: str, less: str) -> None:
    """The first: a pulse shorter than a scan is kept by the round that it needs anyway, so that the first 9 ms more
    change nothing."""
    text = (Path(__file__).parent / "cases" / f"{case}.steps").read_text(encoding="utf-8")
    (finding,) = [
        one for one in report_of(text, 5_000).findings if one.mend and advice in one.mend and _is_at(one, old, text)
    ]
    for changed, thin in ((new, False), (less, True)):
        found = {_key(one)[:3] for one in report_of(text.replace(old, changed), 5_000).findings}
        assert (_key(finding)[:3] in found) == thin


def _is_at(finding: Finding, words: str, text: str) -> bool:
    return words in text.splitlines()[finding.place.line - 1]


def test_a_thin_margin_can_be_accepted_and_is_stale_without_the_reserve() -> None:
    text = behind("until BS2 }", "accept short-pulse: why", THIN)
    (finding,) = report_of(text, 5_000).findings
    assert (finding.accepted, finding.margin_us) == ("why", 2_500)
    assert report_of(text, 5_000).verdict == "clean"
    assert [one.kind for one in report_of(text, 0).findings] == ["stale-accept"]


def test_what_is_broken_stays_an_error() -> None:
    found = report_of(behind(LIFT, "no more"), 5_000).findings
    assert [(one.severity, one.margin_us) for one in found] == [(Severity.ERROR, -4_500)]


@pytest.mark.parametrize("file", CASES, ids=lambda file: file.stem)
def test_an_endless_reserve_finds_every_margin_and_changes_nothing_else(file: Path) -> None:
    """What lies further apart than 100 ms is looked for only when it is asked for."""
    plain, asked = examine(str(file)), examine(str(file), (), AN_HOUR)
    margins = {_key(one): one.margin_us for one in asked.margins}
    for one in plain.margins:
        found = margins[_key(one)]
        assert found == one.margin_us or (found is not None and 100_000 < found < (one.margin_us or 0))
    thin = [one for one in asked.findings if one.margin_us is not None and one.margin_us >= 0]
    assert {_key(one) for one in asked.findings} >= {_key(one) for one in plain.findings}
    assert [one for one in asked.findings if one not in thin] == list(plain.findings)
    held = [one for one in asked.margins if one.margin_us is not None and 0 <= one.margin_us < AN_HOUR]
    told_already = {_key(one) for one in plain.findings}
    assert {(*_key(one), one.margin_us) for one in thin} == {
        (one.kind, one.subject, one.step, one.place, one.margin_us) for one in held if _key(one) not in told_already
    }
    for one in thin:
        assert (one.severity, one.certain, one.replayed, one.run) == (Severity.WARNING, False, None, ())
        assert one.message.startswith(f"only {format_duration(one.margin_us or 0)} left: beyond that ")
        assert not {"{", "  ", " ,"} & {
            one.message[at : at + size] for at in range(len(one.message)) for size in (1, 2)
        }
        assert one.mend is None or one.mend.startswith("for a reserve of 60 min: ")


def _key(one: object) -> tuple[object, ...]:
    return (one.kind, one.subject, one.step, one.place)  # type: ignore[attr-defined]
