"""Orders that decide what follows and are nobody's fault in themselves.

Takes a trace and a window of its time; gives the pairs of events that came in one order and would lead elsewhere in the
other: the end of a pulse against another command of its coil, the ends of two commands that hold a coil together, the
alternatives of a condition of which the first to hold counts, a watchdog that leads to another step against what it
waits for, and what a choice asks against the read at which it is taken.
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise

from seqcheck.engine.bounds import greatest_separations
from seqcheck.engine.branches import Branches
from seqcheck.engine.conditions import Alternative, Alternatives, Aspect, Literal, alternatives_of, aspect_of, holding
from seqcheck.engine.cylinders import drives_of, stands
from seqcheck.engine.trace import Change, Choice, Edge, Effect, Known, Touch, Trace, Visit, Wait
from seqcheck.machine.conditions import TermKind, terms_of
from seqcheck.machine.devices import FollowingSignal, OnValve, OutsideSignal
from seqcheck.machine.model import Machine
from seqcheck.machine.steps import CommandKind

#: What the text says of an order: where, and what the two events are.
OrderKey = tuple[object, ...]


@dataclass(frozen=True, slots=True)
class Order:
    """``strict``: at the same instant it is the other way round already."""

    key: OrderKey
    first: int
    second: int
    strict: bool = False


class Orders:
    def __init__(self, machine: Machine) -> None:
        self._machine = machine
        self._branches = Branches(machine)
        self._followed = list(_followed(machine))
        self._driven = list(_driven(machine))

    def open(self, trace: Trace, since: int, begin: int, end: int) -> list[Order]:
        """Those whose second event came from ``begin`` to before ``end`` and that can be the other way round. What was
        over before ``since`` has had its orders found."""
        found = [
            one
            for one in self._all(trace, since, begin)
            if one.first != one.second
            and trace.times[one.first] <= trace.times[one.second]
            and begin <= trace.times[one.second] < end
        ]
        rows = greatest_separations(trace.graph, ((one.second, one.first) for one in found))
        return [one for one in found if rows[one.second, one.first] >= (0 if one.strict else 1)]

    def _all(self, trace: Trace, since: int, begin: int) -> Iterator[Order]:
        yield from self._of_commands(trace, begin)
        for visit in trace.visits:
            if _is_of_late(trace, visit, since) and (len(visit.alternatives) > 1 or visit.alarm is not None):
                yield from _of_visit(trace, visit)
        for choice in trace.choices:
            if _is_of_late(trace, choice, since):
                yield from choice_orders(self._machine, trace, choice)
                if choice.left is not None and choice.alarm is not None:
                    yield from _of_alarm(trace, choice, ("choose", choice.choose.place))
        for name, condition in self._followed:
            yield from _of_condition(trace, trace.changes, name, condition, begin)
        if self._driven:
            reached = _reached(self._machine, trace, self._driven)
            for name, condition in self._driven:
                yield from _of_condition(trace, reached, name, condition, begin)

    def _of_commands(self, trace: Trace, begin: int) -> Iterator[Order]:
        """All but those that are a fault in themselves: branches that race for a coil."""
        for target, touches in trace.touches.items():
            for first, second in _in_order_since(trace, touches, begin):
                if first.event == second.event or not _differs(first, second):
                    continue
                races = first.conflicts_with(second) and self._branches.parallel(first.origin.step, second.origin.step)
                if not races:
                    named = frozenset((touch.origin.place, touch.effect) for touch in (first, second))
                    yield Order((target, named), first.event, second.event)


def _in_order_since(trace: Trace, touches: Sequence[Touch], begin: int) -> Iterator[tuple[Touch, Touch]]:
    """Each touch that came since, with the one before it, in the order of the play. (A pulse that a reset has ended is
    noted with when it would have ended: touches are only nearly in order.)"""
    late = [touch for touch in touches if trace.times[touch.event] >= begin]
    if late:
        early = [touch for touch in touches if trace.times[touch.event] < begin]
        before = max(early, key=lambda touch: (trace.times[touch.event], touch.event), default=None)
        late.sort(key=lambda touch: (trace.times[touch.event], touch.event))
        yield from pairwise([*([before] if before is not None else []), *late])


def _is_of_late(trace: Trace, wait: Wait, since: int) -> bool:
    return wait.left is None or trace.times[wait.left.event] >= since


def _differs(first: Touch, second: Touch) -> bool:
    """The end of a pulse, against anything; the ends of two commands that hold the coil together."""
    ends = [touch.effect is Effect.ENDS for touch in (first, second)]
    pulses = [touch.origin.kind is CommandKind.PULSE for touch in (first, second)]
    return all(ends) or (ends[0] and pulses[0]) or (ends[1] and pulses[1])


# Alternatives and watchdogs of a wait -----------------------------------------------------------------------------


def _of_visit(trace: Trace, visit: Visit) -> Iterator[Order]:
    what = ("step", visit.step.name)
    if len(visit.alternatives) > 1:
        for subject in {literal.term.subject for literal in visit.literals}:
            yield from (order for order, _ in passing(trace, visit, subject))
    if visit.left is None:
        return
    if visit.alarm is not None:
        yield from _of_alarm(trace, visit, what)
    if visit.alarm is None or not visit.alarm.expired:
        yield from _of_alternatives(trace, visit, what)


def _of_alternatives(trace: Trace, visit: Visit, what: tuple[object, ...]) -> Iterator[Order]:
    """The alternative that held first, against all others."""
    held = {answer.literal for answer in visit.answers}
    came = _latest(trace, [answer.seen for answer in visit.answers])
    for other in visit.alternatives:
        if set(other) != held:
            comes = _completed(trace, visit, other)
            if comes is not None and came is not None:
                yield Order((*what, "before", _named(other), _named(held)), came, comes)


def passing(trace: Trace, wait: Wait, subject: str) -> Iterator[tuple[Order, Edge]]:
    """An input that is asked, but that nobody has to see, comes and goes: whether a read falls between the two."""
    begin = trace.times[wait.entered.event]
    end = trace.times[wait.left.event] if wait.left is not None else None
    edges = trace.edges.get(subject, [])
    for number, edge in enumerate(edges):
        gone = edges[number + 1].arrived if number + 1 < len(edges) else None
        if trace.times[edge.arrived] < begin or (end is not None and trace.times[edge.arrived] > end):
            continue
        key = (subject, "passes", edge.value, wait.entered.reader)
        if edge.lost_to is not None:
            comes = edge.arrived if edge.seen is None else edge.seen
            yield Order((*key, "unseen"), edge.lost_to, comes), edge
        elif gone is not None and edge.seen is not None and any(one.edge is edge for one in wait.answers):
            yield Order((*key, "seen"), edge.seen, gone), edge
            yield Order((*key, "arrived"), edge.arrived, edges[number + 1].at), edge


def _of_alarm(trace: Trace, wait: Wait, what: tuple[object, ...]) -> Iterator[Order]:
    """The end of the watchdog's time against whatever the wait still needed, or needed last."""
    alarm = wait.alarm
    assert alarm is not None and wait.left is not None
    if not alarm.expired:
        for held in what_held(wait):
            yield Order((*what, "in time", trace.graph.events[held].subject), held, alarm.over)
        return
    late = [(_named(one), _completed(trace, wait, one, at_input=True)) for one in wait.alternatives]
    for named, event in (*late, ("dwell", wait.dwell_over), ("steady", wait.steady_over)):
        if event is not None:
            yield Order((*what, "too late", named), alarm.over, event)


def held_too_late(trace: Trace, wait: Wait) -> int | None:
    """The event by which a wait that its watchdog has ended would have come to hold; None where that is not known."""
    events = [event for one in wait.alternatives if (event := _completed(trace, wait, one, at_input=True)) is not None]
    timed = [event for event in (wait.dwell_over, wait.steady_over) if event is not None]
    first = min(events, key=lambda event: trace.times[event], default=None)
    return None if first is None else _latest(trace, [first, *timed])


def held_otherwise(trace: Trace, wait: Wait) -> Iterator[int]:
    """The events by which other alternatives than the one that held first would have come to hold, where all that is
    awaited is the condition."""
    held = {answer.literal for answer in wait.answers}
    if wait.dwell_over is None and wait.steady_over is None:
        for one in wait.alternatives:
            comes = _completed(trace, wait, one, at_input=True) if set(one) != held else None
            if comes is not None:
                yield comes


def what_held(wait: Wait) -> list[int]:
    """The events after which the wait had come to hold, seen or not."""
    held = [answer.held for answer in wait.answers]
    return held + [event for event in (wait.dwell_over, wait.steady_over) if event is not None]


def _completed(trace: Trace, wait: Wait, alternative: Alternative, at_input: bool = False) -> int | None:
    """The event by which the last literal of the alternative comes to be as wanted; None where one never does."""
    events = []
    for literal in alternative:
        if literal in wait.signals:
            events.append(wait.signals[literal][0 if at_input else 1])
            continue
        known = _next_known(trace, literal.aspect, wait.entered.event, literal.wanted)
        if known is None:
            return None
        events.append(known.held if at_input else known.seen)
    return _latest(trace, events)


def _latest(trace: Trace, events: Sequence[int]) -> int | None:
    return max(events, key=lambda event: (trace.times[event], event), default=None)


def _next_known(trace: Trace, aspect: Aspect, since: int, wanted: bool) -> Known | None:
    """What the controller knew at an event, or came to know first after it, of this value."""
    log = trace.known.get(aspect, ())
    at = bisect_right(log, trace.times[since], key=lambda known: trace.times[known.seen])
    if at and log[at - 1].value == wanted:
        return log[at - 1]
    return next((known for known in log[at:] if known.value == wanted), None)


def _named(literals: Iterable[Literal]) -> frozenset[tuple[object, ...]]:
    return frozenset((literal.term.subject, literal.wanted) for literal in literals)


# Choices ------------------------------------------------------------------------------------------------------------


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
    came = _latest(trace, [answer.seen for answer in choice.answers])
    if came is None or choice.taken is None:
        return
    for number, condition in enumerate(choice.conditions):
        for other in condition:
            comes = _completed(trace, choice, other)
            if number == choice.taken or comes is None:
                continue
            own = [answer.literal for answer in choice.answers]
            outside = any(_from_outside(machine, literal) for literal in (*other, *own))
            key = ("choose", choice.choose.place, choice.taken, number, _named(other))
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


# Conditions of the machine itself ---------------------------------------------------------------------------------


def _followed(machine: Machine) -> Iterator[tuple[str, Alternatives]]:
    for signal in machine.signals.values():
        if isinstance(signal, FollowingSignal) and len({aspect_of(term) for term in terms_of(signal.follows)}) > 1:
            yield signal.name, alternatives_of(signal.follows)


def _driven(machine: Machine) -> Iterator[tuple[str, Alternatives]]:
    """What drives cylinders that hang on several valves."""
    for cylinder in machine.cylinders.values():
        if not isinstance(cylinder.drive, OnValve):
            for out, condition in drives_of(machine, cylinder).items():
                yield f"{cylinder.name} {'out' if out else 'in'}", condition


def _reached(
    machine: Machine, trace: Trace, driven: Iterable[tuple[str, Alternatives]]
) -> Mapping[Aspect, Sequence[Change]]:
    """How the aspects that drives look at have changed, by the positions that the valves have reached."""
    terms = {literal.aspect: literal.term for _, condition in driven for one in condition for literal in one}
    changes: dict[Aspect, list[Change]] = {}
    for aspect, term in terms.items():
        valve = machine.valves[term.subject]
        value = stands(valve, valve.starts, term)
        changes[aspect] = [Change(value, 0)]
        for shift in trace.shifts:
            if shift.valve == valve.name and shift.reached in trace.happened:
                value = stands(valve, shift.to, term)
                if value != changes[aspect][-1].value:
                    changes[aspect].append(Change(value, shift.reached))
    return changes


def _of_condition(
    trace: Trace, changes_of: Mapping[Aspect, Sequence[Change]], name: str, condition: Alternatives, begin: int
) -> Iterator[Order]:
    """Two changes of which the one that comes first decides when, or whether, the condition changes."""
    aspects = {literal.aspect for one in condition for literal in one}
    changes = sorted(
        (
            (trace.times[change.event], change.event, aspect, change)
            for aspect in aspects
            for change in changes_of.get(aspect, ())
        ),
        key=lambda entry: entry[:2],
    )
    values = dict.fromkeys(aspects, False)
    for number, (_, event, aspect, change) in enumerate(changes):
        before = dict(values)
        values[aspect] = change.value
        for time, later, other, following in changes[number + 1 : number + 3]:
            if time < begin or other == aspect or later == event:
                continue
            first = _holds(condition, {**before, aspect: change.value})
            swapped = _holds(condition, {**before, other: following.value})
            if not first == swapped == _holds(condition, before):
                yield Order((name, aspect, change.value, other, following.value), event, later)


def _holds(condition: Alternatives, values: Mapping[Aspect, bool]) -> bool:
    return holding(condition, lambda literal: values[literal.aspect] == literal.wanted) is not None
