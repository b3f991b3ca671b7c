"""Other texts of the same machine, or of one that differs in a known way, made from a text.

Takes a text and how to change it; gives the changed text. Works on the spelling alone: a time is one to three numbers
with a unit behind them, a device is a statement at the left margin.
"""

from __future__ import annotations

import random
import re
from collections.abc import Mapping
from fractions import Fraction

_NUMBER = r"\d+(?:\.\d+)?"
_TIME = re.compile(rf"(?<![\w.%])({_NUMBER}(?:(?: *(?:±|\+-) *|\.\.){_NUMBER}){{0,2}}) *(us|ms|s|min)(?!\w)")
_SPAN = re.compile(r"(?<![\w.])(\d+)\.\.(\d+) us(?!\w)")
_SCAN = re.compile(r"\bscan (\d+)\.\.(\d+) us(?!\w)")
_DEVICE = re.compile(r"(controller|valve|cylinder|output|signal|flag|io)\b")
_HEAD = re.compile(r"(machine|controller)\b")
_DECLARED = re.compile(r"\b(?:valve|coil|cylinder|sensor|output|signal|flag|io|step) ([^\W\d]\w*)")
_UNITS = {"us": 1, "ms": 1_000, "s": 1_000_000, "min": 60_000_000}


def scaled(text: str, factor: int) -> str:
    """Every time so many times as long."""

    def longer(found: re.Match[str]) -> str:
        unit = _UNITS[found[2]] * factor
        return re.sub(_NUMBER, lambda number: str(int(Fraction(number[0]) * unit)), found[1]) + " us"

    return _TIME.sub(longer, text)


def widened(text: str, draw: random.Random) -> str:
    """A few spans wider on one side or both; what was typical still is."""
    spans = list(_SPAN.finditer(text))
    for found in sorted(draw.sample(spans, min(len(spans), draw.randint(1, 4))), key=lambda one: -one.start()):
        least, greatest = int(found[1]), int(found[2])
        low = max(0, least - draw.choice((0, 1, 500, least // 4)))
        high = greatest + draw.choice((0, 1, 500, greatest // 4))
        text = f"{text[: found.start()]}{low}..{(least + greatest) // 2}..{high} us{text[found.end() :]}"
    return text


def other_typicals(text: str, draw: random.Random) -> str:
    """Every span with a typical time of its own, anywhere in it."""
    return _SPAN.sub(lambda found: f"{found[1]}..{draw.randint(int(found[1]), int(found[2]))}..{found[2]} us", text)


def slower_scan(text: str, by_least: int, by_greatest: int) -> str | None:
    """The same with longer rounds; None where the controller does not scan."""

    def slower(found: re.Match[str]) -> str:
        least = int(found[1]) + by_least
        return f"scan {least}..{max(least, int(found[2]) + by_greatest)} us"

    changed, count = _SCAN.subn(slower, text)
    return changed if count else None


def statements(text: str) -> list[str]:
    """The statements of a text, each with its line ends."""
    found: list[str] = []
    depth = 0
    for line in text.splitlines():
        if depth:
            found[-1] += f"\n{line}"
        else:
            found.append(line)
        depth += line.count("{") - line.count("}")
    return found


def reordered(text: str, draw: random.Random) -> str:
    """The devices declared in another order, before or behind the rest."""
    devices = [one for one in statements(text) if _DEVICE.match(one)]
    others = [one for one in statements(text) if not _DEVICE.match(one)]
    draw.shuffle(devices)
    cut = draw.randint(0, len(devices))
    return "\n".join([*devices[:cut], *others, *devices[cut:]]) + "\n"


def beside(text: str, other: str) -> str:
    """Both machines in one text, on the controller of the first; they must have no names in common."""
    return text + "\n".join(one for one in statements(other) if not _HEAD.match(one)) + "\n"


def with_head_of(text: str, other: str) -> str:
    """The second machine under the name and on the controller of the first."""
    return beside("".join(f"{one}\n" for one in statements(text) if _HEAD.match(one)), other)


def new_names(text: str, draw: random.Random) -> dict[str, str]:
    """A new name for each device and step, in an alphabetical order that has nothing to do with the old one."""
    names = list(dict.fromkeys(_DECLARED.findall(text)))
    numbers = draw.sample(range(10 * len(names)), len(names))
    return {name: f"{draw.choice('ZaéßЖ')}n{number}" for name, number in zip(names, numbers, strict=True)}


def renamed(text: str, names: Mapping[str, str]) -> str:
    """Every name by its new one; what stands behind a point (``main.s1``) too."""
    return re.sub(r"[^\W\d]\w*", lambda found: names.get(found[0], found[0]), text)
