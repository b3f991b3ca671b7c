"""What writes random texts: choices and times from a source of whole numbers, and the names that are given."""

from __future__ import annotations

import random
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from typing import TypeVar

from hypothesis import strategies as st
from hypothesis.strategies import DrawFn

T = TypeVar("T")

Whole = Callable[[int, int], int]
"""A whole number from the least to the greatest; the least is the plainest."""


def drawn(draw: DrawFn) -> Whole:
    """From hypothesis, which shrinks."""
    return lambda least, greatest: draw(st.integers(least, greatest))


def seeded(seed: int) -> Whole:
    return random.Random(seed).randint


@dataclass(slots=True)
class Writer:
    """Draws choices and times, and counts the names it gives."""

    whole: Whole
    faults: frozenset[str] = frozenset()
    signals: list[str] = field(default_factory=list)
    outputs: list[str] = field(default_factory=list)
    steps: int = 0

    def pick(self, *choices: T) -> T:
        return choices[self.whole(0, len(choices) - 1)]

    def shuffled(self, things: Sequence[T]) -> list[T]:
        left, order = list(things), []
        while left:
            order.append(left.pop(self.whole(0, len(left) - 1)))
        return order

    def some(self, things: Sequence[T], most: int) -> frozenset[T]:
        """One to ``most`` of them."""
        return frozenset(self.shuffled(things)[: self.whole(1, most)])

    def chance(self, percent: int) -> bool:
        """Shrinks to no."""
        return self.whole(0, 99) >= 100 - percent

    def ms(self, least: float, most: float) -> str:
        """One duration of ``least`` to ``most`` milliseconds."""
        return f"{self.whole(round(least * 1000), round(most * 1000))} us"

    def span(self, least: float, most: float, width: float) -> str:
        """A span whose least lies in ``least..most`` milliseconds, ``width`` wide at most."""
        low = self.whole(round(least * 1000), round(most * 1000))
        return f"{low}..{low + self.whole(0, round(width * 1000))} us"

    def errs(self, fault: str, percent: int) -> bool:
        """Whether a machine with this fault shows it here."""
        return fault in self.faults and self.chance(percent)

    def either(self, fault: str, safe: tuple[float, float], tight: tuple[float, float]) -> str:
        """A duration from the safe range; with that fault sometimes from the tight one."""
        return self.ms(*(tight if self.errs(fault, 50) else safe))

    def step(self, *words: str, label: str = "s") -> str:
        self.steps += 1
        return f"step {label}{self.steps} {{ {'  '.join(word for word in words if word)} }}"


def indent(lines: Sequence[str]) -> list[str]:
    return [f"    {line}" for line in lines]


def name_of(step: str) -> str:
    """The name of a step as it was written."""
    return step.split()[1]
