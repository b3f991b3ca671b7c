"""What ends a wait, and what would have ended it instead.

Takes a trace and a wait; gives the orders by which it was left as it was: the alternative that held first against the
others, its watchdog against what it waits for, an input that comes and goes against the reads.
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Iterable, Iterator, Sequence

from seqcheck.engine.conditions import Alternative, Aspect, Literal
from seqcheck.engine.order import Order
from seqcheck.engine.trace import Edge, Known, Trace, Visit, Wait


def visit_orders(trace: Trace, visit: Visit) -> Iterator[Order]:
    # Each of what is asked is looked up, which costs about as much as a separation.
    trace.graph.work += sum(map(len, visit.alternatives))
    what = ("step", visit.step.name)
    if len(visit.alternatives) > 1:
        for subject in {literal.term.subject for literal in visit.literals}:
            yield from (order for order, _ in passing(trace, visit, subject))
    if visit.left is None:
        return
    if visit.alarm is not None:
        yield from alarm_orders(trace, visit, what)
    if not visit.expired:
        yield from _of_alternatives(trace, visit, what)


def _of_alternatives(trace: Trace, visit: Visit, what: tuple[object, ...]) -> Iterator[Order]:
    """The alternative that held first, against all others."""
    held = {answer.literal for answer in visit.answers}
    came = latest(trace, [answer.seen for answer in visit.answers])
    for other in visit.alternatives:
        if set(other) != held:
            comes = completed(trace, visit, other)
            if comes is not None and came is not None:
                yield Order((*what, "before", named(other), named(held)), came, comes)


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


def alarm_orders(trace: Trace, wait: Wait, what: tuple[object, ...]) -> Iterator[Order]:
    """The end of the watchdog's time against whatever the wait still needed, or needed last."""
    alarm = wait.alarm
    assert alarm is not None and wait.left is not None
    if not alarm.expired:
        for held in what_held(wait):
            yield Order((*what, "in time", trace.graph.events[held].subject), held, alarm.over)
        return
    late = [(named(one), completed(trace, wait, one, at_input=True)) for one in wait.alternatives]
    for which, event in (*late, ("dwell", wait.dwell_over), ("steady", wait.steady_over)):
        if event is not None:
            yield Order((*what, "too late", which), alarm.over, event)


def held_too_late(trace: Trace, wait: Wait) -> int | None:
    """The event by which a wait that its watchdog has ended would have come to hold; None where that is not known."""
    events = [event for one in wait.alternatives if (event := completed(trace, wait, one, at_input=True)) is not None]
    timed = [event for event in (wait.dwell_over, wait.steady_over) if event is not None]
    first = min(events, key=lambda event: trace.times[event], default=None)
    return None if first is None else latest(trace, [first, *timed])


def held_otherwise(trace: Trace, wait: Wait) -> Iterator[int]:
    """The events by which other alternatives than the one that held first would have come to hold, where all that is
    awaited is the condition."""
    if len(wait.alternatives) > 1 and wait.dwell_over is None and wait.steady_over is None:
        held = {answer.literal for answer in wait.answers}
        for one in wait.alternatives:
            comes = completed(trace, wait, one, at_input=True) if set(one) != held else None
            if comes is not None:
                yield comes


def what_held(wait: Wait) -> list[int]:
    """The events after which the wait had come to hold, seen or not."""
    held = [answer.held for answer in wait.answers]
    return held + [event for event in (wait.dwell_over, wait.steady_over) if event is not None]


def completed(trace: Trace, wait: Wait, alternative: Alternative, at_input: bool = False) -> int | None:
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
    return latest(trace, events)


def latest(trace: Trace, events: Sequence[int]) -> int | None:
    return max(events, key=lambda event: (trace.times[event], event), default=None)


def _next_known(trace: Trace, aspect: Aspect, since: int, wanted: bool) -> Known | None:
    """What the controller knew at an event, or came to know first after it, of this value."""
    log = trace.known[aspect]
    at = bisect_right(log, trace.times[since], key=lambda known: trace.times[known.seen])
    if log[at - 1].value == wanted:
        return log[at - 1]
    return next((known for known in log[at:] if known.value == wanted), None)


def named(literals: Iterable[Literal]) -> frozenset[tuple[object, ...]]:
    return frozenset((literal.term.subject, literal.wanted) for literal in literals)
