"""A fault of the input: where it is, what is wrong, the line with a caret under the place, what would be right.

Takes plain ``Problem`` values (only their source line may still hold anything); gives lines of a page.
"""

from __future__ import annotations

from rich.cells import cell_len

from seqcheck.machine.findings import Problem
from seqcheck.report.layout import WIDTH, Line, Tone, paragraph
from seqcheck.report.plain import plain_character

_INDENT = 4
_ROOM = WIDTH - _INDENT
_BEFORE_CARET = 50
_CUT = "..."
_TAB = "    "


def problem_lines(problem: Problem, encoding: str = "utf-8") -> tuple[Line, ...]:
    """``file:line:column: error: message``, source line, caret, advice."""
    head = paragraph(f"{spot(problem)}: error: {problem.message}", hanging=_INDENT, tone=Tone.ERROR)
    advice = paragraph(problem.advice, indent=_INDENT) if problem.advice else ()
    return (*head, *_excerpt(problem, encoding), *advice)


def spot(problem: Problem) -> str:
    """``file:line:column``; the file alone where the fault is that it cannot be read at all."""
    place = problem.place
    if problem.source is None and (place.line, place.column) <= (1, 1):
        return place.file
    return f"{place.file}:{place.line}:{place.column}"


def _excerpt(problem: Problem, encoding: str) -> tuple[Line, ...]:
    """The source line, cut around the caret where it is too long, and the caret; nothing without a source line."""
    if problem.source is None:
        return ()
    source = problem.source.rstrip("\r\n")
    start = min(max(problem.place.column - 1, 0), len(source))
    # Only what can be shown is looked at: a line may be a megabyte long.
    before = _shown(source[max(0, start - WIDTH) : start], encoding)
    behind = _shown(source[start : start + WIDTH], encoding)
    before_text = _last_cells(before, _BEFORE_CARET, cut=start > WIDTH)
    room = _ROOM - cell_len(before_text)
    behind_text = _first_cells(behind, room, cut=len(source) > start + WIDTH)
    blanks = " " * _INDENT
    caret = blanks + " " * cell_len(before_text) + "^"
    return Line((blanks + before_text + behind_text).rstrip()), Line(caret, Tone.ERROR)


def _shown(text: str, encoding: str) -> list[str]:
    """What each character of the source looks like."""
    return [_TAB if character == "\t" else plain_character(character, encoding) for character in text]


def _last_cells(parts: list[str], room: int, cut: bool) -> str:
    if not cut and cell_len("".join(parts)) <= room:
        return "".join(parts)
    kept = ""
    for part in reversed(parts):
        if cell_len(part + kept) > room - len(_CUT):
            break
        kept = part + kept
    return _CUT + kept


def _first_cells(parts: list[str], room: int, cut: bool) -> str:
    if not cut and cell_len("".join(parts)) <= room:
        return "".join(parts)
    kept = ""
    for part in parts:
        if cell_len(kept + part) > room - len(_CUT):
            break
        kept += part
    return kept + _CUT
