"""The page of ``graph``: the states that a machine comes to, the runs between them, and what cycles take over them.

Takes one ``Report`` and the encoding of what it is written to; gives lines of an 80-column page. An unreadable report
shows its problems, as ``check`` does.
"""

from __future__ import annotations

from seqcheck.machine.findings import Report
from seqcheck.report.amounts import counted, decimals_of, milliseconds
from seqcheck.report.layout import BLANK, Column, Line, Tone, paragraph, table
from seqcheck.report.plain import plain_report
from seqcheck.report.summary import is_whole, title
from seqcheck.report.tables import closing, cycle_sections
from seqcheck.report.text import report_lines

_SIDE_BY_SIDE = "below 0: states of two sequences, of which either may come first"


def state_lines(report: Report, encoding: str = "utf-8") -> tuple[Line, ...]:
    shown = plain_report(report, encoding)
    if shown.problems:
        return report_lines(shown, encoding)
    heading = f"{title(shown)}: {counted(len(shown.states), 'state')}, {counted(len(shown.runs), 'run')}"
    times = [run.duration for run in shown.runs]
    times += [one.duration for one in shown.choices]
    times += [time for _, time in shown.cycles]
    return (
        *paragraph(heading if is_whole(shown) else f"{heading}, and not all that there are", 0, 4, Tone.TITLE),
        BLANK,
        Line("States", Tone.TITLE),
        *table((Column("state", right=True), Column("where")), [(str(one.number), one.name) for one in shown.states]),
        BLANK,
        *paragraph(_runs_title(shown), hanging=2, tone=Tone.TITLE),
        *_runs(shown),
        *cycle_sections(shown),
        *closing(shown, times),
    )


def _runs_title(report: Report) -> str:
    parted = any(run.duration.least < 0 for run in report.runs)
    return f"Runs from state to state (ms{f'; {_SIDE_BY_SIDE}' if parted else ''})"


def _runs(report: Report) -> tuple[Line, ...]:
    figures = [(run.duration.least, run.duration.typical, run.duration.greatest) for run in report.runs]
    decimals = decimals_of([figure for row in figures for figure in row])
    columns = (
        Column("from", right=True),
        Column("to", right=True),
        *(Column(head, right=True) for head in ("least", "typical", "greatest")),
        Column("way"),
    )
    rows = [
        (str(run.begin), str(run.end), *milliseconds(row, decimals), run.way or "")
        for run, row in zip(report.runs, figures, strict=True)
    ]
    return table(columns, rows) if rows else (Line("  none"),)
