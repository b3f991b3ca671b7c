"""Times of a chart in words, and findings in a line.

Takes edges and marks; gives text. Nothing is rounded.
"""

from __future__ import annotations

from seqcheck.chart.model import Chart, Edge, Mark
from seqcheck.language.durations import format_duration
from seqcheck.machine.findings import Severity

OPEN = "open"
#: The words of ``seqcheck --help``, for paper that is carried to a machine.
SAFETY = (
    "seqcheck finds timing faults in a sequence. It is no safety function and no proof of one: it replaces no risk"
    " assessment, no guard, no emergency stop circuit and no licensed practitioner; local codes and licensed practice"
    " come first."
)


def time_in_words(time_us: int | None) -> str:
    return OPEN if time_us is None else format_duration(time_us)


def span_in_words(edge: Edge) -> str:
    """``8.5 ms to 13 ms, typically 10.75 ms``; ``always 10 ms`` where it never varies."""
    typical = format_duration(edge.typical_us)
    if edge.certain:
        return f"always {typical}"
    return f"{time_in_words(edge.earliest_us)} to {time_in_words(edge.latest_us)}, typically {typical}"


def told(edge: Edge) -> str:
    return f"{edge.text}: {span_in_words(edge)}"


def measured_from(chart: Chart) -> str:
    return f"Times count from {chart.anchor}."


def finding_in_a_line(mark: Mark) -> str:
    """``error (possible) short-pulse of V3 in step main.tap, line 25, broken by 3 ms: what happens``"""
    finding = mark.finding
    if finding.accepted is not None:
        rank = "accepted"
    elif finding.severity is Severity.NOTE:
        rank = finding.severity.value
    else:
        rank = f"{finding.severity.value} ({'certain' if finding.certain else 'possible'})"
    step = f" in step {finding.step}" if finding.step and finding.step != finding.subject else ""
    place = f"line {finding.place.line}"
    # A rule stands in the message as it was written.
    about = "" if f"`{finding.subject}`" in finding.message else f" of {finding.subject}"
    words = f"{rank} {finding.kind}{about}{step}, {place}{_amount(finding.margin_us)}: {finding.message}"
    beside = mark.time_us is None and finding.margin_us is not None
    return f"{words} (not in the part shown)" if beside else words


def _amount(margin_us: int | None) -> str:
    if margin_us is None:
        return ""
    return f", broken by {format_duration(-margin_us)}" if margin_us < 0 else f", margin {format_duration(margin_us)}"
