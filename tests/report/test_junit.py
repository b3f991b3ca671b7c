"""JUnit XML, which has no official standard: read back by junitparser, and valid against the schema in
``schemas/junit-10.xsd`` (G. Boissinot, MIT; its licence stands in it; from the source package of pytest 9.2.0)."""

from __future__ import annotations

from dataclasses import replace
from functools import cache
from pathlib import Path

from hypothesis import given
from hypothesis import strategies as st
from junitparser import Error, Failure, JUnitXml, Skipped, TestCase, TestSuite
from lxml import etree

from seqcheck.checks.catalogue import CHECKS
from seqcheck.machine.findings import Finding, Moment, Report, Severity
from seqcheck.report.junit import render_junit
from tests.report.samples import healthy, no_watchdog, short_pulse, unknown_valve, unreadable

SCHEMA = Path(__file__).parent / "schemas" / "junit-10.xsd"
KINDS = [check.kind for check in CHECKS]


@cache
def schema() -> etree.XMLSchema:
    return etree.XMLSchema(etree.parse(str(SCHEMA)))


def is_error(finding: Finding) -> bool:
    return finding.severity is Severity.ERROR


def read(*reports: Report) -> list[TestSuite]:
    """The suites of a valid text, whose counts are those of its cases."""
    written = render_junit(reports, is_error).encode("utf-8")
    schema().assertValid(etree.fromstring(written))
    whole = JUnitXml.fromstring(written)
    suites = list(whole)
    stated = [(suite.tests, suite.failures, suite.errors, suite.skipped) for suite in suites]
    whole.update_statistics()
    for suite in suites:
        suite.update_statistics()
    assert [(suite.tests, suite.failures, suite.errors, suite.skipped) for suite in suites] == stated
    root = etree.fromstring(written)
    totals = [sum(column) for column in zip(*stated, strict=True)][:3] or [0, 0, 0]
    assert [int(root.get(name)) for name in ("tests", "failures", "errors")] == totals
    return suites


def cases(suite: TestSuite) -> dict[str, TestCase]:
    return {case.name: case for case in suite}


def test_a_suite_for_each_file_and_a_case_for_each_check() -> None:
    suites = read(healthy(), healthy(short_pulse()), unreadable())
    assert [suite.name for suite in suites] == ["stapler.steps"] * 3
    for suite in suites:
        assert [case.name for case in suite] == ["input", *KINDS]
        assert {case.classname for case in suite} == {"stapler.steps"}
    assert all(case.is_passed for case in suites[0])


def test_what_counts_is_a_failure_with_the_whole_finding() -> None:
    (suite,) = read(healthy(short_pulse(), short_pulse(subject="V4")))
    case = cases(suite)["short-pulse"]
    (result,) = case.result
    assert isinstance(result, Failure)
    assert result.type == "short-pulse"
    assert result.message.startswith("stapler.steps:25:20: error (possible) short-pulse: V3, step main.tap: Y4 can go")
    assert result.message.endswith("(and 1 more)")
    assert "12.5 ms  Y4 energized" in result.text
    assert "short-pulse: V4" in result.text
    assert [one.name for one in suite if not one.is_passed] == ["short-pulse"]


def test_what_does_not_count_stands_in_the_output() -> None:
    (suite,) = read(healthy(no_watchdog(), short_pulse(severity=Severity.WARNING)))
    assert all(case.is_passed for case in suite)
    assert "note no-watchdog: main" in cases(suite)["no-watchdog"].system_out
    assert "warning (possible) short-pulse" in cases(suite)["short-pulse"].system_out


def test_what_is_accepted_is_skipped_with_its_reason() -> None:
    (suite,) = read(healthy(short_pulse(accepted="the valve is replaced in May")))
    (result,) = cases(suite)["short-pulse"].result
    assert isinstance(result, Skipped)
    assert result.message == "accepted: the valve is replaced in May"


def test_a_failure_is_not_hidden_by_what_is_accepted_beside_it() -> None:
    (suite,) = read(healthy(short_pulse(accepted="why not"), short_pulse(subject="V4")))
    case = cases(suite)["short-pulse"]
    (result,) = case.result
    assert isinstance(result, Failure)
    assert "V4" in result.message
    assert "accepted short-pulse: V3" in " ".join(case.system_out.split())


def test_an_unreadable_text_is_an_error_and_nothing_else_passed() -> None:
    (suite,) = read(unreadable(unknown_valve(), unknown_valve()))
    (result,) = cases(suite)["input"].result
    assert isinstance(result, Error)
    assert result.message == "stapler.steps:3:18: there is no valve V9 (and 1 more)"
    assert "cylinder lift on V9 { }" in result.text
    assert all(isinstance(case.result[0], Skipped) for case in suite if case.name != "input")


def test_the_properties_say_what_the_results_rest_on() -> None:
    (suite,) = read(healthy())
    properties = {one.name: one.value for one in suite.properties()}
    assert properties["machine"] == "Crate stapler"
    assert "no faulty part" in properties["proved under"]


def test_a_kind_that_the_catalogue_lacks_gets_a_case_all_the_same() -> None:
    (suite,) = read(healthy(short_pulse(kind="new-kind")))
    assert not cases(suite)["new-kind"].is_passed


def test_no_reports_make_a_valid_text() -> None:
    assert read() == []


@given(st.text(st.characters(codec=None), min_size=1, max_size=30))
def test_any_text_makes_valid_xml(text: str) -> None:
    finding = short_pulse(subject=text, step=text, message=text, mend=text, run=(Moment(0, text),))
    report = replace(healthy(finding, replace(finding, accepted=text)), file=text, machine=text, sheets=(text,))
    first, second = read(report, replace(unreadable(unknown_valve(text)), file=text))
    assert (first.failures, second.errors) == (1, 1)
