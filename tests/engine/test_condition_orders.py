"""Which of two changes comes first, where that decides when a condition of the machine changes, or whether it does."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import pytest

from seqcheck.engine.condition_orders import condition_orders, driven, reached_positions
from seqcheck.engine.conditions import Aspect, alternatives_of, aspect_of
from seqcheck.engine.graph import EventGraph
from seqcheck.engine.trace import Change, Trace
from seqcheck.language.read import read_machine
from seqcheck.language.source import Source
from seqcheck.machine.conditions import AllOf, AnyOf, Condition, Not, Term, TermKind
from seqcheck.machine.model import Machine
from seqcheck.machine.places import Place
from tests.engine.test_player import played

PLACE = Place("a.steps", 1, 1, 1, 1)
X, Y, Z = (Term(TermKind.SENSOR, name, None, PLACE) for name in "XYZ")
ON, OFF = True, False

TWO_VALVES = """controller { scan 8..12 ms  input 2..4 ms  output 0.5..1 ms }
valve V2 5/3 closed centre { coil Y2 to a  coil Y3 to b  on 20..30 ms  off 30..45 ms }
valve V7 2/2 spring { coil Y7  on 10..15 ms  off 12..18 ms }
cylinder ram out when V2.a and V7.a in when V2.b and V7.a {
    extend 600..700 ms  retract 500..620 ms  sensor B3 at retracted  sensor B4 at extended
}
sequence main {
    every step within 10 s
    step go { on Y2  on Y7  until B4 }
    step rest { dwell 200 ms }
    step back { on Y3  on Y7  until B3 }
    step pause { dwell 200 ms }
}
"""


def orders(condition: Condition, changes: Mapping[Aspect, Sequence[Change]]) -> list[tuple[int, int]]:
    """The pairs of events that decide; event n comes at 10 n."""
    trace = Trace(EventGraph(), [10 * number for number in range(9)], {})
    return [(one.first, one.second) for one in condition_orders(trace, changes, "s", alternatives_of(condition), 0)]


@pytest.mark.parametrize(
    ("condition", "x", "y", "expected"),
    [
        # The first of the two makes an "or" hold, the last of them an "and"
        (AnyOf((X, Y), PLACE), [Change(ON, 1)], [Change(ON, 2)], [(1, 2)]),
        (AllOf((X, Y), PLACE), [Change(ON, 1)], [Change(ON, 2)], []),
        # It holds from the one to the other, or never
        (AllOf((X, Y), PLACE), [Change(ON, 1)], [Change(ON, 0), Change(OFF, 2)], [(1, 2)]),
        # It begins with the first of the two, and goes on without a break or not
        (AnyOf((X, Y), PLACE), [Change(ON, 2)], [Change(ON, 1), Change(OFF, 3)], [(1, 2), (2, 3)]),
        # It ceases to hold for a while, or does not
        (AnyOf((Not(X, PLACE), Y), PLACE), [Change(ON, 1)], [Change(ON, 2)], [(1, 2)]),
        # What one sensor does comes in its own order, and what one event brings comes at once
        (AnyOf((X, Y), PLACE), [Change(ON, 1), Change(OFF, 2)], [], []),
        (AnyOf((X, Y), PLACE), [Change(ON, 1)], [Change(ON, 1)], []),
    ],
)
def test_two_changes(
    condition: Condition, x: Sequence[Change], y: Sequence[Change], expected: list[tuple[int, int]]
) -> None:
    assert orders(condition, {aspect_of(X): x, aspect_of(Y): y}) == expected


def test_each_change_against_the_next_two() -> None:
    """All three make an "or" hold, whichever is first; once one has, the others are of no account."""
    changes = {aspect_of(term): [Change(ON, number)] for number, term in enumerate((X, Y, Z), start=1)}
    assert orders(AnyOf((X, Y, Z), PLACE), changes) == [(1, 2), (1, 3)]


def test_positions_reached_change_where_a_valve_comes_to_them_or_goes_from_them() -> None:
    machine = read_machine(Source("a.steps", TWO_VALVES))
    assert isinstance(machine, Machine), machine
    trace = played(TWO_VALVES, 2)
    reached = reached_positions(machine, trace, list(driven(machine)))
    by_name = {f"{subject}.{position}": changes for (_, subject, position), changes in reached.items()}
    assert by_name.keys() == {"V2.a", "V2.b", "V7.a"}
    for name, changes in by_name.items():
        valve, position = name.split(".")
        assert (changes[0].value, changes[0].event) == (False, 0)
        comes = [(shift.to.value, shift.reached) for shift in trace.shifts if shift.valve == valve]
        stands = "b" if valve == "V7" else "centre"
        expected = []
        for to, event in comes:
            if event in trace.happened:
                if position in (to, stands):
                    expected.append((to == position, event))
                stands = to
        assert [(one.value, one.event) for one in changes[1:]] == expected, name
        assert len(expected) >= 3
