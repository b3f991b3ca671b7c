"""A sequence as a list of instructions that threads walk along.

Takes a resolved sequence; gives instructions in which loops and branches are addresses, so that where a thread
stands is a number and its loop counts.
"""

from __future__ import annotations

from dataclasses import dataclass

from seqcheck.machine.places import Place
from seqcheck.machine.steps import Item, Repeat, Sequence, Step, Together


@dataclass(frozen=True, slots=True)
class Enter:
    """Be in a step until its exit; then go on behind it."""

    step: Step


@dataclass(frozen=True, slots=True)
class Count:
    """Begin a loop; ``behind`` is where to go on when it runs no time at all."""

    times: int
    behind: int


@dataclass(frozen=True, slots=True)
class Again:
    """The end of a loop that begins at ``start``."""

    start: int


@dataclass(frozen=True, slots=True)
class Fork:
    """A thread for each branch; behind them the thread goes on at ``join``."""

    branches: tuple[int, ...]
    join: int
    place: Place


@dataclass(frozen=True, slots=True)
class BranchEnd:
    """A branch has ended; it waits for the others."""


@dataclass(frozen=True, slots=True)
class Last:
    """Behind the last step: from the start again, or the end of a ``once``."""

    once: bool


Instruction = Enter | Count | Again | Fork | BranchEnd | Last
Program = tuple[Instruction, ...]


def compile_sequence(sequence: Sequence) -> Program:
    code: list[Instruction] = []
    _compile(sequence.items, code)
    code.append(Last(sequence.once))
    return tuple(code)


def _compile(items: tuple[Item, ...], code: list[Instruction]) -> None:
    for item in items:
        match item:
            case Step():
                code.append(Enter(item))
            case Repeat(times, inner):
                start = len(code)
                code.append(Count(times, 0))
                _compile(inner, code)
                code.append(Again(start))
                code[start] = Count(times, len(code))
            case Together(branches, place):
                fork = len(code)
                code.append(BranchEnd())
                starts = []
                for branch in branches:
                    starts.append(len(code))
                    _compile(branch, code)
                    code.append(BranchEnd())
                code[fork] = Fork(tuple(starts), len(code), place)
            case _:
                raise NotImplementedError(f"{type(item).__name__} is refused before anything is played")
