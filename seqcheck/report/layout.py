"""Lines for an 80-column page: wrapped prose, labelled rows, aligned tables.

Takes plain text (see ``plain``); gives ``Line`` values no wider than ``WIDTH`` terminal cells, a wide East Asian letter
counting as two. Refuses nothing: a word that does not fit is broken.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from enum import Enum

from rich.cells import cell_len, chop_cells

from seqcheck.machine.records import record

WIDTH = 80
_BETWEEN_COLUMNS = 2
_NARROWEST_COLUMN = 8


class Tone(Enum):
    """What a line is; a terminal may colour it, the words alone carry the meaning."""

    PLAIN = "plain"
    TITLE = "title"
    ERROR = "error"
    WARNING = "warning"
    NOTE = "note"
    GOOD = "good"


@record
class Line:
    text: str
    tone: Tone = Tone.PLAIN


@record
class Column:
    head: str
    right: bool = False


BLANK = Line("")


def page(lines: Iterable[Line]) -> str:
    """The lines as one text, each ended by a newline."""
    return "".join(f"{line.text}\n" for line in lines)


def wrap(text: str, width: int) -> tuple[str, ...]:
    """The words of ``text`` in lines of at most ``width`` cells; at least one line, perhaps an empty one."""
    lines: list[str] = []
    current = ""
    for word in text.split():
        if current and cell_len(current) + 1 + cell_len(word) <= width:
            current = f"{current} {word}"
            continue
        if current:
            lines.append(current)
        *full, current = chop_cells(word, width) or [word]
        lines.extend(full)
    return (*lines, current) if current or not lines else tuple(lines)


def paragraph(text: str, indent: int = 0, hanging: int = 0, tone: Tone = Tone.PLAIN) -> tuple[Line, ...]:
    """Prose behind ``indent`` blanks, from the second line on behind ``hanging`` more."""
    first, *rest = wrap(text, WIDTH - indent)
    if not rest:
        return (Line(" " * indent + first, tone),)
    remaining = " ".join(text.split())[len(first) :]
    more = wrap(remaining, WIDTH - indent - hanging)
    return (Line(" " * indent + first, tone), *(Line(" " * (indent + hanging) + line, tone) for line in more))


def labelled(rows: Sequence[tuple[str, str]], indent: int = 2, tone: Tone = Tone.PLAIN) -> tuple[Line, ...]:
    """``label  text`` rows, the texts aligned and wrapped beside their labels."""
    label_width = max((cell_len(label) for label, _ in rows), default=0)
    start = indent + label_width + _BETWEEN_COLUMNS
    lines: list[Line] = []
    for label, text in rows:
        for number, part in enumerate(wrap(text, WIDTH - start)):
            lead = " " * indent + padded(label, label_width) if number == 0 else " " * (start - _BETWEEN_COLUMNS)
            lines.append(Line(f"{lead}{' ' * _BETWEEN_COLUMNS}{part}".rstrip(), tone))
    return tuple(lines)


def table(columns: Sequence[Column], rows: Sequence[Sequence[str]], indent: int = 2) -> tuple[Line, ...]:
    """Aligned columns under their heads (no head line where all heads are empty); what is too wide goes on below."""
    heads = tuple(column.head for column in columns)
    shown = [heads, *rows] if any(heads) else list(rows)
    widths = _column_widths(columns, shown, WIDTH - indent - _BETWEEN_COLUMNS * (len(columns) - 1))
    return tuple(line for row in shown for line in _table_row(columns, widths, row, indent))


def padded(text: str, width: int, right: bool = False) -> str:
    """``text`` filled up with blanks to ``width`` cells."""
    filling = " " * (width - cell_len(text))
    return filling + text if right else text + filling


def _column_widths(columns: Sequence[Column], rows: Sequence[Sequence[str]], room: int) -> tuple[int, ...]:
    """Each column's own width where that fits; else the widest columns of text give way first, then the others."""
    widths = [min(room, max((cell_len(row[number]) for row in rows), default=0)) for number in range(len(columns))]
    while sum(widths) > room:
        texts = [number for number, column in enumerate(columns) if not column.right]
        yielding = [number for number in texts if widths[number] > _NARROWEST_COLUMN] or list(range(len(columns)))
        widths[max(yielding, key=lambda number: widths[number])] -= 1
    return tuple(widths)


def _table_row(columns: Sequence[Column], widths: Sequence[int], row: Sequence[str], indent: int) -> Iterable[Line]:
    cells = [wrap(text, width) if width else ("",) for text, width in zip(row, widths, strict=True)]
    for level in range(max(map(len, cells))):
        parts = (
            padded(cell[level] if level < len(cell) else "", width, column.right)
            for cell, width, column in zip(cells, widths, columns, strict=True)
        )
        yield Line((" " * indent + (" " * _BETWEEN_COLUMNS).join(parts)).rstrip())
