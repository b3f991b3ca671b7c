"""When a condition of the machine itself held in a play.

Takes a trace and a condition; gives its spells by the events that begin and end them.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from itertools import groupby
from operator import itemgetter

from seqcheck.engine.conditions import Alternatives, Aspect, holding
from seqcheck.engine.trace import Change, Trace
from seqcheck.machine.conditions import TermKind
from seqcheck.machine.records import record


@record
class Holds:
    """Since the event ``begin``, to ``end``; None where the play ended before. ``begun_by_read``, ``ended_by_read``:
    whether that is what a read does, not what it sees before it does anything at the same event. ``goes_on``: had what
    begins it come before what ended the one before, it would be one with that."""

    begin: int
    end: int | None
    begun_by_read: bool = False
    ended_by_read: bool = False
    goes_on: bool = False


def spells_of_condition(trace: Trace, condition: Alternatives, instants: bool = False) -> list[Holds]:
    """When a condition of the machine itself held, by the change that made it so and the one that ended it. What is so
    for an instant of no length is not so, unless ``instants`` are asked for, too."""
    aspects = {literal.aspect for one in condition for literal in one}
    values = dict.fromkeys(aspects, False)
    found: list[Holds] = []
    begun: tuple[int, bool] | None = (0, False) if holds_by(condition, values) else None
    changes = sorted(
        (
            ((trace.times[change.event], change.event, _by_the_read(aspect, history, number)), aspect, change.value)
            for aspect in aspects
            for history in (trace.changes.get(aspect, ()),)
            for number, change in enumerate(history)
        ),
        key=itemgetter(0),
    )
    goes_on, before_the_end = False, None
    for (_, event, by_read), together in groupby(changes, key=itemgetter(0)):
        before, now = dict(values), {aspect: value for _, aspect, value in together}
        values.update(now)
        holds = holds_by(condition, values)
        if holds and begun is None:
            begun = event, by_read
            goes_on = before_the_end is not None and holds_by(condition, {**before_the_end, **now})
        elif not holds and begun is not None:
            if event != begun[0] or instants:
                found.append(Holds(begun[0], event, begun[1], by_read, goes_on))
            begun, before_the_end = None, before
        else:
            before_the_end = None
    return found if begun is None else [*found, Holds(begun[0], None, begun[1], goes_on=goes_on)]


def _by_the_read(aspect: Aspect, history: Sequence[Change], number: int) -> bool:
    """A step, a flag, or a signal from outside that is let go as soon as it has been seen."""
    again = number > 0 and history[number - 1].event == history[number].event
    return aspect[0] in (TermKind.STEP, TermKind.FLAG) or again


def holds_by(condition: Alternatives, values: Mapping[Aspect, bool]) -> bool:
    return holding(condition, lambda literal: values[literal.aspect] == literal.wanted) is not None
