"""The report of ``check`` for people: findings first, then a short account of each file.

Takes ``Report`` values and the encoding of what it is written to; gives lines of an 80-column page.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from seqcheck.machine.findings import Finding, Report, Severity
from seqcheck.report.amounts import counted
from seqcheck.report.findings import accepted_lines, finding_lines
from seqcheck.report.layout import BLANK, Line, Tone, page, paragraph
from seqcheck.report.plain import plain_report
from seqcheck.report.problems import problem_lines
from seqcheck.report.summary import opening_lines, summary_lines, tightest_margin


def render_text(reports: Sequence[Report]) -> str:
    """The whole page as one text, without any colour."""
    return page(text_lines(reports))


def text_lines(reports: Sequence[Report], encoding: str = "utf-8") -> tuple[Line, ...]:
    """Every file in the order given, and a count of verdicts where there are several."""
    lines: list[Line] = []
    for number, report in enumerate(reports):
        lines.extend((BLANK,) if number else ())
        lines.extend(report_lines(plain_report(_shown_of(report), encoding), encoding))
    if len(reports) > 1:
        lines.extend((BLANK, *paragraph(_total(reports), tone=Tone.TITLE)))
    return tuple(lines)


def _shown_of(report: Report) -> Report:
    """The report less what has no line on the page: of thousands of margins it has the tightest."""
    tightest = tightest_margin(report)
    margins = () if tightest is None else (tightest,)
    return replace(report, margins=margins, steps=(), critical_path=(), choices=(), states=(), runs=())


def report_lines(report: Report, encoding: str = "utf-8") -> tuple[Line, ...]:
    """One file. A report without errors and warnings has no blank lines, so that it stays short."""
    blocks = [problem_lines(problem, encoding) for problem in report.problems]
    blocks += [finding_lines(finding) for finding in report.counting]
    accepted = accepted_lines(report)
    blocks += [accepted] if accepted else []
    airy = bool(report.problems) or any(_is_long(finding) for finding in report.counting)
    lines = list(opening_lines(report))
    for block in (*blocks, summary_lines(report)):
        lines.extend((BLANK,) if airy else ())
        lines.extend(block)
    return tuple(lines)


def _is_long(finding: Finding) -> bool:
    return finding.severity is not Severity.NOTE


def _total(reports: Sequence[Report]) -> str:
    words = {"clean": "clean", "findings": "with findings", "unreadable": "unreadable"}
    verdicts = [report.verdict for report in reports]
    parts = [f"{verdicts.count(verdict)} {word}" for verdict, word in words.items() if verdict in verdicts]
    return f"{counted(len(reports), 'file')}: {', '.join(parts)}"
