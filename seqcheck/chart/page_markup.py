"""Markup for the HTML report: elements, text and tables, written so that the page is also well-formed XML.

Takes any string as text; gives ``Markup``, in which text from outside can be nothing but text. Control and format
characters are spelled out; words in letters that run from the right stand apart from the sentence around them.
"""

from __future__ import annotations

import html
import re
from collections.abc import Iterable, Sequence
from typing import NewType

from seqcheck.machine.records import record
from seqcheck.report.plain import plain, plain_characters

Markup = NewType("Markup", str)

NOTHING = Markup("")
#: The blocks of scripts that run from the right.
_FROM_THE_RIGHT = "[\u0590-\u08ff\ufb1d-\ufdff\ufe70-\ufefc\U00010800-\U00010fff\U0001e800-\U0001efff]"
_WORD = rf"[\w.+-]*{_FROM_THE_RIGHT}[\w.+-]*"
_WORDS_FROM_THE_RIGHT = re.compile(rf"({_WORD}(?: {_WORD})*)")
#: A word this long may be broken after every so many characters, so that no table grows wider than the paper.
_LONG_WORD = re.compile(r"(\S{25,})")
_PART_OF_LONG_WORD = 12
#: From so many rows on; with fewer a browser leaves the head out of the second column.
_LONG_TABLE = 18


@record
class Column:
    """``figures`` stand to the right; a ``name`` is never broken; a ``blank`` is left to be filled in by hand."""

    head: str
    kind: str = "words"


def words(head: str) -> Column:
    return Column(head)


def names(head: str) -> Column:
    return Column(head, "name")


def figures(head: str) -> Column:
    return Column(head, "figure")


def blank(head: str) -> Column:
    return Column(head, "blank")


def text(value: str) -> Markup:
    """A sentence of our own that may hold names and labels of the user."""
    ours = True
    parts = []
    for part in _WORDS_FROM_THE_RIGHT.split(plain(value)):
        parts.append(_breakable(part) if ours else f"<bdi>{_breakable(part)}</bdi>")
        ours = not ours
    return Markup("".join(parts))


def name(value: str) -> Markup:
    """A name, label, address or file, in its own direction."""
    return Markup(f"<bdi>{_breakable(plain(value))}</bdi>" if value else "")


def source(value: str) -> Markup:
    """A line of the user's text, its blanks kept."""
    return Markup(f'<code dir="auto">{html.escape(plain_characters(value))}</code>')


def element(tag: str, *content: Markup, **attributes: str) -> Markup:
    """``class_`` is the attribute ``class``; an attribute's text is escaped here."""
    written = "".join(
        f' {key.rstrip("_").replace("_", "-")}="{html.escape(value)}"' for key, value in attributes.items()
    )
    return Markup(f"<{tag}{written}>{''.join(content)}</{tag}>")


def lines(parts: Iterable[Markup]) -> Markup:
    """Each part on a line of its own, empty ones left out."""
    return Markup("\n".join(part for part in parts if part))


def table(heads: Sequence[Column], rows: Iterable[Sequence[Markup]], caption: str | None = None) -> Markup:
    """The head is repeated on every page that the table goes on to; a row is never cut."""
    head = (element("th", text(column.head), scope="col", class_=column.kind) for column in heads)
    body = (_row(heads, row) for row in rows)
    title = (element("caption", text(caption)),) if caption else ()
    return element("table", lines((*title, element("thead", element("tr", *head)), element("tbody", lines(body)))))


def columns(content: Markup) -> Markup:
    """A long and narrow table beside itself, in as many columns as the page has room for; a short one as it is."""
    if content.count("<tr>") < _LONG_TABLE:
        return content
    return element("div", content, class_="columns")


def _row(heads: Sequence[Column], row: Sequence[Markup]) -> Markup:
    cells = (element("td", cell, class_=column.kind) for column, cell in zip(heads, row, strict=True))
    return element("tr", *cells)


def _breakable(value: str) -> str:
    """Escaped, with places at which a long word may be broken."""
    return "".join(map(_broken, _LONG_WORD.split(value)))


def _broken(part: str) -> str:
    if _LONG_WORD.fullmatch(part) is None:
        return html.escape(part)
    starts = range(0, len(part), _PART_OF_LONG_WORD)
    return "<wbr/>".join(html.escape(part[start : start + _PART_OF_LONG_WORD]) for start in starts)
