"""The elements of a picture: shapes, text and groups as SVG, each written the same way every time.

Takes coordinates in pixels and any string as text; gives well-formed SVG in which text from outside is text. Characters
that XML cannot carry become the replacement character.
"""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Iterable, Iterator, Sequence
from contextlib import contextmanager
from xml.sax.saxutils import escape

_NOT_IN_XML = re.compile("[^\t\n\r\x20-\ud7ff\ue000-\ufffd\U00010000-\U0010ffff]")
#: Characters that would turn the reading direction of what follows.
_TURNING = re.compile("[\u202a-\u202e\u2066-\u2069\u200e\u200f\u061c]")
#: The width of a letter of the sans serif types in use, in shares of the type size; capitals and figures are wider.
_NARROW, _WIDE, _FULL = 0.52, 0.66, 1.0

Point = tuple[float, float]


def escaped(text: str) -> str:
    """Text for the content of an element or a quoted attribute."""
    harmless = _NOT_IN_XML.sub("\ufffd", _TURNING.sub("\ufffd", text))
    return escape(harmless, {'"': "&quot;", "\n": " ", "\t": " ", "\r": " "})


def number(value: float) -> str:
    """A coordinate to a ten thousandth of a pixel, without idle zeros."""
    written = f"{value:.4f}".rstrip("0").rstrip(".")
    return "0" if written in ("", "-0") else written


def text_width(text: str, size: float) -> float:
    """About how wide a text is set in this size; rather too much than too little."""
    return size * sum(map(_letter_width, text))


def _letter_width(letter: str) -> float:
    if unicodedata.east_asian_width(letter) in "WF":
        return _FULL
    if unicodedata.combining(letter):
        return 0
    return _WIDE if letter.isupper() or letter.isdigit() or letter in "mwMW%+" else _NARROW


def fitted(text: str, room: float, size: float) -> str:
    """As much of the text as there is room for, with three points where something is left out; perhaps nothing."""
    if text_width(text, size) <= room:
        return text
    kept = text
    while kept and text_width(f"{kept}…", size) > room:
        kept = kept[:-1]
    return f"{kept.rstrip()}…" if kept else ""


def wrapped(text: str, room: float, size: float) -> list[str]:
    """The words of a text in lines; a word that is too long for any line is cut short."""
    lines: list[str] = []
    for word in text.split():
        longer = f"{lines[-1]} {word}" if lines else word
        if lines and text_width(longer, size) <= room:
            lines[-1] = longer
        else:
            lines.append(fitted(word, room, size))
    return lines


class Canvas:
    def __init__(self) -> None:
        self._parts: list[str] = []

    def render(self) -> str:
        return "".join(f"{part}\n" for part in self._parts)

    @contextmanager
    def group(self, title: str | None = None, **attributes: str | float) -> Iterator[None]:
        self._parts.append(f"<g{_attributes(attributes)}>")
        if title is not None:
            self._parts.append(f"<title>{escaped(title)}</title>")
        yield
        self._parts.append("</g>")

    def line(self, x1: float, y1: float, x2: float, y2: float, **attributes: str | float) -> None:
        self._add("line", {"x1": x1, "y1": y1, "x2": x2, "y2": y2, **attributes})

    def rect(self, x: float, y: float, width: float, height: float, **attributes: str | float) -> None:
        self._add("rect", {"x": x, "y": y, "width": width, "height": height, **attributes})

    def circle(self, x: float, y: float, radius: float, **attributes: str | float) -> None:
        self._add("circle", {"cx": x, "cy": y, "r": radius, **attributes})

    def polyline(self, points: Iterable[Point], **attributes: str | float) -> None:
        self._add("polyline", {"points": _points(points), "fill": "none", **attributes})

    def polygon(self, points: Iterable[Point], **attributes: str | float) -> None:
        self._add("polygon", {"points": _points(points), **attributes})

    def text(self, x: float, y: float, text: str, size: float, **attributes: str | float) -> None:
        """``y`` is the base line. The direction of reading is that of the text's own letters."""
        known = {"x": x, "y": y, "font_size": size, "unicode_bidi": "plaintext", **attributes}
        self._parts.append(f"<text{_attributes(known)}>{escaped(text)}</text>")

    def arrow(self, x1: float, y: float, x2: float, **attributes: str | float) -> None:
        """A level arrow from one place to another."""
        back = -4 if x2 > x1 else 4
        self.line(x1, y, x2, y, **attributes)
        self.polyline([(x2 + back, y - 3), (x2, y), (x2 + back, y + 3)], **attributes)

    def _add(self, element: str, attributes: dict[str, str | float]) -> None:
        self._parts.append(f"<{element}{_attributes(attributes)}/>")


def _attributes(attributes: dict[str, str | float]) -> str:
    return "".join(f' {name.replace("_", "-")}="{_value(value)}"' for name, value in attributes.items())


def _value(value: str | float) -> str:
    return escaped(value) if isinstance(value, str) else number(value)


def _points(points: Iterable[Point] | Sequence[Point]) -> str:
    return " ".join(f"{number(x)},{number(y)}" for x, y in points)
