"""When a condition of the machine itself changes, where the first of several changes decides.

Takes the conditions that signals follow and that drive cylinders; gives pairs of changes of which the one that comes
first decides when, or whether, the condition changes.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence

from seqcheck.engine.conditions import Alternatives, Aspect, alternatives_of, aspect_of, holding
from seqcheck.engine.cylinders import drives_of, stands
from seqcheck.engine.order import Order
from seqcheck.engine.trace import Change, Trace
from seqcheck.machine.conditions import terms_of
from seqcheck.machine.devices import FollowingSignal, OnValve
from seqcheck.machine.model import Machine


def followed(machine: Machine) -> Iterator[tuple[str, Alternatives]]:
    for signal in machine.signals.values():
        if isinstance(signal, FollowingSignal) and len({aspect_of(term) for term in terms_of(signal.follows)}) > 1:
            yield signal.name, alternatives_of(signal.follows)


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
