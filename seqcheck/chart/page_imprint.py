"""What stands on every printed page: machine, file, revision, date, page number.

Takes a report and an imprint; gives the block at the head of the page and the rules that a browser prints its margins
by. Date and revision are what the user has given: no clock is asked, and what was not given is left to be written in.
"""

from __future__ import annotations

from seqcheck.chart.page_markup import NOTHING, Markup, element, name, text
from seqcheck.machine.findings import Report
from seqcheck.machine.records import record
from seqcheck.report.plain import plain

_ISOLATED = ("\u2068", "\u2069")


@record
class Imprint:
    date: str | None = None
    revision: str | None = None


def imprint_block(report: Report, imprint: Imprint) -> Markup:
    """File, revision and date as a list of terms; an empty line where something is to be written in."""
    rows = (("File", report.file), ("Revision", imprint.revision), ("Date", imprint.date))
    parts = [Markup(element("dt", text(label)) + element("dd", _written(value))) for label, value in rows]
    return element("dl", *parts, class_="imprint")


def imprint_line(report: Report, imprint: Imprint) -> str:
    """In one line, what was given."""
    parts = [report.machine, report.file]
    parts += [f"revision {imprint.revision}"] if imprint.revision else []
    parts += [imprint.date]
    return ", ".join(part for part in parts if part)


def page_rules(report: Report, imprint: Imprint) -> Markup:
    """The margin boxes of every printed page (CSS Paged Media Module Level 3)."""
    boxes = {
        "top-left": _string(report.machine or ""),
        "top-center": _string(report.file),
        "top-right": _string(imprint.date or ""),
        "bottom-left": _string(f"revision {imprint.revision}" if imprint.revision else ""),
        "bottom-right": '"page " counter(page) " of " counter(pages)',
    }
    rules = "\n".join(f"  @{box} {{ content: {content}; }}" for box, content in boxes.items())
    return Markup(f"@page {{\n{rules}\n}}")


def _written(value: str | None) -> Markup:
    return name(value) if value else element("span", NOTHING, class_="fill-in")


def _string(value: str) -> str:
    """A string of CSS in which everything but letters of ASCII and digits is written as its number; what runs from the
    right is kept apart from what stands beside it."""
    shown = plain(value)
    isolated = shown if shown.isascii() else shown.join(_ISOLATED)
    return '"' + "".join(one if _harmless(one) else f"\\{ord(one):06x}" for one in isolated) + '"'


def _harmless(character: str) -> bool:
    return character.isascii() and (character.isalnum() or character in " .,_-")
