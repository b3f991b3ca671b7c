"""The formats of ``check``, each in one file, all named here once.

A format takes ``Report`` values and gives a text. Its file is imported when it is asked for, so that help stays quick.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from types import MappingProxyType

from seqcheck.machine.findings import Report

Format = Callable[[Sequence[Report]], str]


def _text(reports: Sequence[Report]) -> str:
    from seqcheck.report.text import render_text

    return render_text(reports)


def _json(reports: Sequence[Report]) -> str:
    from seqcheck.report.json import render_json

    return render_json(reports)


#: The one that people read; on a terminal it may be coloured and respelled for the terminal's encoding.
FOR_PEOPLE = "text"

FORMATS: Mapping[str, Format] = MappingProxyType({FOR_PEOPLE: _text, "json": _json})
