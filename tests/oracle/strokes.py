"""The formulas of a stroke: when the piston reaches each mark.

Takes a cylinder, a direction and the moment it starts; gives (mark, time) in the order of travel. Positions are
millionths of the stroke. Products are rounded outward: down for the least, up for the greatest.

What a stroke contains. Write T for the whole time (``least..most``), v for what passes of it before the piston moves
(its lag; in a stroke that is timed from the coil the valve's part of it, too) and m = T - v for the time that the
piston has for the way from its start. Neither v nor m is known better than by its bounds, so that m lies in
``least - greatest v .. most - least v`` and never below 0. Two marks that are a share p apart are at least
p * least m * (1 - P) apart in time, and so is the last of them from the end that lies a share p further on. A mark at
share p comes v + m * w after the start, with w between p * (1 - P) and the lesser of p * (1 + P) and
1 - (1 - p) * (1 - P). That is T * w + v * (1 - w): no sooner than p * least * (1 - P), whatever v is, and at the latest
where v is as great as it can be, v + p * (1 + P) * (most - v); the rest of the way taken off ``most`` it is no later
than that. A stroke that begins between two marks has no time from the coil of its own and takes m; whether it has a lag
nobody says, so that the greatest m is with none.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from seqcheck.machine.devices import Cylinder, Sensor, Stroke
from seqcheck.machine.time import NO_TIME, WHOLE_SHARE, Span

Choose = Callable[[int, Span], int]
"""Draws the delay of one mark: (position of the mark, span) to microseconds."""

_PRODUCT = WHOLE_SHARE * WHOLE_SHARE


def marks_of(sensors: tuple[Sensor, ...]) -> tuple[int, ...]:
    """Both ends and every edge of a sensor, from retracted to extended."""
    return tuple(sorted({0, WHOLE_SHARE} | {edge for sensor in sensors for edge in (sensor.low, sensor.high)}))


@dataclass(frozen=True, slots=True)
class Pace:
    """How fast one stroke of a cylinder goes. ``valve``: the span from which the shift was drawn that starts it."""

    cylinder: Cylinder
    out: bool
    valve: Span

    @property
    def stroke(self) -> Stroke:
        return self.cylinder.extend if self.out else self.cylinder.retract

    @property
    def moving(self) -> Span:
        """m above: the time for the whole way, the valve's own time and the lag left out."""
        whole, valve = self.stroke.time, self.valve if self.stroke.from_coil else NO_TIME
        least = max(0, whole.least - valve.greatest - self.cylinder.lag.greatest)
        greatest = max(least, whole.greatest - valve.least)
        return Span(least, _held(whole.typical - valve.typical, least, greatest), greatest)

    def apart(self, share: int) -> int:
        """The least time between two marks."""
        return _least_part(self.moving.least, share, self.cylinder.uneven)

    def slowest(self, share: int) -> int:
        """The greatest time for this share of the way at the slowest speed."""
        return _greatest_part(self.moving.greatest, share, self.cylinder.uneven)

    def to_mark(self, share: int) -> Span:
        """From where the stroke is timed to a mark at this share."""
        whole, uneven = self.stroke.time, self.cylinder.uneven
        standing = self.cylinder.lag.greatest + (self.valve.greatest if self.stroke.from_coil else 0)
        least = _least_part(whole.least, share, uneven)
        latest = standing + _greatest_part(max(0, whole.greatest - standing), share, uneven)
        greatest = max(least, min(whole.greatest - self.apart(WHOLE_SHARE - share), latest))
        return Span(least, _held(share * whole.typical // WHOLE_SHARE, least, greatest), greatest)

    def onward(self, share: int) -> Span:
        """From a mark to one that lies this share further on; the rest of the whole way takes its least."""
        moving, uneven = self.moving, self.cylinder.uneven
        least = _least_part(moving.least, share, uneven)
        latest = moving.greatest - self.apart(WHOLE_SHARE - share)
        greatest = max(least, min(latest, _greatest_part(moving.greatest, share, uneven)))
        return Span(least, _held(share * moving.typical // WHOLE_SHARE, least, greatest), greatest)


def full_stroke(
    pace: Pace, ahead: tuple[int, ...], timed_from: int, leaves: int, choose: Choose
) -> tuple[tuple[int, int], ...]:
    """From an end: mark at max(s + d, mark before + q), the end at max(s + d, mark before), d of the end in
    least..most. ``timed_from`` is s, ``leaves`` is when the piston leaves its end."""
    reached: list[tuple[int, int]] = []
    place, before = (0 if pace.out else WHOLE_SHARE), leaves
    start = place
    for mark in ahead[:-1]:
        delay = choose(mark, pace.to_mark(abs(mark - start)))
        before = max(timed_from + delay, before + pace.apart(abs(mark - place)))
        place = mark
        reached.append((mark, before))
    end = max(timed_from + choose(ahead[-1], pace.stroke.time), before)
    return (*reached, (ahead[-1], end))


def rest_of_stroke(
    pace: Pace, behind: int, ahead: tuple[int, ...], start: int, choose: Choose
) -> tuple[tuple[int, int], ...]:
    """From between the marks ``behind`` and ``ahead[0]``: the next mark after 0 to its whole share, the further ones
    and the end as from there."""
    most = pace.slowest(abs(ahead[0] - behind))
    first = start + choose(ahead[0], Span(0, most // 2, most))
    reached = [(ahead[0], first)]
    place, before = ahead[0], first
    for mark in ahead[1:]:
        delay = choose(mark, pace.onward(abs(mark - ahead[0])))
        apart = 0 if mark == ahead[-1] else pace.apart(abs(mark - place))
        before = max(first + delay, before + apart)
        place = mark
        reached.append((mark, before))
    return tuple(reached)


def _least_part(time: int, share: int, uneven: int) -> int:
    """share * time * (1 - P), rounded down."""
    return share * time * (WHOLE_SHARE - uneven) // _PRODUCT


def _greatest_part(time: int, share: int, uneven: int) -> int:
    """share * time * (1 + P), rounded up."""
    return -(-share * time * (WHOLE_SHARE + uneven) // _PRODUCT)


def _held(time: int, least: int, greatest: int) -> int:
    return min(max(time, least), greatest)
