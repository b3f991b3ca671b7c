"""Times, shares, conditions and commands in the words of the language, one spelling for one meaning.

Takes records of the model; gives text in which what means the same reads the same, however it was written.
"""

from __future__ import annotations

from collections.abc import Iterable

from seqcheck.language.durations import format_duration
from seqcheck.machine.conditions import AllOf, AnyOf, Condition, Not, Term
from seqcheck.machine.devices import Stroke
from seqcheck.machine.steps import Command, Watchdog
from seqcheck.machine.time import WHOLE_SHARE, Span


def spelled_span(span: Span) -> str:
    """``18..28 ms``; with the typical time where that is not the middle; each with its unit where units differ."""
    if span.least == span.greatest:
        return format_duration(span.least)
    times = [span.least, span.typical, span.greatest]
    if span == Span.between(span.least, span.greatest):
        del times[1]
    written = [format_duration(time).split(" ") for time in times]
    if len({unit for _, unit in written}) > 1:
        return "..".join(" ".join(one) for one in written)
    return f"{'..'.join(number for number, _ in written)} {written[0][1]}"


def spelled_stroke(stroke: Stroke) -> str:
    return f"{spelled_span(stroke.time)} from coil" if stroke.from_coil else spelled_span(stroke.time)


def spelled_share(millionths: int) -> str:
    """``45 %``, ``4.25 %``."""
    whole, rest = divmod(millionths * 100, WHOLE_SHARE)
    part = f".{rest:06d}".rstrip("0") if rest else ""
    return f"{whole}{part} %"


def spelled_condition(condition: Condition) -> str:
    """Parts of ``and`` and ``or`` sorted, each once, without needless parentheses or doubled ``not``."""
    return _spelled(_plain(condition))


def spelled_command(command: Command) -> str:
    words = f"{command.kind.value} {command.target}"
    return words if command.duration is None else f"{words} {format_duration(command.duration)}"


def spelled_watchdog(watchdog: Watchdog) -> str:
    within = format_duration(watchdog.within)
    return within if watchdog.target is None else f"{within} else {watchdog.target}"


_Plain = str | tuple[str, "tuple[_Plain, ...]"]


def _plain(condition: Condition) -> _Plain:
    """A name, or a word with its parts: ``("and", (..))``, ``("or", (..))``, ``("not", (one,))``."""
    match condition:
        case Term(_, subject, aspect):
            return subject if aspect is None else f"{subject}.{aspect}"
        case Not(part):
            inner = _plain(part)
            return inner[1][0] if isinstance(inner, tuple) and inner[0] == "not" else ("not", (inner,))
        case AllOf(parts):
            return _joined("and", map(_plain, parts))
        case AnyOf(parts):
            return _joined("or", map(_plain, parts))


def _joined(word: str, parts: Iterable[_Plain]) -> _Plain:
    flat: set[_Plain] = set()
    for part in parts:
        flat.update(part[1] if isinstance(part, tuple) and part[0] == word else (part,))
    if len(flat) == 1:
        return flat.pop()
    return word, tuple(sorted(flat, key=_spelled))


def _spelled(plain: _Plain) -> str:
    if isinstance(plain, str):
        return plain
    word, parts = plain
    if word == "not":
        inner = _spelled(parts[0])
        return f"not {inner}" if isinstance(parts[0], str) else f"not ({inner})"
    return f" {word} ".join(_within(word, part) for part in parts)


def _within(word: str, part: _Plain) -> str:
    """``and`` binds closer than ``or``."""
    looser = isinstance(part, tuple) and part[0] == "or" and word == "and"
    return f"({_spelled(part)})" if looser else _spelled(part)
