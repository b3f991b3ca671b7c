"""What decides which branch of a choice is taken.

Takes a trace and a choice; gives what it asks against the read at which it was taken, in the order in which it came out
so, and which branch would be taken the other way round.
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

from seqcheck.engine.conditions import Aspect, Literal, holding
from seqcheck.engine.order import Order
from seqcheck.engine.trace import Choice, Known, Trace
from seqcheck.engine.wait_orders import completed, latest, named, passing
from seqcheck.machine.conditions import TermKind
from seqcheck.machine.devices import OutsideSignal
from seqcheck.machine.model import Machine


@dataclass(frozen=True, slots=True)
class ChoiceOrder:
    """``other``: the branch that would be taken were it the other way round, None for waiting first. ``outside``: a
    signal from outside is the reason, so that it is nobody's fault. ``asked``: what is asked; ``how`` it would come
    the other way round, ``{by}`` so much."""

    order: Order
    asked: str
    how: str
    other: int | None
    outside: bool


def choice_orders(machine: Machine, trace: Trace, choice: Choice) -> Iterator[Order]:
    for one in asked_in_time(machine, trace, choice):
        yield one.order


def asked_in_time(machine: Machine, trace: Trace, choice: Choice) -> Iterator[ChoiceOrder]:
    """Every order by which a choice is taken as it is."""
    yield from _at_the_first_read(trace, choice)
    if choice.left is not None and choice.left is not choice.entered and choice.taken is not None:
        yield from _while_it_stands(machine, trace, choice)
        yield from _in_passing(trace, choice)


def _at_the_first_read(trace: Trace, choice: Choice) -> Iterator[ChoiceOrder]:
    """What came before the read or comes after it, and would have the choice come out otherwise."""
    read, behind = choice.entered.event, choice.told
    logs = {aspect: trace.known.get(aspect, []) for aspect in behind}
    values = {aspect: _value_before(logs[aspect], at) for aspect, at in behind.items()}
    now = _outcome(choice, values)
    for aspect, at in behind.items():
        log, turned = logs[aspect], {**values, aspect: not values[aspect]}
        other = _outcome(choice, turned)
        if other == now:
            continue
        place = ("choose", choice.choose.place, aspect[1])
        if at:
            yield ChoiceOrder(
                Order((*place, "seen"), log[at - 1].seen, read),
                aspect[1],
                f"{aspect[1]} changing {{by}} after the read that asks it",
                other,
                False,
            )
        if at < len(log):
            yield ChoiceOrder(
                Order((*place, "not seen"), read, log[at].seen),
                aspect[1],
                f"{aspect[1]} changing {{by}} before the read that asks it",
                other,
                False,
            )


def _value_before(log: Sequence[Known], at: int) -> bool:
    if at:
        return log[at - 1].value
    return not log[0].value if log else False


def _outcome(choice: Choice, values: Mapping[Aspect, bool]) -> int | None:
    def is_so(literal: Literal) -> bool:
        if literal.term.subject in choice.asked:
            return choice.asked[literal.term.subject] == literal.wanted
        return values[literal.aspect] == literal.wanted

    return next((n for n, one in enumerate(choice.conditions) if holding(one, is_so) is not None), None)


def _while_it_stands(machine: Machine, trace: Trace, choice: Choice) -> Iterator[ChoiceOrder]:
    """What made the branch be taken, against what would have another one taken before."""
    came = latest(trace, [answer.seen for answer in choice.answers])
    if came is None or choice.taken is None:
        return
    for number, condition in enumerate(choice.conditions):
        for other in condition:
            comes = completed(trace, choice, other)
            if number == choice.taken or comes is None:
                continue
            own = [answer.literal for answer in choice.answers]
            outside = any(_from_outside(machine, literal) for literal in (*other, *own))
            key = ("choose", choice.choose.place, choice.taken, number, named(other))
            asked = " and ".join(one.term.subject for one in other)
            how = f"{asked} coming {{by}} before {' and '.join(one.term.subject for one in own)}"
            yield ChoiceOrder(Order(key, came, comes, strict=number < choice.taken), asked, how, number, outside)


def _in_passing(trace: Trace, choice: Choice) -> Iterator[ChoiceOrder]:
    """What would have another branch taken comes and goes, and no read falls between the two, or one does."""
    aspects = {literal.aspect for literal in choice.literals if literal not in choice.signals}
    for aspect in aspects:
        for order, edge in passing(trace, choice, aspect[1]):
            values = {other: _known_at(trace, other, edge.arrived) for other in aspects}
            other = _outcome(choice, {**values, aspect: edge.value})
            if order.key[-1] != "unseen":
                other = next((n for n in range(len(choice.conditions)) if n != choice.taken), None)
            how = f"{aspect[1]} {'seen' if edge.lost_to is not None else 'passing unseen'} by {{by}}"
            yield ChoiceOrder(order, aspect[1], how, other, False)


def _known_at(trace: Trace, aspect: Aspect, event: int) -> bool:
    log = trace.known.get(aspect, [])
    return _value_before(log, bisect_right(log, trace.times[event], key=lambda known: trace.times[known.seen]))


def _from_outside(machine: Machine, literal: Literal) -> bool:
    term = literal.term
    return term.kind is TermKind.SIGNAL and isinstance(machine.signals[term.subject], OutsideSignal)
