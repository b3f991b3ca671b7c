"""Words for slips in numbers, units, spans and shares.

Takes where the parser stopped; gives a sentence and what would be right, None where the slip is no such one.
"""

from __future__ import annotations

import re
from collections.abc import Mapping

from seqcheck.language.problems import short
from seqcheck.language.situation import Situation, Words, shown

_BARE_NUMBER = re.compile(r"(?<![\w./%])[0-9]+(\.[0-9]+)?$|\.\.\s*[0-9]+(\.[0-9]+)?$")
_LAST_NUMBER = re.compile(r"([0-9.]+)(?: ?(?:us|ms|s|min))?$")
_NUMBER_AHEAD = re.compile(r"\s*([0-9]+(?:\.[0-9]+)?)")
#: What others write between the least and the most of a span.
_BETWEEN = ("-", "\u2013", "\u2014", "\u2212", "\u2026", ":", "/", "~", "to", "bis", "till", "and", "through")
_ABOUT = ("<", ">", "\u2264", "\u2265", "~", "\u2248", "max", "min", "about", "ca", "approx", "up", "under", "below")
_TYPICAL = ("typ", "typical", "typically", "nominal", "nom", "mean")
_BRACKETS = ("(", "[")
_UNITS: Mapping[str, str] = {
    **dict.fromkeys(("\u00b5s", "\u03bcs", "\u00b5", "\u03bc", "usec", "microseconds"), "us"),
    **dict.fromkeys(("msec", "msecs", "millis", "millisecond", "milliseconds", "m"), "ms"),
    **dict.fromkeys(("sec", "secs", "second", "seconds", "sek"), "s"),
    **dict.fromkeys(("minute", "minutes", "mins"), "min"),
}


def number(at: Situation) -> Words | None:
    """Other ways to write numbers."""
    behind, ahead = _LAST_NUMBER.search(at.before), _NUMBER_AHEAD.match(at.ahead)
    if at.word == "," and ahead and re.search(r"%\w+$", at.before):
        return "a comma in an address", "write a point: %Q0.1, say"
    if at.word == "," and behind and ahead and not at.gap:
        return "a comma in a number", f"write a decimal point: {short(behind[1])}.{short(ahead[1])}"
    if at.word == "." and at.before.endswith(".."):
        return "a span has two points", "write 18..28 ms, say"
    if at.word == "-" and "NUMBER" in at.accepted:
        return "a number cannot be negative", "leave the `-` out"
    if at.word == "." and "NUMBER" in at.accepted:
        return "a number begins with a digit", f"write 0.{short(ahead[1])}" if ahead else "write 0.5, say"
    return None


def span(at: Situation) -> Words | None:
    """Other ways to write spans."""
    behind, ahead = _LAST_NUMBER.search(at.before), _NUMBER_AHEAD.match(at.ahead)
    if at.word.lower() in _BETWEEN and behind and ahead and "PORTS" not in at.accepted:
        written = f"{short(behind[1])}..{short(ahead[1])}"
        unit = "%" if "PERCENT" in at.accepted and "UNIT" not in at.accepted else "ms"
        return f"a span is not written with `{at.word}`", f"write {written} {unit}, say"
    if at.word.lower() in _TYPICAL and behind:
        return "the typical time stands in the middle of a span", "write 18..22..28 ms, say"
    if at.word == "+" and at.ahead.startswith("/-"):
        return "a tolerance is not written with `+/-`", "write 30 ± 5 ms, or 30 +- 5 ms"
    if at.word == "%" and re.search(r"(±|\+-)\s*[0-9.]+$", at.before):
        return "a tolerance of a time is a time", "write 30 ± 5 ms, say"
    if "NUMBER" in at.accepted and at.word.lower() in (*_ABOUT, *_BRACKETS):
        return f"`{at.word}` cannot stand before a number", "write the time alone, or the least and the most: 8..12 ms"
    if "NUMBER" in at.accepted and at.word == '"' and _NUMBER_AHEAD.match(at.ahead):
        return "a time does not stand in quotes", "leave the quotes out"
    return None


def share(at: Situation) -> Words | None:
    """A share of the stroke without its sign, or a place where a range goes."""
    if at.accepted == {"PERCENT"}:
        return "the `%` is left out", "write it behind the number"
    if at.accepted & {"__ANON_0", "DOT"} and re.search(r"\bat\s+[0-9.]+\s*%?$", at.before):
        return "a sensor covers a range of the stroke", "write 45..50 %, say"
    return None


def ports(at: Situation) -> Words | None:
    """What a valve is."""
    if at.word == "{" and "BISTABLE" in at.accepted:
        return "nobody says where this valve goes without current", "write `spring` or `bistable`, say, before the `{`"
    if at.accepted & {"PORTS", "STRING", "ADDRESS"} != {"PORTS", "STRING", "ADDRESS"} or "SPRING" in at.accepted:
        return None
    if not re.match(r"\w", at.word):
        return None
    written = re.match(r"([2-5])\W?([23])(?!\w)", at.word + at.ahead)
    if written:
        return "ports and positions are written with `/`", f"write {written[1]}/{written[2]}"
    return "the valve's ports and positions are left out", "write 5/2, say, behind its name"


def unit(at: Situation) -> Words | None:
    """By the look of it: behind a number the parser may have gone on before it stopped."""
    if "\n" in at.gap or not (at.word.isalpha() or at.word in ("\u00b5", "\u03bc")) or "LBRACE" in at.accepted:
        return None
    if "PERCENT" in at.accepted and "UNIT" not in at.accepted:
        return None
    if not _BARE_NUMBER.search(at.before):
        return None
    meant = at.word.lower() if at.word.lower() in ("us", "ms", "s", "min") else _UNITS.get(at.word.lower())
    return f"{shown(at.word)} is no unit", f"write {meant}" if meant else "write us, ms, s or min"
