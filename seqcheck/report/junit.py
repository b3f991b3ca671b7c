"""The report of ``check`` as JUnit XML, for build servers that show tests.

Takes ``Report`` values and which findings count; gives XML text, the same bytes for the same reports. A file is a suite
with the same cases on every run: whether it can be read, and one for each check. What counts is a failure, what only
the text accepts is skipped, everything else found stands in the output of its case.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import replace
from xml.etree import ElementTree
from xml.etree.ElementTree import Element, SubElement

from seqcheck.checks.catalogue import CHECKS
from seqcheck.machine.findings import Finding, Problem, Report
from seqcheck.machine.records import record
from seqcheck.report.findings import finding_lines, headline
from seqcheck.report.formats import Counts
from seqcheck.report.layout import page
from seqcheck.report.plain import plain_characters, plain_report
from seqcheck.report.problems import problem_lines, spot

#: The case that every text begins with.
INPUT = "input"
_DECLARATION = '<?xml version="1.0" encoding="UTF-8"?>\n'


@record
class _Outcome:
    """``result``: failure, error or skipped, None for a case that passed; ``output``: what was found all the same."""

    name: str
    result: str | None = None
    kind: str = ""
    message: str = ""
    text: str = ""
    output: str = ""


def render_junit(reports: Sequence[Report], counts: Counts) -> str:
    whole = Element("testsuites", name="seqcheck")
    for report in reports:
        # What is not shown need not be made printable either.
        _add_suite(whole, replace(report, margins=(), handovers=(), steps=(), critical_path=()), counts)
    for total in ("tests", "failures", "errors"):
        whole.set(total, str(sum(int(suite.get(total, "0")) for suite in whole)))
    ElementTree.indent(whole)
    return f"{_DECLARATION}{ElementTree.tostring(whole, encoding='unicode')}\n"


def _add_suite(whole: Element, report: Report, counts: Counts) -> None:
    outcomes = list(_outcomes(report, counts))
    results = [outcome.result for outcome in outcomes]
    name = plain_characters(report.file)
    numbers = {
        "tests": len(outcomes),
        "failures": results.count("failure"),
        "errors": results.count("error"),
        "skipped": results.count("skipped"),
    }
    suite = SubElement(whole, "testsuite", {"name": name} | {key: str(number) for key, number in numbers.items()})
    properties = SubElement(suite, "properties")
    for key, value in _properties(plain_report(report)):
        SubElement(properties, "property", name=key, value=value)
    for outcome in outcomes:
        _add_case(suite, name, outcome)


def _add_case(suite: Element, file: str, outcome: _Outcome) -> None:
    case = SubElement(suite, "testcase", classname=file, name=outcome.name)
    if outcome.result:
        SubElement(case, outcome.result, type=outcome.kind, message=outcome.message).text = outcome.text or None
    if outcome.output:
        SubElement(case, "system-out").text = outcome.output


def _properties(report: Report) -> Iterable[tuple[str, str]]:
    """What the results of a file, or their absence, rest on."""
    yield "machine", report.machine or ""
    yield "verdict", report.verdict
    yield "times", ", ".join(report.sheets) or "from the text alone"
    yield "proved under", "; ".join(report.assumptions)


def _outcomes(report: Report, counts: Counts) -> Iterable[_Outcome]:
    kinds = dict.fromkeys(check.kind for check in CHECKS) | dict.fromkeys(one.kind for one in report.findings)
    if report.problems:
        yield _unreadable(plain_report(report).problems)
        reason = "not examined: the text or a timing sheet could not be read"
        yield from (_Outcome(kind, "skipped", "unreadable", reason) for kind in kinds)
        return
    yield _Outcome(INPUT)
    # What counts is asked of the findings as they are; what is shown of them is made printable.
    shown = list(zip(report.findings, plain_report(report).findings, strict=True))
    for kind in kinds:
        yield _of_kind(kind, [(plain, counts(one)) for one, plain in shown if one.kind == kind])


def _of_kind(kind: str, found: Sequence[tuple[Finding, bool]]) -> _Outcome:
    accepted = [one for one, _ in found if one.accepted is not None]
    counting = [one for one, count in found if count and one.accepted is None]
    others = [one for one, count in found if not count and one.accepted is None]
    if counting:
        message = _with_more(f"{headline(counting[0])}: {counting[0].message}", len(counting))
        return _Outcome(kind, "failure", kind, message, _pages(counting), _pages([*others, *accepted]))
    if accepted:
        message = _with_more(f"accepted: {accepted[0].accepted}", len(accepted))
        return _Outcome(kind, "skipped", "accepted", message, _pages(accepted), _pages(others))
    return replace(_Outcome(kind), output=_pages(others))


def _unreadable(problems: Sequence[Problem]) -> _Outcome:
    first = problems[0]
    message = _with_more(f"{spot(first)}: {first.message}", len(problems))
    text = "\n".join(page(problem_lines(problem)) for problem in problems)
    return _Outcome(INPUT, "error", "unreadable", message, f"\n{text}")


def _pages(findings: Sequence[Finding]) -> str:
    return "\n" + "\n".join(page(finding_lines(one)) for one in findings) if findings else ""


def _with_more(message: str, count: int) -> str:
    return message if count == 1 else f"{message} (and {count - 1} more)"
