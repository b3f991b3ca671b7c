"""Where a stopped piston may stand: a stop held against the marks ahead of it, in whole units of time."""

from __future__ import annotations

import pytest

from seqcheck.engine.graph import Arc, Event, EventGraph
from seqcheck.engine.regions import may_have_centred, place, regions_of
from seqcheck.engine.strokes import Region
from seqcheck.engine.trace import CoilChange, Origin, Read, Shift, Stroke, Trace
from seqcheck.machine.devices import Position
from seqcheck.machine.places import Place
from seqcheck.machine.steps import CommandKind
from seqcheck.machine.time import NO_TIME, Span

ORIGIN = Origin("main.a", Place("a.steps", 1, 1, 1, 1), CommandKind.ON, None, Read(0, "", 0, 0))

#: After the valve: off the end, by two edges of sensors, to the other end.
LEAVES, FIRST, SECOND, END = (3, 5), (10, 20), (30, 40), (50, 60)


def added(graph: EventGraph, least: int, greatest: int) -> int:
    return graph.add(Event("event", ""), (Arc(0, Span.between(least, greatest)),))


def played(graph: EventGraph, share: float) -> Trace:
    """A run in which everything takes this share of its span."""
    times = [round(least + share * (most - least)) for least, most in zip(graph.earliest, graph.latest, strict=True)]
    return Trace(graph, times, {})


#: What was played is one of the runs, and does not matter.
SHARES = pytest.mark.parametrize("share", [0, 0.5, 1])


def shift_to(to: Position, asked: int, reached: int, coil: str = "Y1", previous: Shift | None = None) -> Shift:
    return Shift("V1", to, asked, reached, CoilChange(coil, True, asked, ORIGIN), NO_TIME, previous)


def stopped(stop: tuple[int, int], share: float, out: bool = True) -> Region | None:
    """The region of a piston that sets out from its end and is driven otherwise within ``stop``."""
    graph = EventGraph()
    stroke = Stroke("clamp", out, 0, shift_to(Position.A, 0, 0), Region.exactly(0 if out else 3))
    stroke.leaves = added(graph, *LEAVES)
    indices = (1, 2, 3) if out else (2, 1, 0)
    stroke.marks = tuple(
        (index, added(graph, *mark)) for index, mark in zip(indices, (FIRST, SECOND, END), strict=True)
    )
    stroke.stands = added(graph, *stop)
    stroke.away = shift_to(Position.B, 0, stroke.stands)
    return place(played(graph, share), stroke).region


@SHARES
@pytest.mark.parametrize(
    ("stop", "region"),
    [
        ((25, 26), Region(1, 2)),
        # At the same instant as the latest passing of the one and the earliest of the other: passed, and not passed
        ((20, 30), Region(1, 2)),
        ((19, 30), Region(0, 2)),
        ((20, 31), Region(1, 3)),
        ((15, 35), Region(0, 3)),
        # Off its end for sure, or perhaps not yet
        ((5, 10), Region(0, 1)),
        ((4, 10), Region(0, 1, frozenset({0}))),
        ((4, 35), Region(0, 3, frozenset({0}))),
        # At the other end perhaps, or not yet
        ((45, 50), Region(2, 3)),
        ((45, 51), Region(2, 3, frozenset({3}))),
        ((4, 59), Region(0, 3, frozenset({0, 3}))),
        # There in every run: it was not stopped
        ((60, 70), None),
    ],
)
def test_from_the_last_mark_surely_passed_to_the_first_surely_not(
    stop: tuple[int, int], region: Region | None, share: float
) -> None:
    assert stopped(stop, share) == region
    back = None if region is None else Region(3 - region.high, 3 - region.low, frozenset(3 - r for r in region.rests))
    assert stopped(stop, share, out=False) == back


def test_where_it_stands_anyway_is_no_region_of_its_own() -> None:
    graph = EventGraph()
    stroke = Stroke("clamp", True, 0, shift_to(Position.A, 0, 0), Region.exactly(0))
    stroke.marks = ((1, added(graph, 10, 20)), (2, added(graph, 30, 40)))
    stroke.stands = added(graph, 25, 26)
    stroke.away = shift_to(Position.B, 0, stroke.stands)
    trace = played(graph, 0.5)
    trace.strokes.append(stroke)
    assert dict(regions_of(trace, {})) == {("clamp", 0): Region(1, 2)}
    stroke.stood = Region(1, 2)
    assert not dict(regions_of(trace, {}))


@SHARES
@pytest.mark.parametrize(("other", "region"), [((9, 9), Region(1, 3)), ((10, 10), Region(1, 2))])
def test_the_other_coil_may_take_over_a_return_to_centre(other: tuple[int, int], region: Region, share: float) -> None:
    """Centred after 8..10, in which the piston is before its second mark: but where the other coil is asked before that
    and turns the valve by 45 only, it may have come past that mark. At the same instant the valve has centred."""
    graph = EventGraph()
    stroke = Stroke("lift", True, 0, shift_to(Position.A, 0, 0), Region.exactly(0))
    stroke.marks = tuple((index, added(graph, *mark)) for index, mark in ((1, (4, 6)), (2, (30, 40)), (3, (50, 60))))
    stroke.away = shift_to(Position.CENTRE, 0, added(graph, 8, 10))
    stroke.stands = stroke.away.reached
    following = shift_to(Position.B, added(graph, *other), added(graph, 45, 45), "Y2", stroke.away)
    stroke.away.following = following
    assert place(played(graph, share), stroke).region == region


@SHARES
@pytest.mark.parametrize(("centred", "may"), [((8, 12), True), ((10, 12), False)])
def test_a_return_to_centre_that_was_taken_over_can_be_done_before(
    centred: tuple[int, int], may: bool, share: float
) -> None:
    """Taken over at 10: done before only if it can come before that, and not at that instant."""
    graph = EventGraph()
    before = shift_to(Position.CENTRE, 0, added(graph, *centred))
    shift = shift_to(Position.B, added(graph, 10, 10), added(graph, 20, 20), "Y2", before)
    trace = played(graph, share)
    assert not may_have_centred(trace, shift)
    before.taken_over = True
    assert may_have_centred(trace, shift) is may
