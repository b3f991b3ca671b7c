"""What a hand-worked case expects, read from its own comments.

Takes the text of a case; gives its expectations. Behind a statement, separated by ``;``:

- ``# short-pulse V3 -4.5 ms possible``: this finding on this line (``no time`` where no time is involved)
- ``# kept coil-handover V2 0 ms``: this margin on this line, not broken
- ``# handover Y2 Y3 -0.5 ms overlap 0.5 ms``: this row of the handover table
- ``# way main 150 ms .. 174 ms``: the cycle of this sequence through the branch on this line

The subject of a rule, which is its own text, is written ``rule``.

On a line of its own: ``# cycle main 1905 ms .. 2374 ms`` and ``# step main.out 58.5 ms .. 107 ms`` (``.. open`` where
an outside signal leaves it open; ``wide`` behind it, and behind a way, where the bounds are safe and maybe not exact).
Refuses a comment behind a statement that is none of these: a slip is no expectation.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from decimal import Decimal

_UNITS = {"us": 1, "ms": 1000, "s": 1_000_000}
_TIME = r"-?[0-9.]+ (?:us|ms|s)"
_FINDING = re.compile(
    rf"(?P<kind>[a-z]+(?:-[a-z]+)*) (?P<subject>\S+) (?P<time>{_TIME}|no time) (?P<sure>certain|possible)"
)
_KEPT = re.compile(rf"kept (?P<kind>[a-z-]+) (?P<subject>\S+) (?P<time>{_TIME})")
_HANDOVER = re.compile(rf"handover (?P<earlier>\S+) (?P<later>\S+) (?P<gap>{_TIME}) overlap (?P<overlap>{_TIME})")
_WAY = re.compile(rf"way (?P<name>\S+) (?P<least>{_TIME}) \.\. (?P<greatest>{_TIME}|open)(?P<wide> wide)?")
_DURATION = re.compile(
    rf"# (?P<what>cycle|step) (?P<name>\S+) (?P<least>{_TIME}) \.\. (?P<greatest>{_TIME}|open)(?P<wide> wide)?"
)


@dataclass(frozen=True, slots=True, order=True)
class Found:
    """A finding; ``margin_us`` is None where no time is involved."""

    line: int
    kind: str
    subject: str
    margin_us: int | None
    certain: bool


@dataclass(frozen=True, slots=True, order=True)
class Kept:
    line: int
    kind: str
    subject: str
    margin_us: int


@dataclass(frozen=True, slots=True, order=True)
class Exchange:
    line: int
    earlier: str
    later: str
    gap_us: int
    overlap_us: int


@dataclass(frozen=True, slots=True, order=True)
class Lasts:
    name: str
    least_us: int
    greatest_us: int | None
    exact: bool


@dataclass(frozen=True, slots=True, order=True)
class Way:
    line: int
    lasts: Lasts


@dataclass(frozen=True, slots=True)
class Expectations:
    findings: frozenset[Found]
    kept: frozenset[Kept]
    handovers: frozenset[Exchange]
    ways: frozenset[Way]
    cycles: frozenset[Lasts]
    steps: frozenset[Lasts]


def microseconds(time: str) -> int:
    """``-0.5 ms`` is -500; a value finer than a microsecond is a slip of the case."""
    amount, unit = time.split(" ")
    exact = Decimal(amount) * _UNITS[unit]
    assert exact == int(exact), time
    return int(exact)


def expectations_of(text: str) -> Expectations:
    found: set[Found | Kept | Exchange | Way] = set()
    lasts: dict[str, set[Lasts]] = {"cycle": set(), "step": set()}
    for number, line in enumerate(text.splitlines(), start=1):
        statement, mark, comment = line.partition("#")
        if mark and statement.strip():
            found |= {_expectation(number, one.strip()) for one in comment.split(";")}
        elif duration := _DURATION.fullmatch(line.strip()):
            lasts[duration["what"]].add(_duration(duration))
    return Expectations(
        frozenset(one for one in found if isinstance(one, Found)),
        frozenset(one for one in found if isinstance(one, Kept)),
        frozenset(one for one in found if isinstance(one, Exchange)),
        frozenset(one for one in found if isinstance(one, Way)),
        frozenset(lasts["cycle"]),
        frozenset(lasts["step"]),
    )


def _expectation(line: int, text: str) -> Found | Kept | Exchange | Way:
    if match := _WAY.fullmatch(text):
        return Way(line, _duration(match))
    if match := _KEPT.fullmatch(text):
        return Kept(line, match["kind"], match["subject"], microseconds(match["time"]))
    if match := _HANDOVER.fullmatch(text):
        gap, overlap = microseconds(match["gap"]), microseconds(match["overlap"])
        return Exchange(line, match["earlier"], match["later"], gap, overlap)
    match = _FINDING.fullmatch(text)
    assert match is not None, f"line {line}: '{text}' is no expectation"
    margin = None if match["time"] == "no time" else microseconds(match["time"])
    return Found(line, match["kind"], match["subject"], margin, match["sure"] == "certain")


def _duration(match: re.Match[str]) -> Lasts:
    greatest = None if match["greatest"] == "open" else microseconds(match["greatest"])
    return Lasts(match["name"], microseconds(match["least"]), greatest, match["wide"] is None)
