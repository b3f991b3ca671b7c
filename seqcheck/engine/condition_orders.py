"""When a condition of the machine itself changes, where the first of several changes decides.

Takes the conditions that signals follow, that drive cylinders and between which rules limit the time; gives pairs of
changes of which the one that comes first decides when, or whether, the condition changes; and, of the two conditions of
a rule, the changes of which the one that comes first decides from where to where the time counts.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence
from itertools import pairwise

from seqcheck.engine.conditions import Alternatives, Aspect, alternatives_of, aspect_of
from seqcheck.engine.cylinders import drives_of, stands
from seqcheck.engine.held import holds_by, spells_of_condition
from seqcheck.engine.order import Order
from seqcheck.engine.plant import looked_at
from seqcheck.engine.trace import Change, Trace
from seqcheck.machine.conditions import TermKind, terms_of
from seqcheck.machine.devices import FollowingSignal, OnValve
from seqcheck.machine.model import Machine
from seqcheck.machine.rules import PathLimit


def followed(machine: Machine) -> Iterator[tuple[str, Alternatives]]:
    """What signals follow, and what rules count from and to, where it has several parts."""
    conditions = [
        (signal.name, signal.follows) for signal in machine.signals.values() if isinstance(signal, FollowingSignal)
    ]
    for rule in machine.rules:
        if isinstance(rule, PathLimit):
            conditions += [(rule.text, rule.start), (rule.text, rule.end)]
    for name, condition in conditions:
        if len({aspect_of(term) for term in terms_of(condition)}) > 1:
            yield name, alternatives_of(condition)


def limited(machine: Machine) -> Iterator[tuple[str, Alternatives, Alternatives]]:
    """The two conditions between which a rule limits the time, by the rule's text."""
    for rule in machine.rules:
        if isinstance(rule, PathLimit):
            yield rule.text, alternatives_of(rule.start), alternatives_of(rule.end)


def driven(machine: Machine) -> Iterator[tuple[str, Alternatives]]:
    """What drives cylinders that hang on several valves."""
    for cylinder in machine.cylinders.values():
        if not isinstance(cylinder.drive, OnValve):
            for out, condition in drives_of(machine, cylinder).items():
                yield f"{cylinder.name} {'out' if out else 'in'}", condition


def reached_positions(
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


def condition_orders(
    trace: Trace, changes_of: Mapping[Aspect, Sequence[Change]], name: str, condition: Alternatives, begin: int
) -> Iterator[Order]:
    """Two changes of which the one that comes first decides when, or whether, the condition changes."""
    aspects = {literal.aspect for one in condition for literal in one}
    changes = _changes_in_order(trace.times, changes_of, aspects)
    values = dict.fromkeys(aspects, False)
    for number, (_, event, aspect, change) in enumerate(changes):
        before = dict(values)
        values[aspect] = change.value
        for time, later, other, following in changes[number + 1 : number + 3]:
            if time < begin or other == aspect or later == event:
                continue
            first = holds_by(condition, {**before, aspect: change.value})
            swapped = holds_by(condition, {**before, other: following.value})
            if not first == swapped == holds_by(condition, before):
                yield Order((name, aspect, change.value, other, following.value), event, later)


def _changes_in_order(
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


def watched(machine: Machine) -> list[str]:
    """The cylinders at which rules and signals look."""
    terms = {term for condition in looked_at(machine) for term in terms_of(condition)}
    return sorted({term.subject for term in terms if term.kind is TermKind.CYLINDER})


def stroke_orders(trace: Trace, cylinder: str) -> Iterator[Order]:
    """Whether a piston leaves its end, and comes to the other one, before it is stopped or turned."""
    for stroke in trace.strokes_of.get(cylinder, ()):
        if stroke.away is not None and stroke.stands is not None:
            key = (cylinder, stroke.out, stroke.away.by.origin.place)
            for which, passes in (("leaves", stroke.leaves), ("ends", stroke.end)):
                if passes is not None:
                    first, second = sorted((passes, stroke.stands), key=lambda event: (trace.times[event], event))
                    yield Order((*key, which), first, second)


def limit_orders(trace: Trace, text: str, start: Alternatives, end: Alternatives, begin: int) -> Iterator[Order]:
    """Each time that the one condition comes to hold, against the times before and after it at which the other does."""
    rises = sorted(
        (trace.times[one.begin], one.begin, which)
        for which, condition in (("from", start), ("to", end))
        for one in spells_of_condition(trace, condition, instants=True)
    )
    for (_, first, which), (time, second, other) in pairwise(rises):
        if which != other and time >= begin:
            yield Order((text, which), first, second)
