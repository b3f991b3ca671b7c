"""The formats of ``check`` and of ``compare``, each in one file, all named here once.

A format takes ``Report`` values, and which findings count (those that give exit status 1); it gives a text. Its file is
imported when it is asked for, so that help stays quick.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from types import MappingProxyType
from typing import TYPE_CHECKING

from seqcheck.machine.findings import Finding, Report

if TYPE_CHECKING:
    from seqcheck.compare.differences import FileComparison

Counts = Callable[[Finding], bool]
Format = Callable[[Sequence[Report], Counts], str]


def _text(reports: Sequence[Report], counts: Counts) -> str:
    from seqcheck.report.text import render_text

    return render_text(reports)


def _json(reports: Sequence[Report], counts: Counts) -> str:
    from seqcheck.report.json import render_json

    return render_json(reports)


def _sarif(reports: Sequence[Report], counts: Counts) -> str:
    from seqcheck.report.sarif import render_sarif

    return render_sarif(reports)


def _junit(reports: Sequence[Report], counts: Counts) -> str:
    from seqcheck.report.junit import render_junit

    return render_junit(reports, counts)


#: The one that people read; on a terminal it may be coloured and respelled for the terminal's encoding.
FOR_PEOPLE = "text"

FORMATS: Mapping[str, Format] = MappingProxyType({FOR_PEOPLE: _text, "json": _json, "sarif": _sarif, "junit": _junit})


def _compared_text(files: Sequence[FileComparison]) -> str:
    from seqcheck.report.comparison import render_comparison

    return render_comparison(files)


def _compared_json(files: Sequence[FileComparison]) -> str:
    from seqcheck.report.comparison_json import render_comparison_json

    return render_comparison_json(files)


#: Those of ``compare``.
COMPARISON_FORMATS: Mapping[str, Callable[[Sequence[FileComparison]], str]] = MappingProxyType(
    {FOR_PEOPLE: _compared_text, "json": _compared_json}
)
