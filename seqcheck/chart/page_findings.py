"""The findings of the HTML report: each with its number in the chart, what would mend it, and the run that shows it.

Takes findings and problems; gives the markup of their section.
"""

from __future__ import annotations

from collections.abc import Iterator

from seqcheck.chart.page_markup import (
    NOTHING,
    Markup,
    element,
    figures,
    lines,
    name,
    source,
    table,
    text,
    words,
)
from seqcheck.language.durations import format_duration
from seqcheck.machine.findings import Finding, Problem, Report, Severity
from seqcheck.machine.places import Place
from seqcheck.report.amounts import counted, milliseconds

#: A longer run shows this many of its first and last moments.
_FIRST_MOMENTS = 4
_LAST_MOMENTS = 24


def findings_section(report: Report) -> Markup:
    """In the order of the report; what the text accepts stands among them and says so."""
    if not report.findings:
        return element(
            "p", text("None: for every time within its tolerance, nothing that seqcheck looks for goes wrong.")
        )
    return lines(_finding(number, finding) for number, finding in enumerate(report.findings, 1))


def problems_section(report: Report) -> Markup:
    return lines(_problem(problem) for problem in report.problems)


def rank(finding: Finding) -> str:
    """``error, certain``; notes are neither certain nor possible."""
    if finding.accepted is not None:
        return "accepted"
    sureness = "" if finding.severity is Severity.NOTE else ", certain" if finding.certain else ", possible"
    return f"{finding.severity.value}{sureness}"


def _finding(number: int, finding: Finding) -> Markup:
    head = (
        element("span", text(str(number)), class_="number"),
        element("strong", text(f"{rank(finding)}: {finding.kind}")),
        text("of"),
        name(finding.subject),
        *((text("in step"), name(finding.step)) if finding.step and finding.step != finding.subject else ()),
        element("span", _where(finding.place), class_="where"),
    )
    told = (
        element("div", source(finding.source.strip()), class_="source") if finding.source else NOTHING,
        element("p", text(finding.message)),
        _facts(finding),
    )
    parts = (element("h3", Markup(" ".join(head))), element("div", lines(told), class_="told"), _run(finding))
    weight = "accepted" if finding.accepted is not None else finding.severity.value
    return element("article", lines(parts), id=f"finding-{number}", class_=f"finding {weight}")


def _where(place: Place) -> Markup:
    return Markup(f"{name(place.file)}, {text(f'line {place.line}, column {place.column}')}")


def _facts(finding: Finding) -> Markup:
    facts = [element("dt", text(label)) + element("dd", text(value)) for label, value in _labelled(finding)]
    return element("dl", *map(Markup, facts)) if facts else NOTHING


def _labelled(finding: Finding) -> Iterator[tuple[str, str]]:
    if finding.margin_us is not None:
        amount = format_duration(abs(finding.margin_us))
        yield ("Broken by", amount) if finding.margin_us < 0 else ("Left", amount)
    if finding.mend:
        yield "Mend", finding.mend
    if finding.accepted is not None:
        yield "Accepted", finding.accepted


def _run(finding: Finding) -> Markup:
    if not finding.run:
        return NOTHING
    times = milliseconds([moment.time_us for moment in finding.run])
    rows = [(text(time), text(moment.event)) for time, moment in zip(times, finding.run, strict=True)]
    left_out = len(rows) - _FIRST_MOMENTS - _LAST_MOMENTS
    if left_out > 1:
        gap = (text("..."), text(f"{counted(left_out, 'moment')} left out here; the JSON report has them all"))
        rows = [*rows[:_FIRST_MOMENTS], gap, *rows[-_LAST_MOMENTS:]]
    return table((figures("ms"), words("event")), rows, _about_run(finding))


def _about_run(finding: Finding) -> str:
    if finding.replayed is None:
        return "A run that shows it (not replayed)"
    if finding.replayed:
        return "A run that shows it, replayed: this happens"
    return "A run that would show it; replayed, something else gets in its way first"


def _problem(problem: Problem) -> Markup:
    told = (
        element("h3", element("strong", text("cannot be read")), Markup(" "), _where(problem.place)),
        element("div", source(problem.source), class_="source") if problem.source else NOTHING,
        element("p", text(problem.message)),
        element("p", text(problem.advice)) if problem.advice else NOTHING,
    )
    return element("article", lines(told), class_="finding error")
