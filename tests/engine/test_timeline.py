"""Global time: what is due at one instant comes by its order, what is called off does not, delays go by their names."""

from __future__ import annotations

from itertools import permutations

import pytest

from seqcheck.engine.graph import Event
from seqcheck.engine.timeline import Order, Timeline, given, typical
from seqcheck.machine.time import Span


def event_at(timeline: Timeline, time: int) -> int:
    return timeline.event(Event("event", str(time)), timeline.fixed(0, time))


def come(timeline: Timeline) -> list[int]:
    """The events in the order in which they come."""
    found = []
    while (number := timeline.next()) is not None:
        found.append(number)
    return found


@pytest.mark.parametrize("orders", list(permutations((Order.SEEN, Order.MARK, Order.WATCHDOG))))
def test_what_one_event_brings_is_done_in_its_order_however_it_was_scheduled(orders: tuple[Order, ...]) -> None:
    timeline, done = Timeline(typical), list[Order]()
    number = event_at(timeline, 10)
    for order in orders:
        timeline.at(number, order, lambda order=order: done.append(order))  # type: ignore[misc]
    assert come(timeline) == [number]
    assert done == [Order.SEEN, Order.MARK, Order.WATCHDOG]


def test_of_two_events_at_one_instant_the_one_with_the_earlier_order_comes_first() -> None:
    """Whichever was scheduled first; an event counts by the earliest of all that it brings."""
    timeline = Timeline(typical)
    coil, arrives, watchdog = (event_at(timeline, 10) for _ in range(3))
    timeline.at(watchdog, Order.WATCHDOG, lambda: None)
    timeline.at(coil, Order.COIL, lambda: None)
    timeline.at(arrives, Order.INPUT, lambda: None)
    timeline.at(coil, Order.SEEN, lambda: None)
    assert come(timeline) == [coil, arrives, watchdog]


def test_of_the_same_order_at_one_instant_what_was_scheduled_first_comes_first() -> None:
    timeline = Timeline(typical)
    one, other = event_at(timeline, 10), event_at(timeline, 10)
    timeline.at(other, Order.MARK, lambda: None)
    timeline.at(one, Order.MARK, lambda: None)
    assert come(timeline) == [other, one]


def test_what_is_called_off_never_comes_and_is_not_due() -> None:
    timeline = Timeline(typical)
    early, late = event_at(timeline, 10), event_at(timeline, 20)
    timeline.at(early, Order.MARK, lambda: None)
    timeline.at(late, Order.MARK, lambda: None)
    assert (timeline.pending, timeline.next_time) == ([early, late], 10)
    timeline.call_off(early)
    assert (timeline.pending, timeline.next_time) == ([late], 20)
    assert come(timeline) == [late]
    assert timeline.happened == {0, late}
    assert timeline.pending == []


def test_a_delay_is_called_by_what_takes_it_whose_it_is_and_how_often_that_had_occurred_before() -> None:
    timeline = Timeline(given({("filter", "B1", 1): 4, ("filter", "B2", 0): 2}))
    span = Span(2, 3, 4)
    drawn = [timeline.delay(0, span, "filter", name) for name in ("B1", "B1", "B2", "B1")]
    assert [arc.delay for arc, _ in drawn] == [
        ("filter", "B1", 0),
        ("filter", "B1", 1),
        ("filter", "B2", 0),
        ("filter", "B1", 2),
    ]
    assert [time for _, time in drawn] == [3, 4, 2, 3]


def test_a_given_delay_is_held_within_its_span() -> None:
    draw = given({("valve", "Y1 on", 0): 1, ("valve", "Y1 on", 1): 99})
    assert [draw("valve", "Y1 on", number, Span(20, 24, 30)) for number in (0, 1, 2)] == [20, 30, 24]


def test_the_last_of_several_causes_is_one_of_them_only_where_it_always_is() -> None:
    timeline = Timeline(typical)
    early = timeline.event(Event("early", ""), timeline.delay(0, Span(1, 2, 3), "delay", "early"))
    late = timeline.event(Event("late", ""), timeline.delay(0, Span(3, 4, 5), "delay", "late"))
    wide = timeline.event(Event("wide", ""), timeline.delay(0, Span(0, 4, 8), "delay", "wide"))
    assert timeline.last_of(Event("last", ""), [early, late]) == late
    last = timeline.last_of(Event("last", ""), [late, wide])
    assert last not in (late, wide)
    assert {arc.cause for arc in timeline.graph.arcs[last]} == {late, wide}
    assert (timeline.times[last], timeline.graph.earliest[last], timeline.graph.latest[last]) == (4, 3, 8)
