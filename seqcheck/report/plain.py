"""Text from outside, made harmless and writable.

Takes any string (a name, a label, a path, a line of a text) and the encoding of whatever it goes to. Gives printable
characters that this encoding carries: white space as a blank, control and format characters spelled out (``\\x1b``),
characters the encoding lacks in plain ASCII. Refuses nothing.
"""

from __future__ import annotations

import dataclasses
import operator
import re
import unicodedata
from functools import cache, lru_cache
from typing import Any

from seqcheck.machine.findings import Problem, Report
from seqcheck.machine.places import Place

#: A run of characters without a blank is cut in its middle beyond this, so that no name fills a page.
LONGEST_WORD = 200
_KEPT_OF_LONG_WORD = 90
_LONG_WORD = re.compile(rf"\S{{{LONGEST_WORD + 1},}}")

_HARMLESS_ASCII = re.compile(r"[ -~]*")
#: Selectors of a letter's style: invisible, and terminals disagree about what they do to its width.
_STYLE_SELECTORS = "\ufe0e\ufe0f"
_SPELLED_IN_ASCII = {
    "±": "+-",
    "µ": "u",
    "μ": "u",
    "°": "deg",
    "×": "x",
    "÷": "/",
    "…": "...",
    "\u2010": "-",
    "\u2011": "-",
    "\u2012": "-",
    "\u2013": "-",
    "\u2014": "-",
    "\u2212": "-",
    "\u2018": "'",
    "\u2019": "'",
    "\u201a": "'",
    "\u201c": '"',
    "\u201d": '"',
    "\u201e": '"',
    "«": '"',
    "»": '"',
    "→": "->",
    "←": "<-",
    "≤": "<=",
    "≥": ">=",
    "Ø": "O",
    "ø": "o",
    "Æ": "AE",
    "æ": "ae",
    "Œ": "OE",
    "œ": "oe",
    "ß": "ss",
    "ẞ": "SS",
    "Đ": "D",
    "đ": "d",
    "Ð": "D",
    "ð": "d",
    "Þ": "Th",
    "þ": "th",
    "Ł": "L",
    "ł": "l",
    "ı": "i",
    "\u03a9": "Ohm",
    "\u2126": "Ohm",
    "€": "EUR",
    "·": ".",
}


def plain(text: str, encoding: str = "utf-8") -> str:
    """Prose: as ``plain_characters``, and words longer than ``LONGEST_WORD`` characters cut in their middle."""
    shown = plain_characters(text, encoding)
    return shown if len(shown) <= LONGEST_WORD else _LONG_WORD.sub(_shortened, shown)


def plain_characters(text: str, encoding: str = "utf-8") -> str:
    """Character by character, nothing cut."""
    if _HARMLESS_ASCII.fullmatch(text):
        return text
    return "".join(plain_character(character, encoding) for character in text)


@lru_cache(maxsize=4096)
def plain_character(character: str, encoding: str) -> str:
    """What one character looks like; more than one character, or none, where it has to be spelled out."""
    if character.isspace():
        return " "
    if character in _STYLE_SELECTORS:
        return ""
    if not character.isprintable():
        return character.encode("unicode_escape").decode("ascii")
    if _carries(encoding, character):
        return character
    return _in_ascii(character)


def plain_report(report: Report, encoding: str = "utf-8") -> Report:
    """The report with every string in it made plain, but for the source lines of its problems: a place in them
    counts their own characters."""
    plained: Report = plain_record(report, encoding)
    return plained


def plain_record(value: Any, encoding: str) -> Any:
    """The same for any record that is made of records, tuples and strings; itself where nothing in it changes, as
    with most of thousands."""
    if value is None or isinstance(value, int):
        return value
    if isinstance(value, str):
        return plain(value, encoding)
    if isinstance(value, tuple):
        parts = [plain_record(part, encoding) for part in value]
        if all(map(operator.is_, parts, value)):
            return value
        return Place(*parts) if isinstance(value, Place) else tuple(parts)
    if not dataclasses.is_dataclass(value) or isinstance(value, type):
        return value
    changed = {}
    for name in _shown_fields(type(value)):
        before = getattr(value, name)
        after = plain_record(before, encoding)
        if after is not before:
            changed[name] = after
    return dataclasses.replace(value, **changed) if changed else value


@cache
def _shown_fields(record: type[Any]) -> tuple[str, ...]:
    names = tuple(field.name for field in dataclasses.fields(record))
    return tuple(name for name in names if name != "source") if record is Problem else names


def _shortened(word: re.Match[str]) -> str:
    text = word.group()
    return f"{text[:_KEPT_OF_LONG_WORD]}...{text[-_KEPT_OF_LONG_WORD:]}"


def _carries(encoding: str, character: str) -> bool:
    try:
        character.encode(encoding)
    except (UnicodeEncodeError, LookupError):
        return False
    return True


def _in_ascii(character: str) -> str:
    known = _SPELLED_IN_ASCII.get(character)
    if known is not None:
        return known
    apart = unicodedata.normalize("NFKD", character)
    return "".join(part for part in apart if part.isascii() and part.isprintable()).strip() or "?"
