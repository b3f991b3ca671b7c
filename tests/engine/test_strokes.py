"""How long a piston takes to its marks: shares of strokes, worked by hand, products rounded outward."""

from __future__ import annotations

import pytest

from seqcheck.engine.strokes import moving_time, part_from_start, part_of, reached_by
from seqcheck.machine.devices import Sensor, Stroke
from seqcheck.machine.places import Place
from seqcheck.machine.time import NO_TIME, Span

PLACE = Place("a.steps", 1, 1, 1, 1)


@pytest.mark.parametrize(
    ("share", "uneven", "part"),
    [
        # 101 * 0.3 = 30.3, 120 * 0.3 = 36, 151 * 0.3 = 45.3
        (300_000, 0, Span(30, 36, 46)),
        # 101 * 0.3 * 0.9 = 27.27, 151 * 0.3 * 1.1 = 49.83
        (300_000, 100_000, Span(27, 36, 50)),
        # 101 * 0.95 * 0.9 = 86.355; 151 * 0.95 * 1.1 = 157.795 leaves too little for the rest: 101 * 0.05 * 0.9 = 4.545
        (950_000, 100_000, Span(86, 114, 147)),
        (1_000_000, 0, Span(101, 120, 151)),
    ],
)
def test_part_of_an_uneven_stroke(share: int, uneven: int, part: Span) -> None:
    assert part_of(Span(101, 120, 151), share, uneven) == part


@pytest.mark.parametrize(
    ("stroke", "valve", "moving"),
    [
        # 400 - 40, 450 - 25, 500 - 20
        (Span(400, 450, 500), Span(20, 25, 40), Span(360, 425, 480)),
        # 400 - 80, 410 - 50, 420 - 20
        (Span(400, 410, 420), Span(20, 50, 80), Span(320, 360, 400)),
        # 100 - 25, 100 - 10, 104 - 10
        (Span(100, 100, 104), Span(10, 10, 25), Span(75, 90, 94)),
        # No stroke is shorter than nothing
        (Span(10, 10, 10), Span(20, 20, 20), NO_TIME),
        (Span(10, 15, 40), Span(20, 25, 30), Span(0, 0, 20)),
    ],
)
def test_a_stroke_timed_from_the_coil_contains_the_valve(stroke: Span, valve: Span, moving: Span) -> None:
    assert moving_time(Stroke(stroke, True), valve, NO_TIME) == moving
    assert moving_time(Stroke(stroke, False), valve, NO_TIME) == stroke


def test_a_stroke_contains_its_lag() -> None:
    """A piston that stands for 50 of its 400 moves for 350; one that was started between its ends may not stand."""
    stroke, valve, lag = Span(400, 450, 500), Span(20, 25, 40), Span(30, 40, 50)
    assert moving_time(Stroke(stroke, False), valve, lag) == Span(350, 450, 500)
    assert moving_time(Stroke(stroke, True), valve, lag) == Span(310, 425, 480)
    assert moving_time(Stroke(Span(40, 45, 50), False), valve, lag) == Span(0, 45, 50)


@pytest.mark.parametrize(
    ("share", "uneven", "part"),
    [
        # 400 * 0.5, 450 * 0.5; the valve's 40 and half of the other 460
        (500_000, 0, Span(200, 225, 270)),
        # 400 * 0.5 * 0.9; 40 + 460 * 0.5 * 1.1 = 293
        (500_000, 100_000, Span(180, 225, 293)),
        # 400 * 0.95 * 0.9, 450 * 0.95 = 427.5; 40 + 460 * 0.95 * 1.1 = 520.7 leaves too little for the rest of the way:
        # (400 - 40) * 0.05 * 0.9 = 16.2
        (950_000, 100_000, Span(342, 427, 484)),
        (0, 0, Span(0, 0, 40)),
    ],
)
def test_part_of_a_stroke_timed_from_the_coil(share: int, uneven: int, part: Span) -> None:
    stroke, valve = Span(400, 450, 500), Span(20, 25, 40)
    assert part_from_start(Stroke(stroke, True), share, uneven, valve, NO_TIME) == part
    assert part_from_start(Stroke(stroke, False), share, uneven, valve, NO_TIME) == part_of(stroke, share, uneven)


@pytest.mark.parametrize(
    ("share", "uneven", "part"),
    [
        # 400 * 0.5, 450 * 0.5; 50 stands still, half of the other 450
        (500_000, 0, Span(200, 225, 275)),
        # 400 * 0.5 * 0.9; 50 + 450 * 0.5 * 1.1 = 297.5
        (500_000, 100_000, Span(180, 225, 298)),
        # 400 * 0.9 * 0.8 = 288, 405; 50 + 450 * 0.9 * 1.2 = 536; the rest takes (400 - 50) * 0.1 * 0.8 = 28
        (900_000, 200_000, Span(288, 405, 472)),
    ],
)
def test_a_lag_lies_before_the_first_part(share: int, uneven: int, part: Span) -> None:
    lag = Span(30, 40, 50)
    assert part_from_start(Stroke(Span(400, 450, 500), False), share, uneven, NO_TIME, lag) == part


def test_no_mark_is_later_by_the_one_before_it() -> None:
    """The latest at a mark and the least from there to the next come no later than the latest at that one: else a
    stroke with a shorter least time would have an earlier mark."""
    for stroke in (Stroke(Span(397, 450, 503), False), Stroke(Span(397, 450, 503), True)):
        valve, lag = Span(20, 25, 41), Span(3, 40, 53)
        for uneven in (0, 73_000, 250_000):
            moving = moving_time(stroke, valve, lag)
            for share in range(0, 990_000, 10_007):
                step = part_of(moving, 9_999, uneven).least
                here, there = (
                    part_from_start(stroke, one, uneven, valve, lag).greatest for one in (share, share + 9_999)
                )
                assert here + step <= there
                here, there = (part_of(moving, one, uneven).greatest for one in (share, share + 9_999))
                assert here + step <= there


def test_a_stroke_shorter_than_its_valve_still_takes_its_least() -> None:
    """30 * 0.5 = 15 at least; of the greatest nothing is left behind the valve's 40, and 30 is the whole."""
    stroke = Stroke(Span(30, 30, 30), True)
    assert part_from_start(stroke, 500_000, 0, Span.exactly(40), NO_TIME) == Span(15, 15, 30)


@pytest.mark.parametrize(
    ("low", "high", "position", "out", "turns"),
    [
        (450_000, 500_000, 450_000, True, True),
        (450_000, 500_000, 500_000, True, False),
        (450_000, 500_000, 500_000, False, True),
        (450_000, 500_000, 450_000, False, False),
        (450_000, 500_000, 475_000, True, None),
        (450_000, 500_000, 1_000_000, True, None),
        # A sensor at the end comes on before the end, and stays on there.
        (960_000, 1_000_000, 960_000, True, True),
        (960_000, 1_000_000, 1_000_000, True, None),
        (960_000, 1_000_000, 1_000_000, False, None),
        (960_000, 1_000_000, 960_000, False, False),
        (0, 40_000, 40_000, True, False),
        (0, 40_000, 40_000, False, True),
        (0, 40_000, 0, False, None),
        # One that sits in a point, at the end or between
        (1_000_000, 1_000_000, 1_000_000, True, True),
        (0, 0, 0, False, True),
        (500_000, 500_000, 500_000, True, True),
        (500_000, 500_000, 500_000, False, True),
    ],
)
def test_what_a_piston_makes_of_a_sensor(low: int, high: int, position: int, out: bool, turns: bool | None) -> None:
    sensor = Sensor("B1", None, None, "clamp", low, high, NO_TIME, None, PLACE)
    assert reached_by(sensor, position, out) is turns
