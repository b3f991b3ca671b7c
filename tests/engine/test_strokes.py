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
        # 101 * 0.95 * 0.9 = 86.355; 151 * 0.95 * 1.1 = 157.795 is longer than the whole stroke ever is
        (950_000, 100_000, Span(86, 114, 151)),
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
    assert moving_time(Stroke(stroke, True), valve) == moving
    assert moving_time(Stroke(stroke, False), valve) == stroke


@pytest.mark.parametrize(
    ("share", "uneven", "part"),
    [
        # 400 * 0.5, 450 * 0.5; the valve's 40 and half of the other 460
        (500_000, 0, Span(200, 225, 270)),
        # 400 * 0.5 * 0.9; 40 + 460 * 0.5 * 1.1 = 293
        (500_000, 100_000, Span(180, 225, 293)),
        # 400 * 0.95 * 0.9, 450 * 0.95 = 427.5; 40 + 460 * 0.95 * 1.1 = 520.7 is longer than the whole
        (950_000, 100_000, Span(342, 427, 500)),
        (0, 0, Span(0, 0, 40)),
    ],
)
def test_part_of_a_stroke_timed_from_the_coil(share: int, uneven: int, part: Span) -> None:
    stroke, valve = Span(400, 450, 500), Span(20, 25, 40)
    assert part_from_start(Stroke(stroke, True), share, uneven, valve) == part
    assert part_from_start(Stroke(stroke, False), share, uneven, valve) == part_of(stroke, share, uneven)


def test_a_stroke_shorter_than_its_valve_still_takes_its_least() -> None:
    """30 * 0.5 = 15 at least; of the greatest nothing is left behind the valve's 40, and 30 is the whole."""
    assert part_from_start(Stroke(Span(30, 30, 30), True), 500_000, 0, Span.exactly(40)) == Span(15, 15, 30)


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
