"""One stroke, planned: when a piston comes to each mark ahead of it.

Takes a cylinder, a direction, the valve's own time and where the piston stands; gives for each mark, in the order of
travel, the parts whose latest end is the moment at which it is reached. Refuses nothing.

From an end, mark at share p: ``max( s + d, mark before + q )``; the end: ``max( s + d, mark before )``.
From between two marks: the next mark after 0 to its whole share, and the others as from there. Where the piston may
stand in one of several stretches, or yet at its end, every part spans what it takes from any of them: safe, exact
when counted from the start, a little wide between two marks.
"""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise
from typing import Literal

from seqcheck.engine.strokes import Region, longest_part, moving_time, part_from_start, part_of
from seqcheck.machine.devices import Cylinder, Stroke
from seqcheck.machine.records import record
from seqcheck.machine.time import NO_TIME, Span

#: What a part is counted from, besides the number of a mark earlier in the plan.
START = -1
LEAVING = -2


@record
class Part:
    """``since``: START, LEAVING or the number of an earlier mark in the plan. ``drawn``: as what its time is drawn
    anew, if it is: on the way to a mark, or from anywhere ``between`` marks at which the piston may stand."""

    since: int
    span: Span
    drawn: Literal["mark", "between"] | None = None


@record
class Reach:
    """A mark, by its index on the cylinder, and what it takes to be reached. ``only_if``: the moment at which the
    piston would come to it if it stood in the last stretch before it, which is no event of its own."""

    mark: int
    parts: tuple[Part, ...]
    only_if: bool = False


@record
class Travel:
    """``positions`` of the marks from retracted to extended, in millionths; ``valve`` is the span of the shift that
    starts the stroke, which a stroke timed from the coil contains."""

    cylinder: Cylinder
    positions: tuple[int, ...]
    out: bool
    valve: Span

    @property
    def timed_from_coil(self) -> bool:
        return self._stroke.from_coil

    @property
    def _stroke(self) -> Stroke:
        return self.cylinder.extend if self.out else self.cylinder.retract

    @property
    def _last(self) -> int:
        return len(self.positions) - 1 if self.out else 0

    def _share(self, one: int, other: int) -> int:
        return abs(self.positions[one] - self.positions[other])

    @property
    def _moving(self) -> Span:
        return moving_time(self._stroke, self.valve, self.cylinder.lag)

    def _part(self, one: int, other: int) -> Span:
        """The time from one mark to another, once the piston moves."""
        return part_of(self._moving, self._share(one, other), self.cylinder.uneven)

    def _from_end(self, end: int, mark: int) -> Span:
        if mark == self._last:
            return self._stroke.time
        cylinder = self.cylinder
        return part_from_start(self._stroke, self._share(end, mark), cylinder.uneven, self.valve, cylinder.lag)

    def _ahead_of(self, mark: int) -> range:
        return range(mark + 1, len(self.positions)) if self.out else range(mark - 1, -1, -1)

    def _step(self, before: int, mark: int) -> Span:
        """The least time between two neighbouring marks; none before the end."""
        return Span.exactly(0 if mark == self._last else self._part(before, mark).least)

    # Plans -----------------------------------------------------------------------------------------------------

    def from_end(self, end: int) -> tuple[Reach, ...]:
        plan: list[Reach] = []
        before, since = end, LEAVING
        for mark in self._ahead_of(end):
            parts = (Part(START, self._from_end(end, mark), "mark"), Part(since, self._step(before, mark)))
            plan.append(Reach(mark, parts))
            before, since = mark, len(plan) - 1
        return tuple(plan)

    def from_between(self, region: Region, stood: Region) -> tuple[Reach, ...]:
        """``stood``: where the played run has the piston, for the typical times. ``passed`` of the marks may be passed
        already; the one behind them, ``ahead``, is what a piston in the last stretch comes to first."""
        behind, ahead = (region.low, region.high) if self.out else (region.high, region.low)
        marks = list(self._ahead_of(behind))
        passed, may_rest = marks.index(ahead), behind in region.rests
        unsure = passed > 0 or may_rest
        latest = [self._latest(behind, marks[: min(n, passed) + 1], mark, may_rest) for n, mark in enumerate(marks)]
        plan: list[Reach] = []
        for number, mark in enumerate(marks[:passed]):
            anywhere = Part(START, self._up_to(latest[number], stood, mark), "between")
            chain = (Part(number - 1, NO_TIME),) if number else ()
            plan.append(Reach(mark, (*chain, anywhere)))
        whole = self._whole(marks[passed - 1] if passed else behind, ahead)
        last_stretch = Part(START, self._up_to(whole, stood, ahead), "mark")
        plan.append(Reach(ahead, (last_stretch,), only_if=unsure))
        if unsure:
            anywhere = Part(START, self._up_to(latest[passed], stood, ahead), "between")
            chain = (Part(passed - 1, NO_TIME),) if passed else ()
            plan.append(Reach(ahead, (*chain, Part(passed, NO_TIME), anywhere)))
        for number in range(passed + 1, len(marks)):
            mark = marks[number]
            parts = [
                Part(len(plan) - 1, self._step(marks[number - 1], mark)),
                Part(passed, self._part(ahead, mark), "mark"),
            ]
            if unsure:
                span = self._from_anywhere(behind, marks[passed : number + 1], stood, latest[number])
                parts.append(Part(START, span, "between"))
            plan.append(Reach(mark, tuple(parts)))
        return tuple(plan)

    def _up_to(self, greatest: int, stood: Region, mark: int) -> Span:
        """From no time, where the piston stands right before the mark, to so much."""
        return Span(0, min(self._typical(stood, mark), greatest), greatest)

    def _from_anywhere(self, behind: int, chain: Sequence[int], stood: Region, latest: int) -> Span:
        """From the start to the last of some neighbouring marks, wherever in front of the first the piston stood."""
        typical = self._part(behind, chain[-1]).typical if stood == Region.exactly(behind) else 0
        least = self._least(chain)
        return Span(least, min(max(least, typical), latest), latest)

    def _whole(self, before: int, mark: int) -> int:
        """The greatest time through one stretch, started somewhere in it."""
        return longest_part(self._moving, self._share(before, mark), self.cylinder.uneven)

    def _latest(self, behind: int, firsts: Sequence[int], mark: int, may_rest: bool) -> int:
        """The greatest time to a mark, whichever of ``firsts`` is the first one passed: the whole stretch before that
        one, and then as from there."""
        found = []
        for before, first in zip((behind, *firsts), firsts, strict=False):
            found.append(self._whole(before, first) + (self._part(first, mark).greatest if mark != first else 0))
        if may_rest:
            valve = self.valve.least if self.timed_from_coil else 0
            found.append(self._from_end(behind, mark).greatest - valve)
            found.append(self.cylinder.lag.greatest + self._part(behind, mark).least)
        return max(found)

    def _least(self, chain: Sequence[int]) -> int:
        """The least time from the first to the last of some neighbouring marks."""
        steps = sum(self._part(one, other).least for one, other in pairwise(chain))
        return min(self._part(chain[0], chain[-1]).least, steps)

    def _typical(self, stood: Region, mark: int) -> int:
        """From an end, the share of the whole; from between two marks, half of what lies ahead."""
        nearest = stood.low if self.out else stood.high
        if mark not in self._ahead_of(nearest):
            return 0
        part = self._part(nearest, mark)
        return part.typical if stood == Region.exactly(nearest) else part.greatest // 2
