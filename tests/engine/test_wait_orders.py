"""An input that comes and goes while a wait asks for it: only what came to the controller during the wait counts."""

from __future__ import annotations

import pytest

from seqcheck.engine.conditions import Literal
from seqcheck.engine.graph import EventGraph
from seqcheck.engine.trace import Alarm, Answer, Edge, Read, Trace, Wait
from seqcheck.engine.wait_orders import alarm_orders, passing
from seqcheck.machine.conditions import Term, TermKind
from seqcheck.machine.places import Place
from seqcheck.machine.steps import Watchdog

B9 = Literal(Term(TermKind.SENSOR, "B9", None, Place("a.steps", 1, 1, 1, 1)), True)


def read(event: int) -> Read:
    return Read(event, "main.a", event, event)


def orders(wait: Wait, *edges: Edge) -> list[tuple[object, int, int]]:
    """What each order is about, and its two events; event n comes at 10 n."""
    trace = Trace(EventGraph(), [10 * number for number in range(20)], {}, edges={"B9": list(edges)})
    return [(order.key[-1], order.first, order.second) for order, _ in passing(trace, wait, "B9")]


@pytest.mark.parametrize(("arrived", "counts"), [(4, False), (5, True), (7, True), (9, True), (10, False), (14, False)])
def test_a_change_that_is_lost_counts_from_entering_to_leaving(arrived: int, counts: bool) -> None:
    """The wait goes from event 5 to event 9, both included."""
    wait = Wait(entered=read(5), alternatives=((B9,),), cycle=0, left=read(9))
    lost = Edge("B9", True, arrived - 1, arrived, None, arrived + 1)
    assert orders(wait, lost) == ([("unseen", arrived + 1, arrived)] if counts else [])


def test_a_wait_that_is_not_over_counts_all_that_comes() -> None:
    wait = Wait(entered=read(5), alternatives=((B9,),), cycle=0)
    assert orders(wait, Edge("B9", True, 13, 14, None, 15)) == [("unseen", 15, 14)]


def test_what_would_have_been_seen_is_held_against_what_takes_it_back() -> None:
    """It holds at the input and waits for a read as it goes again."""
    wait = Wait(entered=read(5), alternatives=((B9,),), cycle=0, left=read(9))
    assert orders(wait, Edge("B9", True, 5, 6, 8, 7)) == [("unseen", 7, 8)]


def test_what_was_seen_in_time_is_held_against_its_going() -> None:
    """Seen before it is gone at the input, arrived there before it goes at the sensor; only where it is the answer."""
    came, went = Edge("B9", True, 5, 6, 7), Edge("B9", False, 10, 11, 12)
    wait = Wait(entered=read(5), alternatives=((B9,),), cycle=0, left=read(9))
    assert orders(wait, came, went) == []
    wait.answers = (Answer(B9, 7, 6, came),)
    assert orders(wait, came, went) == [("seen", 7, 11), ("arrived", 6, 10)]
    assert orders(wait, came) == []


def test_what_came_too_late_for_a_watchdog_is_held_against_it_as_it_came_to_the_input() -> None:
    """Its time is over at event 6; the signal holds at the input with event 7, and is seen with event 8."""
    signal = Literal(Term(TermKind.SIGNAL, "part", None, B9.term.place), True)
    alarm = Alarm(Watchdog(60, "main.lost", B9.term.place), 6, 9, expired=True)
    wait = Wait(entered=read(5), alternatives=((signal,),), cycle=0, left=read(9), alarm=alarm)
    wait.signals[signal] = (7, 8)
    trace = Trace(EventGraph(), [10 * number for number in range(20)], {})
    assert [(one.first, one.second) for one in alarm_orders(trace, wait, ("step", "main.a"))] == [(6, 7)]
