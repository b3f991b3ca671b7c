"""Conditions as the player reads them: terms that are wanted on or off, and whether the whole holds."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass

from seqcheck.machine.conditions import AllOf, AnyOf, Condition, Not, Term, TermKind
from seqcheck.machine.devices import Position, Valve


@dataclass(frozen=True, slots=True)
class Literal:
    """One term of a condition with every ``not`` before it counted: ``subject`` is to be ``wanted``."""

    kind: TermKind
    subject: str
    aspect: str | None
    wanted: bool


def literals_of(condition: Condition | None, wanted: bool = True) -> tuple[Literal, ...]:
    """The literals from left to right, each once."""
    match condition:
        case None:
            return ()
        case Term(kind, subject, aspect):
            return (Literal(kind, subject, aspect, wanted),)
        case Not(inner):
            return literals_of(inner, not wanted)
        case AllOf(parts) | AnyOf(parts):
            return literals_of_all(parts, wanted)


def literals_of_all(conditions: Iterable[Condition | None], wanted: bool = True) -> tuple[Literal, ...]:
    return tuple(dict.fromkeys(each for condition in conditions for each in literals_of(condition, wanted)))


def holds(condition: Condition | None, value: Callable[[Literal], bool], wanted: bool = True) -> bool:
    """Whether the condition is ``wanted``; ``value`` says of a literal whether it is as it wants to be. A condition
    that is left out holds."""
    match condition:
        case None:
            return True
        case Term(kind, subject, aspect):
            return value(Literal(kind, subject, aspect, wanted))
        case Not(inner):
            return holds(inner, value, not wanted)
        case AllOf(parts) | AnyOf(parts):
            every = isinstance(condition, AllOf) is wanted
            held = (holds(part, value, wanted) for part in parts)
            return all(held) if every else any(held)


def is_conjunction(condition: Condition | None, wanted: bool = True) -> bool:
    """Whether all of its literals are needed."""
    match condition:
        case Not(inner):
            return is_conjunction(inner, not wanted)
        case AllOf(parts) | AnyOf(parts):
            return isinstance(condition, AllOf) is wanted and all(is_conjunction(part, wanted) for part in parts)
        case _:
            return True


def stands_at(valve: Valve, aspect: str | None, position: Position) -> bool:
    """Whether a valve that stands at a position shows an aspect. A 2/2 valve is closed at ``b``, or at ``a`` where it
    is open normally."""
    closed = Position.A if valve.normally_open else Position.B
    match aspect:
        case "closed":
            return position is closed
        case "open":
            return position is not closed
        case _:
            return position.value == aspect
