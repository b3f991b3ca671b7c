"""How long a piston takes to its marks.

Takes a cylinder; gives its marks (the ends and the edges of its sensors) and the spans of times to and between them,
rounded outward to whole microseconds. Shares are millionths of the stroke.
"""

from __future__ import annotations

from functools import cache
from typing import NamedTuple

from seqcheck.machine.devices import Cylinder, Sensor, Stroke
from seqcheck.machine.model import Machine
from seqcheck.machine.time import WHOLE_SHARE, Span


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


def part_of(time: Span, share: int, uneven: int) -> Span:
    """The time over a share of the stroke whose speed may differ from even by ``uneven``."""
    least = time.least * share * (WHOLE_SHARE - uneven) // WHOLE_SHARE**2
    greatest = min(time.greatest, longest_part(time, share, uneven))
    return Span(least, min(max(time.typical * share // WHOLE_SHARE, least), greatest), greatest)


def longest_part(time: Span, share: int, uneven: int) -> int:
    return -(-time.greatest * share * (WHOLE_SHARE + uneven) // WHOLE_SHARE**2)


def moving_time(stroke: Stroke, valve: Span) -> Span:
    """The time from valve position reached to end reached, also where the stroke is timed from the coil."""
    if not stroke.from_coil:
        return stroke.time
    least = max(0, stroke.time.least - valve.greatest)
    greatest = max(least, stroke.time.greatest - valve.least)
    return Span(least, min(max(least, stroke.time.typical - valve.typical), greatest), greatest)


def part_from_start(stroke: Stroke, share: int, uneven: int, valve: Span) -> Span:
    """The time to a mark from where the stroke is timed. From the coil, the valve's own time lies before the first
    part, so that only the rest of the greatest time is shared out."""
    part = part_of(stroke.time, share, uneven)
    if not stroke.from_coil:
        return part
    moving = Span.exactly(max(0, stroke.time.greatest - valve.greatest))
    greatest = max(part.least, min(stroke.time.greatest, valve.greatest + longest_part(moving, share, uneven)))
    return Span(part.least, min(part.typical, greatest), greatest)


def reached_by(sensor: Sensor, position: int, out: bool) -> bool | None:
    """What a piston that comes to (out or back) ``position`` makes of the sensor: on, off, or nothing new."""
    entered, left = (sensor.low, sensor.high) if out else (sensor.high, sensor.low)
    if position == entered and (0 < position < WHOLE_SHARE or sensor.low == sensor.high):
        return True
    if position == left and 0 < position < WHOLE_SHARE:
        return False
    return None
