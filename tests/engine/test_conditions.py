"""How many alternatives a condition has, counted without making them, and which of them holds."""

from __future__ import annotations

import pytest

from seqcheck.engine.conditions import alternatives_of, count_of, holding, literals_of
from seqcheck.machine.conditions import AllOf, AnyOf, Condition, Not, Term, TermKind
from seqcheck.machine.places import Place

PLACE = Place("a.steps", 1, 1, 1, 1)


def term(name: str) -> Term:
    return Term(TermKind.SENSOR, name, None, PLACE)


def every(*parts: Condition) -> AllOf:
    return AllOf(parts, PLACE)


def either(*parts: Condition) -> AnyOf:
    return AnyOf(parts, PLACE)


A, B, C, D, E = (term(name) for name in "ABCDE")


@pytest.mark.parametrize(
    ("condition", "true", "false"),
    [
        (A, 1, 1),
        (every(A, B, C), 1, 3),
        (either(A, B, C), 3, 1),
        (Not(every(A, B, C), PLACE), 3, 1),
        (Not(either(A, B, C), PLACE), 1, 3),
        # 2 * 3 ways to be true; false when the first two are, or the other three
        (every(either(A, B), either(C, D, E)), 6, 2),
        (either(every(A, B), every(C, D, E)), 2, 6),
        (every(A, either(B, C)), 2, 2),
    ],
)
def test_alternatives_are_counted_as_they_are_made(condition: Condition, true: int, false: int) -> None:
    assert (count_of(condition), count_of(condition, False)) == (true, false)
    assert (len(alternatives_of(condition)), len(alternatives_of(condition, False))) == (true, false)


def test_the_count_stops_where_it_would_be_useless() -> None:
    pair = either(A, B)
    assert count_of(every(*[pair] * 30)) == 1 << 30
    assert count_of(every(*[pair] * 40)) == 1 << 30
    assert count_of(every(*[pair] * 20)) == 1 << 20


def test_each_literal_once_in_order() -> None:
    alternatives = alternatives_of(every(A, either(B, C)))
    assert [(literal.term.subject, literal.wanted) for literal in literals_of(alternatives)] == [
        ("A", True),
        ("B", True),
        ("C", True),
    ]
    assert literals_of(alternatives_of(None)) == ()
    assert literals_of(()) == ()


def test_what_can_never_be_has_no_alternative() -> None:
    assert alternatives_of(every(A, Not(A, PLACE))) == ()
    assert holding(alternatives_of(every(A, Not(A, PLACE))), lambda literal: True) is None


def test_the_first_that_holds() -> None:
    alternatives = alternatives_of(either(every(A, B), C))
    assert holding(alternatives, lambda literal: literal.term.subject != "B") == alternatives[1]
    assert holding(alternatives, lambda literal: True) == alternatives[0]
    assert holding(alternatives, lambda literal: literal.term.subject == "A") is None
