"""How long a piston takes to its marks.

Takes a cylinder; gives its marks (the ends and the edges of its sensors) and the spans of times to and between them,
rounded outward to whole microseconds. Shares are millionths of the stroke.
"""

from __future__ import annotations

from functools import cache
from typing import NamedTuple

from seqcheck.machine.devices import Cylinder, Sensor, Stroke
from seqcheck.machine.model import Machine
from seqcheck.machine.time import NO_TIME, WHOLE_SHARE, Span


class Region(NamedTuple):
    """Where a piston stands: between marks ``low`` and ``high`` (indices), at a mark where the two are the same.
    ``rests``: ends of the stroke among the two at which it may stand exactly. A plain tuple: compared at every move."""

    low: int
    high: int
    rests: frozenset[int] = frozenset()

    @staticmethod
    @cache
    def exactly(mark: int) -> Region:
        return Region(mark, mark, frozenset({mark}))


def marks_of(machine: Machine, cylinder: Cylinder) -> tuple[int, ...]:
    """The positions of the marks, from retracted to extended."""
    positions = {0, WHOLE_SHARE}
    for name in cylinder.sensors:
        sensor = machine.sensors[name]
        positions |= {sensor.low, sensor.high}
    return tuple(sorted(positions))


def part_of(moving: Span, share: int, uneven: int) -> Span:
    """The time over a share of the stroke, once the piston moves, whose speed may differ from even by ``uneven``. The
    rest of the stroke takes its least at any rate."""
    least = _shortest_part(moving, share, uneven)
    rest = _shortest_part(moving, WHOLE_SHARE - share, uneven)
    greatest = max(least, min(moving.greatest - rest, longest_part(moving, share, uneven)))
    return Span(least, min(max(moving.typical * share // WHOLE_SHARE, least), greatest), greatest)


def _shortest_part(time: Span, share: int, uneven: int) -> int:
    return time.least * share * (WHOLE_SHARE - uneven) // WHOLE_SHARE**2


def longest_part(time: Span, share: int, uneven: int) -> int:
    return -(-time.greatest * share * (WHOLE_SHARE + uneven) // WHOLE_SHARE**2)


def moving_time(stroke: Stroke, valve: Span, lag: Span) -> Span:
    """What the whole way may take a piston that moves: the stroke without the valve's own time, if that is in it, and
    at the least without its lag. (A stroke that starts between two marks may have none.)"""
    valve = valve if stroke.from_coil else NO_TIME
    least = max(0, stroke.time.least - valve.greatest - lag.greatest)
    greatest = max(least, stroke.time.greatest - valve.least)
    return Span(least, min(max(least, stroke.time.typical - valve.typical), greatest), greatest)


def part_from_start(stroke: Stroke, share: int, uneven: int, valve: Span, lag: Span) -> Span:
    """The time to a mark from where the stroke is timed. The lag, and from the coil the valve's own time, lie before
    the first part, so that only the rest of the greatest time is shared out."""
    standing = lag.greatest + (valve.greatest if stroke.from_coil else 0)
    least = _shortest_part(stroke.time, share, uneven)
    rest = _shortest_part(moving_time(stroke, valve, lag), WHOLE_SHARE - share, uneven)
    moving = Span.exactly(max(0, stroke.time.greatest - standing))
    greatest = max(least, min(stroke.time.greatest - rest, standing + longest_part(moving, share, uneven)))
    return Span(least, min(max(stroke.time.typical * share // WHOLE_SHARE, least), greatest), greatest)


def reached_by(sensor: Sensor, position: int, out: bool) -> bool | None:
    """What a piston that comes to (out or back) ``position`` makes of the sensor: on, off, or nothing new."""
    entered, left = (sensor.low, sensor.high) if out else (sensor.high, sensor.low)
    if position == entered and (0 < position < WHOLE_SHARE or sensor.low == sensor.high):
        return True
    if position == left and 0 < position < WHOLE_SHARE:
        return False
    return None
