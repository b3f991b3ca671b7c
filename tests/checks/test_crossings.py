"""Spells that go from run to run, on small graphs of states whose sums are done by hand."""

from __future__ import annotations

from dataclasses import replace

from seqcheck.checks.crossings import Crossings, Edge
from seqcheck.machine.findings import Duration

BEGINS: Edge = (0, 1, None, None)
SHORT: Edge = (1, 2, None, 0)
LONG: Edge = (1, 2, None, 1)
ENDS: Edge = (2, 3, None, None)


def forked() -> Crossings:
    """Begins 10..20 before state 1, goes to state 2 in 5..8 or in 50..60, ends 3..4 behind it."""
    found = Crossings()
    found.part(BEGINS).opens = Duration(10, 15, 20)
    found.part(SHORT).passes = Duration(5, 6, 8)
    found.part(LONG).passes = Duration(50, 55, 60)
    found.part(ENDS).closes = Duration(3, 3, 4)
    return found


def test_the_least_goes_the_short_way_and_the_greatest_the_long_one() -> None:
    """10 + 5 + 3 and 20 + 60 + 4."""
    assert forked().duration(30) == Duration(18, 30, 84)


def test_through_one_way_only() -> None:
    """10 + 50 + 3 and 20 + 60 + 4; 10 + 5 + 3 and 20 + 8 + 4."""
    assert forked().duration(70, lambda edge: edge == LONG) == Duration(63, 70, 84)
    assert forked().duration(30, lambda edge: edge == SHORT) == Duration(18, 30, 32)


def test_the_way_on_which_it_ends_counts_and_that_on_which_it_begins_does_not() -> None:
    """It begins behind the choice that leads there."""
    assert forked().duration(30, lambda edge: edge == ENDS) == Duration(18, 30, 84)
    assert forked().duration(30, lambda edge: edge == BEGINS) is None
    assert forked().longest(lambda edge: edge == BEGINS) is None


def test_one_that_lies_within_a_run_counts_without_a_way() -> None:
    found = forked()
    found.part(SHORT).within = Duration(7, 8, 90)
    assert found.duration(30) == Duration(7, 30, 90)
    assert found.duration(30, lambda edge: edge == SHORT) == Duration(18, 30, 32)


def test_several_beginnings_and_ends() -> None:
    """Also from 2 to 2 + 3..4, and begun 1..100 before state 2: 1 + 3 at least, 100 + 4 at most."""
    found = forked()
    found.part((4, 2, None, None)).opens = Duration(1, 50, 100)
    found.part((2, 5, None, None)).closes = Duration(6, 6, 6)
    assert found.duration(30) == Duration(4, 30, 106)


def test_in_a_row_of_states_all_are_added_up() -> None:
    """1 + 2 + 4 + 8 + 16, and 10 times as much."""
    found = Crossings()
    found.part((5, 4, None, None)).opens = Duration(1, 1, 10)
    found.part((4, 3, None, None)).passes = Duration(2, 2, 20)
    found.part((3, 2, None, None)).passes = Duration(4, 4, 40)
    found.part((2, 1, None, None)).passes = Duration(8, 8, 80)
    found.part((1, 0, None, None)).closes = Duration(16, 16, 160)
    assert found.duration(31) == Duration(31, 31, 310)


def test_round_and_round_leaves_the_greatest_open() -> None:
    found = forked()
    found.part((2, 1, None, 0)).passes = Duration(7, 8, 9)
    assert found.duration(30) == Duration(18, 30, None)


def test_a_part_that_is_open_leaves_the_greatest_open() -> None:
    for edge in (BEGINS, LONG, ENDS):
        found = forked()
        part = found.part(edge)
        if part.opens is not None:
            part.opens = Duration(10, 15, None)
        elif part.passes is not None:
            part.passes = Duration(50, 55, None)
        else:
            part.closes = Duration(3, 3, None)
        assert found.duration(30) == Duration(18, 30, None)


def test_the_short_way_stays_closed_when_the_long_one_is_open() -> None:
    found = forked()
    found.part(LONG).passes = Duration(50, 55, None)
    assert found.duration(30, lambda edge: edge == SHORT) == Duration(18, 30, 32)


def test_no_time_at_all_is_a_time() -> None:
    """Begins at state 1 itself and ends at it."""
    found = Crossings()
    found.part(BEGINS).opens = Duration(0, 0, 0)
    found.part((1, 2, None, None)).closes = Duration(0, 0, 0)
    assert found.duration(0) == Duration(0, 0, 0)


def test_what_never_ends_or_never_begins_is_no_spell() -> None:
    assert Crossings().duration(0) is None
    assert Crossings().longest() is None
    found = Crossings()
    found.part(BEGINS).opens = Duration(1, 1, 1)
    found.part(SHORT).passes = Duration(1, 1, 1)
    assert found.duration(0) is None
    found = Crossings()
    found.part(ENDS).closes = Duration(1, 1, 1)
    assert found.duration(0) is None


def test_the_longest_names_its_way() -> None:
    longest = forked().longest()
    assert longest is not None
    assert (longest.time, longest.edges) == (84, (BEGINS, LONG, ENDS))


def test_round_and_round_in_no_time_comes_to_an_end() -> None:
    found = Crossings()
    found.part(BEGINS).opens = Duration(5, 5, 5)
    found.part(SHORT).passes = Duration(0, 0, 0)
    found.part((2, 1, None, 0)).passes = Duration(0, 0, 0)
    found.part(ENDS).closes = Duration(2, 2, 2)
    assert found.duration(7) == Duration(7, 7, None)


def test_a_piece_that_hangs_on_the_one_before_leaves_the_sum_safe_and_not_exact() -> None:
    """On the longest way, on the shortest, on one that is neither; a piece that always takes as long is no matter."""
    for edge, exact in ((LONG, False), (SHORT, False), ((1, 2, None, 2), True)):
        found = forked()
        found.part((1, 2, None, 2)).passes = Duration(10, 12, 14)
        part = found.part(edge)
        assert part.passes is not None
        part.passes = replace(part.passes, exact=False)
        assert found.duration(30) == Duration(18, 30, 84, exact)
    for edge in (BEGINS, LONG):
        found = Crossings()
        found.part(BEGINS).opens = Duration(10, 10, 10 if edge == BEGINS else 20)
        found.part(LONG).closes = Duration(50, 50, 50 if edge == LONG else 60, exact=False)
        assert found.duration(60) == Duration(60, 60, 70)


def test_of_two_that_take_as_long_the_exact_one_counts() -> None:
    found = forked()
    for number, exact in ((2, False), (3, True), (4, False)):
        found.part((1, 2, None, number)).passes = Duration(4, 50, 70, exact)
    assert found.duration(30) == Duration(17, 30, 94)


def test_nothing_takes_less_than_no_time() -> None:
    """States of two sequences may come in either order: 10 - 15 + 3 is no time that can be."""
    found = forked()
    found.part(SHORT).passes = Duration(-15, 6, 8, exact=False)
    assert found.duration(30) == Duration(0, 30, 84, exact=False)


def test_a_wide_sum_that_falls_with_every_round_comes_to_an_end() -> None:
    """Round and round between states 1 and 2 in -3 + 1, which no run does: what is left is no less than nothing."""
    found = forked()
    found.part(SHORT).passes = Duration(-3, 6, 8, exact=False)
    found.part((2, 1, None, None)).passes = Duration(1, 2, 3, exact=False)
    assert found.duration(30) == Duration(0, 30, None, exact=False)
