"""Conditions as alternatives: a condition holds as soon as every literal of one of its alternatives does.

Takes conditions of the model; gives their alternatives, those that another one contains left out. Refuses nothing; how
many alternatives there are is for ``scope`` to look at.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from itertools import product

from seqcheck.machine.conditions import AllOf, AnyOf, Condition, Not, Term, TermKind
from seqcheck.machine.records import record

#: What a term is about, whoever names it where: kind, subject, aspect.
Aspect = tuple[TermKind, str, str | None]


@record
class Literal:
    """A term, and whether it has to be true or false."""

    term: Term
    wanted: bool

    @property
    def aspect(self) -> Aspect:
        return aspect_of(self.term)


Alternative = tuple[Literal, ...]
Alternatives = tuple[Alternative, ...]


def aspect_of(term: Term) -> Aspect:
    return term.kind, term.subject, term.aspect


def alternatives_of(condition: Condition | None, wanted: bool = True) -> Alternatives:
    """The alternatives under which the condition is true (or false: ``wanted``); for no condition the empty one, which
    always holds. None at all: it can never be so."""
    if condition is None:
        return ((),)
    found: dict[frozenset[tuple[Aspect, bool]], Alternative] = {}
    for parts in _alternatives(condition, wanted):
        named = {(literal.aspect, literal.wanted): literal for literal in reversed(parts)}
        if not any((aspect, not value) in named for aspect, value in named):
            found.setdefault(frozenset(named), tuple(reversed(named.values())))
    return tuple(one for named, one in found.items() if not any(other < named for other in found))


def _alternatives(condition: Condition, wanted: bool) -> Iterator[Alternative]:
    match condition:
        case Term():
            yield (Literal(condition, wanted),)
        case Not(part):
            yield from _alternatives(part, not wanted)
        case AllOf(parts) | AnyOf(parts):
            if isinstance(condition, AllOf) == wanted:
                for combined in product(*(tuple(_alternatives(part, wanted)) for part in parts)):
                    yield tuple(literal for one in combined for literal in one)
            else:
                for part in parts:
                    yield from _alternatives(part, wanted)


def count_of(condition: Condition, wanted: bool = True) -> int:
    """How many alternatives there are before any is left out, without making them."""
    match condition:
        case Term():
            return 1
        case Not(part):
            return count_of(part, not wanted)
        case AllOf(parts) | AnyOf(parts):
            counts = [count_of(part, wanted) for part in parts]
            if isinstance(condition, AllOf) != wanted:
                return sum(counts)
            total = 1
            for count in counts:
                total = min(total * count, 1 << 30)
            return total


def literals_of(alternatives: Alternatives) -> tuple[Literal, ...]:
    """Every literal once, in order."""
    if len(alternatives) == 1 and len(alternatives[0]) < 2:
        return alternatives[0]
    return tuple(dict.fromkeys(literal for one in alternatives for literal in one))


def holding(alternatives: Alternatives, value_of: Callable[[Literal], bool]) -> Alternative | None:
    """The first alternative whose literals are all as wanted; ``value_of`` tells of a literal whether it is."""
    return next((one for one in alternatives if all(value_of(literal) for literal in one)), None)
