"""When a condition of the machine itself held in a play.

Takes a trace and a condition; gives its spells by the events that begin and end them.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from itertools import groupby

from seqcheck.engine.conditions import Alternatives, Aspect, holding
from seqcheck.engine.trace import Change, Trace


@dataclass(frozen=True, slots=True)
class Holds:
    """Since the event ``begin``, to ``end``; None where the play ended before."""

    begin: int
    end: int | None


def spells_of_condition(trace: Trace, condition: Alternatives) -> list[Holds]:
    """When a condition of the machine itself held, by the change that made it so and the one that ended it. What is so
    for an instant of no length is not so."""
    aspects = {literal.aspect for one in condition for literal in one}
    values = dict.fromkeys(aspects, False)
    found: list[Holds] = []
    begin: int | None = 0 if holds_by(condition, values) else None
    for event, together in groupby(changes_in_order(trace.times, trace.changes, aspects), key=lambda entry: entry[1]):
        values.update((aspect, change.value) for _, _, aspect, change in together)
        holds = holds_by(condition, values)
        if holds and begin is None:
            begin = event
        elif not holds and begin is not None:
            if event != begin:
                found.append(Holds(begin, event))
            begin = None
    return found if begin is None else [*found, Holds(begin, None)]


def changes_in_order(
    times: Sequence[int], changes_of: Mapping[Aspect, Sequence[Change]], aspects: Iterable[Aspect]
) -> list[tuple[int, int, Aspect, Change]]:
    """By time and event."""
    return sorted(
        (
            (times[change.event], change.event, aspect, change)
            for aspect in aspects
            for change in changes_of.get(aspect, ())
        ),
        key=lambda entry: entry[:2],
    )


def holds_by(condition: Alternatives, values: Mapping[Aspect, bool]) -> bool:
    return holding(condition, lambda literal: values[literal.aspect] == literal.wanted) is not None
