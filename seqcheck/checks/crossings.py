"""How long something takes that begins in one run of the timed state graph and ends in another.

Takes, for every play, the spells in question by the events that begin and end them (a cycle, a step, a way that a rule
limits); gives the least and the greatest time over all ways through the graph. What lies within one run is exact; what
is added up from run to run is safe, and exact where nothing else is under way from one to the other. Where a way leads
round and round before the end, the greatest is open.
"""

from __future__ import annotations

from bisect import bisect_left, bisect_right
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field

from seqcheck.engine.bounds import both_ways, closed, greatest_separations
from seqcheck.engine.controller import Outcome
from seqcheck.engine.explore import Settlement
from seqcheck.machine.findings import Duration

#: From one state to the next, as the choice at the first came out.
Edge = tuple[int, int, Outcome | None]
#: Tells of an edge whether the ways in question go through it.
Through = Callable[[Edge], bool]


@dataclass(frozen=True, slots=True)
class Spell:
    """From one event to another; None where the play ended before it came. ``first`` and ``last``: the passages at
    which it begins and ends, where these are states; several states may lie at one read."""

    begin: int
    end: int | None
    first: int | None = None
    last: int | None = None


@dataclass(slots=True)
class _Part:
    """What one edge adds: spells ``within`` it, from its beginning to the end of one (``closes``), from the beginning
    of one to its end (``opens``), all of it where one ``passes``."""

    within: Duration | None = None
    closes: Duration | None = None
    opens: Duration | None = None
    passes: Duration | None = None


@dataclass(slots=True)
class Crossings:
    parts: dict[Edge, _Part] = field(default_factory=dict)
    _at: dict[int, list[tuple[Edge, _Part]]] = field(default_factory=dict)

    def part(self, edge: Edge) -> _Part:
        if edge not in self.parts:
            part = self.parts[edge] = _Part()
            self._at.setdefault(edge[0], []).append((edge, part))
        return self.parts[edge]

    def duration(self, typical: int, through: Through | None = None) -> Duration | None:
        """None where there is no such spell."""
        least = self.least(through)
        return None if least is None else Duration(least, typical, self.greatest(through))

    def least(self, through: Through | None = None) -> int | None:
        """None where there is no such spell."""
        direct = [part.within.least for edge, part in self._going(through) if part.within is not None]
        best: dict[tuple[int, bool], int] = {}
        waiting: list[tuple[int, bool]] = []

        def reach(key: tuple[int, bool], time: int) -> None:
            if time < best.get(key, time + 1):
                best[key] = time
                waiting.append(key)

        for edge, part in self.parts.items():
            if part.opens is not None:
                reach((edge[1], through is None or through(edge)), part.opens.least)
        while waiting:
            state, passed = waiting.pop()
            for edge, part in self._from(state):
                now = passed or (through is not None and through(edge))
                if part.passes is not None:
                    reach((edge[1], now), best[state, passed] + part.passes.least)
                if part.closes is not None and now:
                    direct.append(best[state, passed] + part.closes.least)
        return min(direct, default=None)

    def greatest(self, through: Through | None = None) -> int | None:
        """None where nothing limits it, or there is no such spell."""
        found = [part.within.greatest for _, part in self._going(through) if part.within is not None]
        best: dict[tuple[int, bool], int | None] = {}
        for state in self._in_order():
            if state is None:
                return None
            for edge, part in self.parts.items():
                if edge[1] == state and part.opens is not None:
                    _lengthen(best, (state, through is None or through(edge)), part.opens.greatest)
            for passed in (False, True):
                if (state, passed) not in best:
                    continue
                for edge, part in self._from(state):
                    now = passed or (through is not None and through(edge))
                    if part.passes is not None:
                        _lengthen(best, (edge[1], now), _sum(best[state, passed], part.passes.greatest))
                    if part.closes is not None and now:
                        found.append(_sum(best[state, passed], part.closes.greatest))
        known = [time for time in found if time is not None]
        return max(known) if known and len(known) == len(found) else None

    def _going(self, through: Through | None) -> Iterator[tuple[Edge, _Part]]:
        return ((edge, part) for edge, part in self.parts.items() if through is None or through(edge))

    def _from(self, state: int) -> Iterator[tuple[Edge, _Part]]:
        return iter(self._at.get(state, ()))

    def _in_order(self) -> Iterator[int | None]:
        """The states that a spell goes through, each behind all from which one comes; None where it can go round."""
        into: dict[int, set[int]] = {}
        for edge, part in self.parts.items():
            if part.opens is not None:
                into.setdefault(edge[1], set())
        reached = list(into)
        while reached:
            for edge, part in self._from(reached.pop()):
                if part.passes is not None:
                    reached += [edge[1]] if edge[1] not in into else []
                    into.setdefault(edge[1], set()).add(edge[0])
        while into:
            free = [state for state, before in into.items() if not before & into.keys()]
            if not free:
                yield None
                return
            for state in free:
                del into[state]
                yield state


def _lengthen(best: dict[tuple[int, bool], int | None], key: tuple[int, bool], time: int | None) -> None:
    known = best.get(key, -1)
    best[key] = None if known is None or time is None else max(known, time)


def _sum(one: int | None, other: int | None) -> int | None:
    return None if one is None or other is None else one + other


def crossings(
    plays: Sequence[tuple[Settlement, Mapping[str, Sequence[Spell]]]], edges: Callable[[Edge], bool] = lambda _: True
) -> Mapping[str, Crossings]:
    """For each name, over those of the ``edges`` of the graph that are asked for."""
    found: dict[str, Crossings] = {}
    for settlement, spells in plays:
        for name, edge, kind, span in _portions(settlement, spells, edges):
            part = found.setdefault(name, Crossings()).part(edge)
            known = getattr(part, kind)
            setattr(part, kind, span if known is None else _both(known, span))
    return found


def _both(one: Duration, other: Duration) -> Duration:
    greatest = None if one.greatest is None or other.greatest is None else max(one.greatest, other.greatest)
    return Duration(min(one.least, other.least), one.typical, greatest)


def _portions(
    settlement: Settlement, named: Mapping[str, Sequence[Spell]], edges: Callable[[Edge], bool]
) -> Iterator[tuple[str, Edge, str, Duration]]:
    trace, states, passages = settlement.trace, settlement.states, settlement.path.passages
    at = [(trace.times[passage.at], passage.at) for passage in passages]
    asked: list[tuple[str, Edge, str, int, int]] = []
    for name, spells in named.items():
        for spell in spells:
            for number, kind, begin, end in _cut(settlement, at, spell):
                edge = states[number], states[number + 1], passages[number].outcome
                if number >= settlement.recipe.way.fresh and edges(edge):
                    asked.append((name, edge, kind, begin, end))
    rows = greatest_separations(trace.graph, both_ways((begin, end) for _, _, _, begin, end in asked))
    for name, edge, kind, begin, end in asked:
        typical = trace.times[end] - trace.times[begin]
        yield name, edge, kind, Duration(-rows[end, begin], typical, closed(rows[begin, end]))


def _cut(settlement: Settlement, at: Sequence[tuple[int, int]], spell: Spell) -> Iterator[tuple[int, str, int, int]]:
    """What of a spell lies between each two states, by the number of the first."""
    times, passages = settlement.trace.times, settlement.path.passages
    last_run = len(passages) - 2
    first = bisect_right(at, (times[spell.begin], spell.begin)) - 1 if spell.first is None else spell.first
    if spell.end is None:
        last = last_run + 1
    else:
        last = bisect_left(at, (times[spell.end], spell.end)) - 1 if spell.last is None else spell.last - 1
    if first == last <= last_run and spell.end is not None:
        yield first, "within", spell.begin, spell.end
    elif first < last:
        if first >= 0:
            yield first, "opens", spell.begin, passages[first + 1].at
        for number in range(max(first + 1, 0), min(last, last_run + 1)):
            yield number, "passes", passages[number].at, passages[number + 1].at
        if last <= last_run and spell.end is not None:
            yield last, "closes", passages[last].at, spell.end


def come_up_again(settlements: Sequence[Settlement]) -> Callable[[Edge], bool]:
    """Tells of an edge whether a machine goes through it again and again; true of all where it goes through none."""
    following: dict[int, set[int]] = {}
    for one in settlements:
        for number, _, _ in one.segments():
            following.setdefault(one.states[number], set()).add(one.states[number + 1])
    group = _groups(following)
    again = {
        (begin, end)
        for begin, ends in following.items()
        for end in ends
        if begin in group and end in group and group[begin] == group[end]
    }
    return (lambda edge: edge[:2] in again) if again else (lambda _: True)


def _groups(following: Mapping[int, set[int]]) -> dict[int, int]:
    """States that lie on one way round have the same number."""
    reached = {state: _reached(following, ends) for state, ends in following.items()}
    return {
        state: min(other for other in there if state in reached.get(other, ()))
        for state, there in reached.items()
        if state in there
    }


def _reached(following: Mapping[int, set[int]], begin: set[int]) -> set[int]:
    found = set(begin)
    waiting = list(found)
    while waiting:
        for state in following.get(waiting.pop(), set()) - found:
            found.add(state)
            waiting.append(state)
    return found
