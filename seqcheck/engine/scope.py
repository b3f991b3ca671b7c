"""What cannot be examined, for all that the language can say it.

Takes a machine; gives the places at which it asks for too much, as problems. Nothing is skipped silently: a machine
that comes through here is analysed whole.
"""

from __future__ import annotations

from seqcheck.engine.conditions import count_of
from seqcheck.engine.knowledge import asked_conditions
from seqcheck.engine.plant import looked_at
from seqcheck.machine.findings import Problem
from seqcheck.machine.model import Machine

#: A condition may hold in so many different ways.
MOST_ALTERNATIVES = 64


def outside_scope(machine: Machine) -> tuple[Problem, ...]:
    """A problem for each condition with more alternatives than can be told apart, in the order of the text."""
    found = [
        one.place
        for one in (*asked_conditions(machine), *looked_at(machine))
        if max(count_of(one, True), count_of(one, False)) > MOST_ALTERNATIVES
    ]
    return tuple(
        Problem(
            place,
            f"this condition can hold in more than {MOST_ALTERNATIVES} different ways",
            None,
            "split it: let a signal or a flag stand for a part of it",
        )
        for place in sorted(set(found))
    )
