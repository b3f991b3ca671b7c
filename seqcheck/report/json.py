"""The report of ``check`` for programs: one JSON object with a report for each file.

Takes ``Report`` values; gives JSON text (RFC 8259), UTF-8 once written, the same bytes for the same reports.
"""

from __future__ import annotations

import io
import json
import re
from collections.abc import Sequence

from seqcheck.machine.findings import ChoiceTime, Duration, Finding, Handover, Margin, Problem, Report

FORMAT = "seqcheck-report"
VERSION = 1
#: File names that are no text reach us as lone surrogates, which UTF-8 cannot carry.
_LONE_SURROGATE = re.compile("[\ud800-\udfff]")

Json = dict[str, object]


def render_json(reports: Sequence[Report]) -> str:
    """The whole object as indented text that ends with a newline."""
    head = written({"format": FORMAT, "version": VERSION}).removesuffix("\n}")
    # One by one: the objects of thousands of reports take many times the memory of their text.
    parts = [written(report_object(report)).replace("\n", "\n    ") for report in reports]
    between = ",\n    "
    body = f"[\n    {between.join(parts)}\n  ]" if parts else "[]"
    return f'{head},\n  "reports": {body}\n}}\n'


def written(value: object) -> str:
    """As indented text that UTF-8 can carry."""
    text = io.StringIO()
    json.dump(value, text, ensure_ascii=False, indent=2, allow_nan=False)
    return without_lone_surrogates(text.getvalue())


def without_lone_surrogates(text: str) -> str:
    return _LONE_SURROGATE.sub("\ufffd", text)


def report_object(report: Report) -> Json:
    """One file. Times are whole microseconds; ``machine`` is null where the text could not be read."""
    return {
        "file": report.file,
        "machine": None if report.problems else report.machine,
        "verdict": report.verdict,
        "findings": [_finding(finding) for finding in report.findings],
        "errors": [_error(problem, report.file) for problem in report.problems],
        "proved_under": {"times": list(report.sheets), "assumptions": list(report.assumptions)},
        "cycles": {name: _duration(duration) for name, duration in report.cycles},
        "steps": {name: _duration(duration) for name, duration in report.steps},
        "handovers": [_handover(handover) for handover in report.handovers],
        "margins": [_margin(margin) for margin in report.margins],
        "choices": [_choice(one) for one in report.choices],
    }


def _finding(finding: Finding) -> Json:
    """``accepted`` is there only where it is: the reason that the text gives."""
    return {
        **finding_facts(finding),
        "replayed": finding.replayed,
        "witness": [{"t_us": moment.time_us, "event": moment.event} for moment in finding.run],
        **reason(finding),
    }


def finding_facts(finding: Finding) -> Json:
    """What a finding says, without its run."""
    return {
        "kind": finding.kind,
        "severity": finding.severity.value,
        "certain": finding.certain,
        "subject": finding.subject,
        "step": finding.step,
        "line": finding.place.line,
        "column": finding.place.column,
        "message": finding.message,
        "margin_us": finding.margin_us,
    }


def reason(finding: Finding) -> Json:
    """Why it is accepted, nothing where it is not."""
    return {} if finding.accepted is None else {"accepted": finding.accepted}


def _error(problem: Problem, file: str) -> Json:
    """The message names the file where that is another one (a timing sheet), and ends with the advice."""
    place = problem.place
    named = problem.message if place.file == file else f"{place.file}: {problem.message}"
    message = f"{named.rstrip('.')}; {problem.advice}" if problem.advice else named
    return {"line": place.line, "column": place.column, "message": message}


def _duration(duration: Duration) -> Json:
    typical = {"typical_us": duration.typical}
    return {"min_us": duration.least, **typical, "max_us": duration.greatest, **exactness(duration)}


def exactness(duration: Duration) -> Json:
    """``exact`` is there only where it is not: the bounds are safe, and what can be may lie closer together."""
    return {} if duration.exact else {"exact": False}


def _choice(one: ChoiceTime) -> Json:
    """The cycle in which a choice takes this branch; which way is typical nobody says."""
    return {
        "sequence": one.sequence,
        "line": one.place.line,
        "way": one.way,
        "min_us": one.duration.least,
        "max_us": one.duration.greatest,
        **exactness(one.duration),
    }


def _handover(handover: Handover) -> Json:
    return {
        "valve": handover.valve,
        "from": handover.from_coil,
        "to": handover.to_coil,
        "line": handover.place.line,
        "least_gap_us": handover.least_gap_us,
        "greatest_overlap_us": handover.greatest_overlap_us,
    }


def _margin(margin: Margin) -> Json:
    return {
        "kind": margin.kind,
        "subject": margin.subject,
        "step": margin.step,
        "line": margin.place.line,
        "margin_us": margin.margin_us,
    }
