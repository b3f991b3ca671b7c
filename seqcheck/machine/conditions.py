"""Conditions: what a step waits for, what a signal follows, what a rule forbids."""

from __future__ import annotations

from collections.abc import Iterator
from enum import Enum

from seqcheck.machine.places import Place
from seqcheck.machine.records import record


class TermKind(Enum):
    """What a name in a condition turned out to be."""

    SENSOR = "sensor"
    SIGNAL = "signal"
    COIL = "coil"
    OUTPUT = "output"
    FLAG = "flag"
    STEP = "step"
    CYLINDER = "cylinder"
    VALVE = "valve"

    # Each is there once, and asked for in tables all the time; by name it takes a call for every look.
    __hash__ = object.__hash__


@record
class Term:
    """One resolved name. ``subject`` of a step is qualified (``main.raise``); ``aspect`` is the word behind the
    point for cylinders (``extended``, ``retracted``, ``moving``, ``between``) and valves (``a``, ``b``, ``centre``,
    ``shifting``, ``open``, ``closed``), else None."""

    kind: TermKind
    subject: str
    aspect: str | None
    place: Place


@record
class Not:
    part: Condition
    place: Place


@record
class AllOf:
    parts: tuple[Condition, ...]
    place: Place


@record
class AnyOf:
    parts: tuple[Condition, ...]
    place: Place


Condition = Term | Not | AllOf | AnyOf


def terms_of(condition: Condition | None) -> Iterator[Term]:
    """Every term of a condition, from left to right."""
    match condition:
        case None:
            return
        case Term():
            yield condition
        case Not(part):
            yield from terms_of(part)
        case AllOf(parts) | AnyOf(parts):
            for part in parts:
                yield from terms_of(part)
