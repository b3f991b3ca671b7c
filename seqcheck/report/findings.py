"""A finding on a page: where, what, by how much, what would mend it, and the run that shows it.

Takes plain ``Finding`` values; gives lines of a page.
"""

from __future__ import annotations

from seqcheck.language.durations import format_duration
from seqcheck.machine.findings import Finding, Moment, Report, Severity
from seqcheck.report.amounts import counted, milliseconds
from seqcheck.report.layout import Column, Line, Tone, labelled, paragraph, table

TONES = {Severity.ERROR: Tone.ERROR, Severity.WARNING: Tone.WARNING, Severity.NOTE: Tone.NOTE}
_INDENT = 4
_RUN_INDENT = 6
#: A longer run shows this many of its first and last moments.
FIRST_MOMENTS = 3
LAST_MOMENTS = 12


def finding_lines(finding: Finding) -> tuple[Line, ...]:
    """The whole finding; a note is one paragraph."""
    if finding.severity is Severity.NOTE:
        return _note_lines(finding)
    rows: list[tuple[str, str]] = []
    if finding.margin_us is not None:
        rows.append(_margin_row(finding.margin_us))
    if finding.mend:
        rows.append(("Mend", finding.mend))
    if finding.run:
        rows.append(("Run", _about_run(finding)))
    return (
        *paragraph(headline(finding), hanging=_INDENT, tone=TONES[finding.severity]),
        *paragraph(finding.message, indent=_INDENT),
        *labelled(rows, indent=_INDENT),
        *_run_lines(finding.run),
    )


def accepted_lines(report: Report) -> tuple[Line, ...]:
    """What was found and is accepted, with the reasons: one paragraph each."""
    return tuple(
        line
        for finding in report.findings
        if finding.accepted is not None
        for line in paragraph(f"{headline(finding)}{_amount(finding)}: {finding.accepted}", hanging=_INDENT)
    )


def headline(finding: Finding) -> str:
    """``a.steps:33:20: error (possible) short-pulse: V3, step main.tap``; accepted ones say so instead."""
    place = finding.place
    sureness = "" if finding.severity is Severity.NOTE else " (certain)" if finding.certain else " (possible)"
    rank = f"{finding.severity.value}{sureness}" if finding.accepted is None else "accepted"
    step = f", step {finding.step}" if finding.step and finding.step != finding.subject else ""
    where = f"{place.file}:{place.line}:{place.column}"
    return f"{where}: {rank} {finding.kind}: {finding.subject}{step}"


def _amount(finding: Finding) -> str:
    if finding.margin_us is None:
        return ""
    amount = format_duration(abs(finding.margin_us))
    return f" (broken by {amount})" if finding.margin_us < 0 else f" (only {amount} left)"


def _note_lines(finding: Finding) -> tuple[Line, ...]:
    words = f"{finding.message.rstrip('.')}; {finding.mend}" if finding.mend else finding.message
    return paragraph(f"{headline(finding)}: {words}", hanging=_INDENT, tone=Tone.NOTE)


def _margin_row(margin_us: int) -> tuple[str, str]:
    if margin_us < 0:
        return "Broken by", format_duration(-margin_us)
    return "Margin", format_duration(margin_us)


def _about_run(finding: Finding) -> str:
    if finding.replayed is None:
        return "one that shows it (not replayed)"
    if finding.replayed:
        return "replayed, and this happens:"
    return "replayed, but something else gets in its way first:"


def _run_lines(run: tuple[Moment, ...]) -> tuple[Line, ...]:
    left_out = len(run) - FIRST_MOMENTS - LAST_MOMENTS
    if left_out <= 1:
        return _moments(run, run)
    gap = f"({counted(left_out, 'moment')} left out here; the JSON report has them all)"
    first, last = run[:FIRST_MOMENTS], run[-LAST_MOMENTS:]
    shown = first + last
    return (*_moments(first, shown), *paragraph(gap, indent=_RUN_INDENT), *_moments(last, shown))


def _moments(part: tuple[Moment, ...], shown: tuple[Moment, ...]) -> tuple[Line, ...]:
    """The times of ``part``, aligned with all that are shown."""
    times = dict(zip(shown, milliseconds([moment.time_us for moment in shown]), strict=True))
    widest = max((len(text) for text in times.values()), default=0)
    rows = [(f"{times[moment]:>{widest}} ms", moment.event) for moment in part]
    return table((Column("", right=True), Column("")), rows, indent=_RUN_INDENT)
