"""Where the delays of a played run come from.

A ``Draw`` takes what is drawn, whose it is, how often this pair was drawn before, and the span; it gives whole
microseconds within the span. Only ``given`` refuses: a delay that lies outside its span raises ``OutOfSpan``.
"""

from __future__ import annotations

import hashlib
from collections.abc import Callable, Mapping

from seqcheck.machine.time import Span

Draw = Callable[[str, str, int, Span], int]


class OutOfSpan(ValueError):
    """A delay that was asked for lies outside the span it is drawn from."""


def least(what: str, name: str, n: int, span: Span) -> int:
    return span.least


def typical(what: str, name: str, n: int, span: Span) -> int:
    return span.typical


def greatest(what: str, name: str, n: int, span: Span) -> int:
    return span.greatest


def at_random(seed: int) -> Draw:
    """Anywhere in the span; a delay depends on its own name and number only, not on the order of the draws."""

    def draw(what: str, name: str, n: int, span: Span) -> int:
        return span.least + _number(f"{seed}/{what}/{name}/{n}") % (span.greatest - span.least + 1)

    return draw


def at_corners(seed: int) -> Draw:
    """Either the least or the greatest of the span, by its own name and number: where bounds are met."""

    def draw(what: str, name: str, n: int, span: Span) -> int:
        return (span.least, span.greatest)[_number(f"{seed}/{what}/{name}/{n}") % 2]

    return draw


def given(mapping: Mapping[tuple[str, str, int], int], otherwise: Draw) -> Draw:
    """The delays of ``mapping`` by (what, name, n), all others from ``otherwise``. Raises ``OutOfSpan``."""

    def draw(what: str, name: str, n: int, span: Span) -> int:
        if (what, name, n) not in mapping:
            return otherwise(what, name, n, span)
        time = mapping[what, name, n]
        if not span.least <= time <= span.greatest:
            raise OutOfSpan(f"{what} {name} number {n}: {time} us is not in {span.least}..{span.greatest} us")
        return time

    return draw


def either_way(seed: int, times: Draw) -> Draw:
    """What a choice asks from outside by chance, by its own name and number; all times from ``times``."""

    def draw(what: str, name: str, n: int, span: Span) -> int:
        if what == "asks":
            return span.least + _number(f"{seed}/{name}/{n}") % (span.greatest - span.least + 1)
        return times(what, name, n, span)

    return draw


def _number(key: str) -> int:
    return int.from_bytes(hashlib.blake2b(key.encode(), digest_size=8).digest())
