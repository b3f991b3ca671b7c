"""The pages of ``times`` and ``margins``.

Takes one ``Report`` and the encoding of what it is written to; gives lines of an 80-column page. An unreadable report
shows its problems, as ``check`` does.
"""

from __future__ import annotations

from collections.abc import Sequence

from seqcheck.machine.findings import ChoiceTime, Duration, Handover, Margin, Report
from seqcheck.report.amounts import ADDED_UP, BOUNDS, OPEN, WIDE, counted, decimals_of, marks_of, milliseconds
from seqcheck.report.layout import BLANK, Column, Line, Tone, labelled, paragraph, table
from seqcheck.report.plain import plain_report
from seqcheck.report.summary import accepted_margins, is_whole, proved_under_lines, title
from seqcheck.report.text import report_lines


def times_lines(report: Report, encoding: str = "utf-8") -> tuple[Line, ...]:
    """Cycle times, each step's times and the critical path, all in milliseconds."""
    shown = plain_report(report, encoding)
    if shown.problems:
        return report_lines(shown, encoding)
    return (
        *_heading(shown),
        *cycle_sections(shown),
        *_section("Step times (ms)", _durations("step", shown.steps)),
        *_section("Critical path: what makes the longest cycle (ms)", _critical_path(shown)),
        *closing(shown, times_in(shown)),
    )


def margins_lines(report: Report, encoding: str = "utf-8") -> tuple[Line, ...]:
    """Every margin, tightest first, and the handovers between opposed coils, all in milliseconds."""
    shown = plain_report(report, encoding)
    if shown.problems:
        return report_lines(shown, encoding)
    return (
        *_heading(shown),
        *_section("Margins, tightest first (ms; below 0: broken by so much)", _margins(shown)),
        *_section("Handovers from coil to opposed coil (ms)", _handovers(shown.handovers)),
        *closing(shown, has_open=any(margin.margin_us is None for margin in shown.margins)),
    )


def times_in(report: Report) -> tuple[Duration, ...]:
    """Of cycles, with each branch of a choice as well, and of steps."""
    return tuple(time for _, time in (*report.cycles, *report.steps)) + tuple(one.duration for one in report.choices)


def cycle_sections(report: Report) -> tuple[Line, ...]:
    """How long cycles take, and how long with each branch that a choice can take, if there is one."""
    return (
        *_section("Cycle times (ms)", _durations("sequence", report.cycles)),
        *(_section("Cycle times by choice (ms)", _choices(report.choices)) if report.choices else ()),
    )


def _heading(report: Report) -> tuple[Line, ...]:
    return paragraph(title(report), hanging=4, tone=Tone.TITLE)


def _section(title: str, lines: tuple[Line, ...]) -> tuple[Line, ...]:
    return (BLANK, Line(title, Tone.TITLE), *(lines or (Line("  none"),)))


def closing(report: Report, times: Sequence[Duration] = (), has_open: bool = False) -> tuple[Line, ...]:
    """What marks among the ``times`` mean, or that something else is open; and what the figures rest on. They hold for
    runs that go on as one that was played does, and, where the machine comes to ever new states, only as far as it was
    played."""
    rows = []
    if has_open or any(time.greatest is None for time in times):
        rows.append((OPEN, "nothing limits it but signals from outside, or how often a way goes back"))
    if not all(time.exact for time in times):
        rows.append((WIDE, ADDED_UP))
    if not is_whole(report):
        rows.append(("But", "not every run was played: what was not may take other times; see seqcheck check"))
    if found := [finding for finding in report.findings if finding.diverts]:
        accepted = sum(finding.accepted is not None for finding in found)
        how = f" ({accepted} accepted)" if accepted else ""
        count = counted(len(found), "finding")
        rows.append(("But", f"{count}{how}: the figures hold only for runs without them; see seqcheck check"))
    return (BLANK, *labelled(rows), *proved_under_lines(report))


def _durations(name: str, durations: tuple[tuple[str, Duration], ...]) -> tuple[Line, ...]:
    if not durations:
        return ()
    figures = [(time.least, time.typical, time.greatest) for _, time in durations]
    decimals = decimals_of([figure for row in figures for figure in row])
    marks = marks_of([time for _, time in durations])
    rows = [
        (named[0], *milliseconds(row, decimals), *mark)
        for named, row, mark in zip(durations, figures, marks, strict=True)
    ]
    return table((Column(name), *_figures("least", "typical", "greatest"), *_bounds(marks)), rows)


def _choices(choices: tuple[ChoiceTime, ...]) -> tuple[Line, ...]:
    figures = [(one.duration.least, one.duration.greatest) for one in choices]
    decimals = decimals_of([figure for row in figures for figure in row])
    marks = marks_of([one.duration for one in choices])
    rows = [
        (one.sequence, one.way, *milliseconds(row, decimals), *mark)
        for one, row, mark in zip(choices, figures, marks, strict=True)
    ]
    return table((Column("sequence"), Column("way"), *_figures("least", "greatest"), *_bounds(marks)), rows)


def _figures(*heads: str) -> tuple[Column, ...]:
    return tuple(Column(head, right=True) for head in heads)


def _bounds(marks: Sequence[tuple[str, ...]]) -> tuple[Column, ...]:
    return (Column(BOUNDS),) if any(marks) else ()


def _critical_path(report: Report) -> tuple[Line, ...]:
    if not report.critical_path:
        return ()
    figures = [(part.at_us, part.least, part.greatest) for part in report.critical_path]
    decimals = decimals_of([figure for row in figures for figure in row])
    columns = (
        Column("latest", right=True),
        Column("delay", right=True),
        Column("up to", right=True),
        Column("event"),
    )
    rows = [(*milliseconds(row, decimals), report.critical_path[number].event) for number, row in enumerate(figures)]
    return table(columns, rows)


def _margins(report: Report) -> tuple[Line, ...]:
    """What the text accepts is marked, in a column that is there only then."""
    if not report.margins:
        return ()
    accepted = accepted_margins(report)
    ordered = sorted(report.margins, key=lambda margin: (margin.margin_us is None, margin.margin_us or 0))
    amounts = milliseconds([margin.margin_us for margin in ordered])
    columns = [Column("margin", right=True), Column("kind"), Column("subject"), Column("step"), Column("line", True)]
    columns += [Column("accepted")] if accepted else []
    rows = [
        (amount, margin.kind, margin.subject, margin.step or "", str(margin.place.line), *_mark(margin, accepted))
        for amount, margin in zip(amounts, ordered, strict=True)
    ]
    return table(columns, rows)


def _mark(margin: Margin, accepted: frozenset[Margin]) -> tuple[str, ...]:
    return ("yes" if margin in accepted else "",) if accepted else ()


def _handovers(handovers: tuple[Handover, ...]) -> tuple[Line, ...]:
    if not handovers:
        return ()
    gaps = milliseconds([handover.least_gap_us for handover in handovers])
    overlaps = milliseconds([handover.greatest_overlap_us for handover in handovers])
    columns = (
        Column("valve"),
        Column("from"),
        Column("to"),
        Column("least gap", right=True),
        Column("greatest overlap", right=True),
        Column("line", right=True),
    )
    rows = [
        (handover.valve, handover.from_coil, handover.to_coil, gap, overlap, str(handover.place.line))
        for handover, gap, overlap in zip(handovers, gaps, overlaps, strict=True)
    ]
    return table(columns, rows)
