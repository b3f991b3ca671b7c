"""The forms of ``graph``, by the names that ``--format`` takes.

Takes one ``Report``; gives a text. GraphML and DOT are for other programs: names are plain, times whole microseconds,
and where the graph is not whole a comment at the end says so. They need a report without problems.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from types import MappingProxyType

from seqcheck.machine.findings import Report
from seqcheck.report.formats import FOR_PEOPLE

_NOT_WHOLE = "Not every run was played: there are more states and runs than these."


def _text(report: Report) -> str:
    from seqcheck.report.layout import page
    from seqcheck.report.states import state_lines

    return page(state_lines(report))


def _graphml(report: Report) -> str:
    from seqcheck.engine.state_files import graphml

    return f"{graphml(report.states, report.runs)}{_remark(report, '<!-- ', ' -->')}"


def _dot(report: Report) -> str:
    from seqcheck.engine.state_files import dot

    return f"{dot(report.machine or report.file, report.states, report.runs)}{_remark(report, '// ', '')}"


def _remark(report: Report, begin: str, end: str) -> str:
    from seqcheck.report.summary import is_whole

    return "" if is_whole(report) else f"{begin}{_NOT_WHOLE}{end}\n"


STATE_FORMS: Mapping[str, Callable[[Report], str]] = MappingProxyType(
    {FOR_PEOPLE: _text, "graphml": _graphml, "dot": _dot}
)
