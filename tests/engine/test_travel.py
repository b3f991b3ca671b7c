"""Strokes planned mark by mark: what each mark is reached after, worked by hand."""

from __future__ import annotations

from seqcheck.engine.strokes import Region
from seqcheck.engine.travel import LEAVING, START, Part, Reach, Travel
from seqcheck.machine.devices import Cylinder, OnValve, Stroke
from seqcheck.machine.places import Place
from seqcheck.machine.time import NO_TIME, Span

#: The ends, and four edges of sensors.
MARKS = (0, 200_000, 300_000, 500_000, 800_000, 1_000_000)


def travel(out: bool, lag: Span = NO_TIME) -> Travel:
    """A stroke of 1000..2000 out, typically 1500; of 100..200 back, typically 150."""
    cylinder = Cylinder(
        name="lift",
        label=None,
        drive=OnValve("V1", False),
        extend=Stroke(Span(1000, 1500, 2000), False),
        retract=Stroke(Span(100, 150, 200), False),
        lag=lag,
        uneven=0,
        overrun=NO_TIME,
        starts_extended=False,
        sensors=(),
        place=Place("a.steps", 1, 1, 1, 1),
    )
    return Travel(cylinder, MARKS, out, Span(20, 25, 30))


def drawn(since: int, least: int, typical: int, greatest: int) -> Part:
    return Part(since, Span(least, typical, greatest), "mark")


def anywhere(least: int, typical: int, greatest: int) -> Part:
    """From the start of the stroke, wherever the piston stood."""
    return Part(START, Span(least, typical, greatest), "between")


def behind(mark: int, time: int) -> Part:
    """No sooner than this after a mark that was passed before."""
    return Part(mark, Span.exactly(time))


def test_what_a_part_is_counted_from_is_never_taken_for_a_mark() -> None:
    assert START < 0 and LEAVING < 0 and START != LEAVING


def test_from_an_end_by_shares_of_the_whole_and_behind_the_mark_before() -> None:
    """20, 30, 50, 80 % of the stroke; from one to the next 20, 10, 20, 30 % of the least, none before the end."""
    assert travel(out=True).from_end(0) == (
        Reach(1, (drawn(START, 200, 300, 400), behind(LEAVING, 200))),
        Reach(2, (drawn(START, 300, 450, 600), behind(0, 100))),
        Reach(3, (drawn(START, 500, 750, 1000), behind(1, 200))),
        Reach(4, (drawn(START, 800, 1200, 1600), behind(2, 300))),
        Reach(5, (drawn(START, 1000, 1500, 2000), behind(3, 0))),
    )


def test_back_from_the_other_end() -> None:
    """20, 50, 70, 80 % of the stroke back."""
    assert travel(out=False).from_end(5) == (
        Reach(4, (drawn(START, 20, 30, 40), behind(LEAVING, 20))),
        Reach(3, (drawn(START, 50, 75, 100), behind(0, 30))),
        Reach(2, (drawn(START, 70, 105, 140), behind(1, 20))),
        Reach(1, (drawn(START, 80, 120, 160), behind(2, 10))),
        Reach(0, (drawn(START, 100, 150, 200), behind(3, 0))),
    )


def test_from_between_two_marks_the_next_one_takes_up_to_its_whole_share() -> None:
    """10 % of the greatest, typically half of that; the others as from there: 20, 50, 70 %."""
    between = Region(1, 2)
    assert travel(out=True).from_between(between, between) == (
        Reach(2, (drawn(START, 0, 100, 200),)),
        Reach(3, (behind(0, 200), drawn(0, 200, 300, 400))),
        Reach(4, (behind(1, 300), drawn(0, 500, 750, 1000))),
        Reach(5, (behind(2, 0), drawn(0, 700, 1050, 1400))),
    )


def test_from_one_of_several_stretches() -> None:
    """Between 20 and 50 %, as played behind 30 %. To 30 %: none if it is passed, or its whole 200. To 50 % from behind
    30 %: up to 400; from before it 200 + 400. To 80 %: from 50 % at least 300; at most 200 + 1000. To the end: from
    50 % at least 500; at most 200 + 1400."""
    assert travel(out=True).from_between(Region(1, 3), Region(2, 3)) == (
        Reach(2, (anywhere(0, 0, 200),)),
        Reach(3, (drawn(START, 0, 200, 400),), only_if=True),
        Reach(3, (behind(0, 0), behind(1, 0), anywhere(0, 200, 600))),
        Reach(4, (behind(2, 300), drawn(1, 300, 450, 600), anywhere(300, 300, 1200))),
        Reach(5, (behind(3, 0), drawn(1, 500, 750, 1000), anywhere(500, 500, 1600))),
    )


def test_back_from_one_of_several_stretches() -> None:
    """Between 80 and 30 %, as played below 50 %. To 50 %: at most its 60. To 30 %: 40, or 60 + 40. To 20 %: at least 10
    from there, at most 60 + 60. To the end: at least 30 from there, at most 60 + 100."""
    assert travel(out=False).from_between(Region(2, 4), Region(2, 3)) == (
        Reach(3, (anywhere(0, 0, 60),)),
        Reach(2, (drawn(START, 0, 20, 40),), only_if=True),
        Reach(2, (behind(0, 0), behind(1, 0), anywhere(0, 20, 100))),
        Reach(1, (behind(2, 10), drawn(1, 10, 15, 20), anywhere(10, 10, 120))),
        Reach(0, (behind(3, 0), drawn(1, 30, 45, 60), anywhere(30, 30, 160))),
    )


def test_where_it_may_not_have_left_its_end_yet() -> None:
    """It comes off within 700, which leaves it 1300 of the greatest 2000 for the way: it is at the mark at 20 % after
    700 + 260 at most, at 30 % after 1090, at 50 % after 1350, at 80 % after 1740. Of the least 1000 it has 300 for the
    way, so that it takes 30 from 20 to 30 %. Typically as from the end."""
    assert travel(out=True, lag=Span(600, 650, 700)).from_between(Region(0, 1, frozenset({0})), Region.exactly(0)) == (
        Reach(1, (drawn(START, 0, 300, 400),), only_if=True),
        Reach(1, (behind(0, 0), anywhere(0, 300, 960))),
        Reach(2, (behind(1, 30), drawn(0, 30, 150, 200), anywhere(30, 450, 1090))),
        Reach(3, (behind(2, 60), drawn(0, 90, 450, 600), anywhere(90, 750, 1350))),
        Reach(4, (behind(3, 90), drawn(0, 180, 900, 1200), anywhere(180, 1200, 1740))),
        Reach(5, (behind(4, 0), drawn(0, 240, 1200, 1600), anywhere(240, 1500, 2000))),
    )
