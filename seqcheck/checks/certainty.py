"""What is certain: found on every way through the state graph.

Takes settlements and, for one finding, the segments of them in which every timing shows it; tells whether a run can go
on for ever, or end, without it.
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Collection, Sequence

from seqcheck.engine.settlement import Settlement

#: A settlement by its place among all, and the number of a passage in it; the segment that begins there.
Segment = tuple[int, int]


class Ways:
    def __init__(self, settlements: Sequence[Settlement]) -> None:
        self._settlements = settlements
        self._owner: dict[int, Segment] = {}
        self._branches: dict[int, list[Segment]] = {}
        for number, one in enumerate(settlements):
            fresh = one.recipe.way.fresh
            if fresh >= 0:
                self._branches.setdefault(one.states[fresh], []).append((number, fresh))
            for passage in range(fresh + 1, len(one.states)):
                self._owner.setdefault(one.states[passage], (number, passage))

    def segment(self, number: int, event: int) -> Segment:
        """The segment of a settlement in which an event lies, by typical time; at one instant by the order in which
        they came up."""
        one = self._settlements[number]
        times = one.trace.times
        at = [(times[passage.at], passage.at) for passage in one.path.passages]
        return number, bisect_right(at, (times[event], event)) - 1

    def all_show(self, showing: Collection[Segment]) -> bool:
        """Whether no run avoids these segments."""
        way: set[Segment] = set()
        done: set[Segment] = set()
        stack: list[tuple[Segment, bool]] = [((0, -1), False)]
        while stack:
            segment, leaving = stack.pop()
            if leaving:
                way.discard(segment)
                done.add(segment)
                continue
            if segment in way:
                return False
            if segment in done or segment in showing:
                continue
            way.add(segment)
            stack.append((segment, True))
            following = self._following(segment)
            if not following:
                return False
            stack += [(one, False) for one in following]
        return True

    def _following(self, segment: Segment) -> list[Segment]:
        """The segments that may come next; none where the play ended."""
        number, passage = segment
        one = self._settlements[number]
        path = one.path
        # What a play shows behind its round goes on as the round.
        reached = (path.first if path.rest and path.first is not None and passage == path.last else passage) + 1
        if reached >= len(one.states):
            return []
        state = one.states[reached]
        here = self._owner[state] if reached == path.last and not path.rest else (number, reached)
        return [here, *self._branches.get(state, ())]
