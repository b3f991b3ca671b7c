"""The report of ``check`` in SARIF 2.1.0 (OASIS), for programs that show findings beside the text.

Takes ``Report`` values; gives JSON text, the same bytes for the same reports: no clock, host or folder is in it. A
moment of a run has no place of its own; it stands at the place of the step that it names, where the report knows that,
else at the place of the finding.
"""

from __future__ import annotations

import hashlib
import re
from collections import Counter
from collections.abc import Iterable, Mapping, Sequence
from itertools import chain

from seqcheck import __version__
from seqcheck.language.durations import format_duration
from seqcheck.machine.findings import Finding, Moment, Problem, Report
from seqcheck.machine.places import Place
from seqcheck.report.amounts import milliseconds
from seqcheck.report.json import written
from seqcheck.report.sarif_places import artifact_location, location, physical_location
from seqcheck.report.sarif_rules import UNREADABLE_INPUT, driver, rule_numbers

SCHEMA = "https://docs.oasis-open.org/sarif/sarif/v2.1.0/errata01/os/schemas/sarif-schema-2.1.0.json"
FINGERPRINT = "seqcheckFinding/v1"
#: Beyond so many nobody looks.
MOST_RELATED = 20
_COMMENT = re.compile(r'("[^"]*")|#.*')

Json = dict[str, object]


def render_sarif(reports: Sequence[Report]) -> str:
    """One log with one run, as indented text that ends with a newline."""
    log = {"$schema": SCHEMA, "version": "2.1.0", "runs": [_run(reports)]}
    return f"{written(log)}\n"


def _run(reports: Sequence[Report]) -> Json:
    numbers = rule_numbers(finding.kind for report in reports for finding in report.findings)
    return {
        "tool": {"driver": driver(tuple(numbers), __version__)},
        "invocations": [
            {
                "executionSuccessful": not any(report.problems for report in reports),
                "toolExecutionNotifications": [_notification(one) for report in reports for one in report.problems],
            }
        ],
        "columnKind": "unicodeCodePoints",
        "artifacts": [_artifact(report) for report in reports],
        "results": list(chain.from_iterable(_results(report, numbers) for report in reports)),
    }


def _artifact(report: Report) -> Json:
    """A text, with what its findings, or their absence, rest on."""
    return {
        "location": artifact_location(report.file),
        "roles": ["analysisTarget"],
        "properties": {
            "machine": None if report.problems else report.machine,
            "verdict": report.verdict,
            "times": list(report.sheets),
            "assumptions": list(report.assumptions),
        },
    }


def _notification(problem: Problem) -> Json:
    words = f"{problem.message.rstrip('.')}; {problem.advice}" if problem.advice else problem.message
    return {
        "descriptor": {"id": UNREADABLE_INPUT, "index": 0},
        "level": "error",
        "message": {"text": _sentence(words)},
        "locations": [location(problem.place, problem.source)],
    }


def _results(report: Report, numbers: Mapping[str, int]) -> Iterable[Json]:
    steps = _places_of_steps(report)
    met: Counter[str] = Counter()
    for finding in report.findings:
        mark = _fingerprint(finding)
        met[mark] += 1
        yield _result(finding, numbers[finding.kind], steps, f"{mark}:{met[mark]}", report)


def _result(finding: Finding, number: int, steps: Mapping[str, Place], mark: str, report: Report) -> Json:
    accepted = finding.accepted
    result: Json = {
        "ruleId": finding.kind,
        "ruleIndex": number,
        "level": finding.severity.value,
        "message": {"text": _message(finding)},
        "locations": [location(finding.place, finding.source)],
        "partialFingerprints": {FINGERPRINT: mark},
        # The standard asks for suppressions in all results of a run, or in none.
        "suppressions": [] if accepted is None else [_suppression(accepted)],
        "properties": _properties(finding),
    }
    related = _related(finding, steps, report)
    if related:
        result["relatedLocations"] = related
    if finding.run:
        result["codeFlows"] = [{"threadFlows": [{"locations": _flow(finding, steps)}]}]
    return result


def _message(finding: Finding) -> str:
    step = f", step {finding.step}" if finding.step and finding.step != finding.subject else ""
    mend = f" Mend: {_sentence(finding.mend)}" if finding.mend else ""
    return f"{finding.subject}{step}: {_sentence(finding.message)}{mend}"


def _properties(finding: Finding) -> Json:
    return {
        "certain": finding.certain,
        "margin_us": finding.margin_us,
        "replayed": finding.replayed,
        "subject": finding.subject,
        "step": finding.step,
    }


def _suppression(reason: str) -> Json:
    return {"kind": "inSource", "status": "accepted", "justification": reason}


def _fingerprint(finding: Finding) -> str:
    """Stays while the finding stays, wherever its line goes and whatever is said in its comment."""
    line = _COMMENT.sub(lambda found: found[1] or "", finding.source or "")
    parts = (finding.kind, finding.subject, finding.step or "", "".join(line.split()))
    return hashlib.sha256("\n".join(parts).encode("utf-8", "surrogatepass")).hexdigest()


def _places_of_steps(report: Report) -> dict[str, Place]:
    """The first place in the text at which something is said of each step, as far as findings and margins tell."""
    known = [(one.place, one.step) for one in report.findings if one.step]
    known = sorted(known + [(one.place, one.step) for one in report.margins if one.step])
    return {step: place for place, step in reversed(known)}


def _steps_named(moment: Moment, steps: Mapping[str, Place]) -> list[str]:
    return [word for word in moment.event.split() if word in steps]


def _flow(finding: Finding, steps: Mapping[str, Place]) -> list[Json]:
    """The run, moment by moment."""
    times = milliseconds([moment.time_us for moment in finding.run])
    flow: list[Json] = []
    for number, (moment, time) in enumerate(zip(finding.run, times, strict=True)):
        named = _steps_named(moment, steps)
        place = steps[named[0]] if named else finding.place
        where: Json = {
            "physicalLocation": physical_location(place),
            "message": {"text": _sentence(f"{time} ms: {moment.event}")},
        }
        importance = "essential" if number == len(finding.run) - 1 else "important"
        flow.append({"location": where, "executionOrder": number + 1, "importance": importance})
    return flow


def _related(finding: Finding, steps: Mapping[str, Place], report: Report) -> list[Json]:
    """The steps that the run goes through, and what else was found of the same subject."""
    named = dict.fromkeys(step for moment in finding.run for step in _steps_named(moment, steps))
    told = [(steps[step], f"Step {step}.") for step in named if step != finding.step]
    told += [
        (one.place, f"Also found of {one.subject}: {one.kind}{_by(one)}.")
        for one in report.findings
        if one.subject == finding.subject and one is not finding
    ]
    return [
        {"id": number, "physicalLocation": physical_location(place), "message": {"text": words}}
        for number, (place, words) in enumerate(told[:MOST_RELATED], 1)
    ]


def _by(finding: Finding) -> str:
    if finding.margin_us is None or finding.margin_us >= 0:
        return ""
    return f", broken by {format_duration(-finding.margin_us)}"


def _sentence(words: str) -> str:
    return words if words.endswith((".", "!", "?")) else f"{words}."
