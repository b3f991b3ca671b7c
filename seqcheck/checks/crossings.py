"""How long something takes that begins in one run of the timed state graph and ends in another.

Takes, for every play, the spells in question by the events that begin and end them (a cycle, a step, a way that a rule
limits); gives the least and the greatest time over all ways through the graph. What lies within one run is exact; what
is added up from run to run is safe, and exact where nothing is under way from one to the other whose time hangs on what
came before. Where a way leads round and round before the end, the greatest is open.
"""

from __future__ import annotations

from bisect import bisect_left, bisect_right
from collections import Counter
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field, replace

from seqcheck.engine.bounds import both_ways, closed, greatest_separations
from seqcheck.engine.controller import Outcome
from seqcheck.engine.settlement import Settlement
from seqcheck.machine.findings import Duration
from seqcheck.machine.records import record

#: From one state at which ways part or meet to the next, as the choice at the first came out and was taken.
Edge = tuple[int, int, Outcome | None, int | None]
#: Tells of an edge whether the ways in question go through it.
Through = Callable[[Edge], bool]


@record
class Spell:
    """From one event to another; None where the play ended before it came. ``first`` and ``last``: the passages at
    which it begins and ends, where these are states; several states may lie at one read. ``under_way``: it stands for
    those that have begun in other plays."""

    begin: int
    end: int | None
    first: int | None = None
    last: int | None = None
    under_way: bool = False


@record
class Sum:
    """A way that takes so much ``time``, up to the end of ``edge`` and all ``before`` it. Not ``exact``: the times of
    its edges hang on one another. ``fixed``: none of them takes more than its least."""

    time: int
    edge: Edge
    fixed: bool
    before: Sum | None = None
    exact: bool = True

    @property
    def edges(self) -> tuple[Edge, ...]:
        """One after the other."""
        found, one = [], self
        while one.before is not None:
            found.append(one.edge)
            one = one.before
        return (one.edge, *reversed(found))


@dataclass(slots=True)
class _Part:
    """What one edge adds: spells ``within`` it, from its beginning to the end of one (``closes``), from the beginning
    of one to its end (``opens``), all of it where one ``passes``. Those that are not exact hang on what came before."""

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

    @property
    def begins(self) -> bool:
        """Whether there is such a spell."""
        return any(part.within is not None or part.opens is not None for part in self.parts.values())

    def duration(self, typical: int, through: Through | None = None) -> Duration | None:
        """None where there is no such spell."""
        shortest, longest = self.shortest(through), self.longest(through)
        if shortest is None:
            return None
        least = max(0, shortest.time)  # Sums that are wide know no better.
        if longest is None:
            return Duration(least, typical, None, shortest.exact)
        return Duration(least, typical, longest.time, shortest.exact and longest.exact)

    def shortest(self, through: Through | None = None) -> Sum | None:
        """None where there is no such spell. What begins behind the choice of an edge does not go through it."""
        found = [
            Sum(part.within.least, edge, _is_fixed(part.within))
            for edge, part in self.parts.items()
            if part.within is not None and through is None
        ]
        best: dict[tuple[int, bool], Sum] = {}
        waiting: list[tuple[int, bool]] = []
        reached: Counter[tuple[int, bool]] = Counter()

        def reach(key: tuple[int, bool], one: Sum) -> None:
            # No way is shorter for going round, but a sum that is wide may be, for ever.
            if (key not in best or _shorter(one) < _shorter(best[key])) and reached[key] <= len(self.parts):
                reached[key] += 1
                best[key] = one
                waiting.append(key)

        for edge, part in self.parts.items():
            if part.opens is not None:
                reach((edge[1], through is None), Sum(part.opens.least, edge, _is_fixed(part.opens)))
        while waiting:
            state, passed = waiting.pop()
            before = best[state, passed]
            for edge, part in self._from(state):
                now = passed or (through is not None and through(edge))
                if part.passes is not None:
                    reach((edge[1], now), _sum(before, part.passes.least, part.passes, edge))
                if part.closes is not None and now:
                    found.append(_sum(before, part.closes.least, part.closes, edge))
        return min(found, key=_shorter, default=None)

    def longest(self, through: Through | None = None) -> Sum | None:
        """None where nothing limits it, or there is no such spell."""
        found = [
            _begun(part.within, edge)
            for edge, part in self.parts.items()
            if part.within is not None and through is None
        ]
        best: dict[tuple[int, bool], Sum | None] = {}
        opening: dict[int, list[tuple[Edge, Duration]]] = {}
        for edge, part in self.parts.items():
            if part.opens is not None:
                opening.setdefault(edge[1], []).append((edge, part.opens))
        for state in self._in_order():
            if state is None:
                return None
            for edge, span in opening.get(state, ()):
                _lengthen(best, (state, through is None), _begun(span, edge))
            for passed in (False, True):
                if (state, passed) not in best:
                    continue
                before = best[state, passed]
                for edge, part in self._from(state):
                    now = passed or (through is not None and through(edge))
                    if part.passes is not None:
                        _lengthen(best, (edge[1], now), _gone_on(before, part.passes, edge))
                    if part.closes is not None and now:
                        found.append(_gone_on(before, part.closes, edge))
        known = [one for one in found if one is not None]
        return max(known, key=_longer) if known and len(known) == len(found) else None

    @property
    def unlimited(self) -> bool:
        """Whether what begins in one run and ends in another can take any time: a way goes round, or waits for someone
        outside."""
        pieces = (piece for part in self.parts.values() for piece in (part.opens, part.passes, part.closes))
        return bool(self.endless()) or any(piece is not None and piece.greatest is None for piece in pieces)

    def endless(self) -> tuple[Edge, ...]:
        """A way that goes round before its end: from the edge in which it begins to the one that comes back to a state
        on the way. None of them where there is no such way."""
        done: set[int] = set()
        for edge, part in self.parts.items():
            if part.opens is None:
                continue
            way, following = [edge], [self._passed(edge[1])]
            while way:
                after = next(following[-1], None)
                if after is None:
                    done.add(way.pop()[1])
                    following.pop()
                elif any(after[1] == one[1] for one in way):
                    return (*way, after)
                elif after[1] not in done:
                    way.append(after)
                    following.append(self._passed(after[1]))
        return ()

    def _passed(self, state: int) -> Iterator[Edge]:
        return (edge for edge, part in self._from(state) if part.passes is not None)

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


def _lengthen(best: dict[tuple[int, bool], Sum | None], key: tuple[int, bool], one: Sum | None) -> None:
    known = best.get(key, one)
    best[key] = None if known is None or one is None else max(known, one, key=_longer)


def _begun(span: Duration, edge: Edge) -> Sum | None:
    return None if span.greatest is None else Sum(span.greatest, edge, _is_fixed(span))


def _sum(before: Sum, time: int, span: Duration, edge: Edge) -> Sum:
    """``time``, one end of ``span``, on top of what comes before: exact where the two have nothing to do with each
    other, or one of them is always as long."""
    fixed = _is_fixed(span)
    exact = before.exact and (span.exact or before.fixed or fixed)
    return Sum(before.time + time, edge, before.fixed and fixed, before, exact)


def _gone_on(before: Sum | None, span: Duration, edge: Edge) -> Sum | None:
    """None where nothing limits the one or the other."""
    return None if before is None or span.greatest is None else _sum(before, span.greatest, span, edge)


def _is_fixed(span: Duration) -> bool:
    return span.least == span.greatest


def _shorter(one: Sum) -> tuple[int, bool]:
    """Of two that take as long an exact one comes first."""
    return one.time, not one.exact


def _longer(one: Sum) -> tuple[int, bool]:
    return one.time, one.exact


def crossings(
    plays: Sequence[tuple[Settlement, Mapping[str, Sequence[Spell]]]], settled: bool = True
) -> Mapping[str, Crossings]:
    """For each name; ``settled``: only over what a machine goes through again and again, if there is such."""
    if not any(spells for _, spells in plays):
        return {}
    settlements = [settlement for settlement, _ in plays]
    parts = _where_ways_part(settlements)
    lasting = _past_the_start(settlements) if settled else lambda begin: True
    found: dict[str, Crossings] = {}
    for settlement, spells in plays:
        for name, edge, kind, span in _portions(settlement, spells, parts):
            if lasting(edge[0]):
                part = found.setdefault(name, Crossings()).part(edge)
                known = getattr(part, kind)
                setattr(part, kind, span if known is None else known.widened(span))
    return found


def _where_ways_part(settlements: Sequence[Settlement]) -> set[int]:
    """The states that more than one run leaves, and those at which plays end: there ways are added up."""
    leaving: dict[int, set[object]] = {}
    for one in settlements:
        fresh = one.recipe.way.fresh
        for passage in range(max(fresh, 0), len(one.states)):
            turned = one.recipe.turned if passage == fresh else frozenset()
            leaving.setdefault(one.states[passage], set()).add((one.path.passages[passage].outcome, turned))
    ends = {one.states[-1] for one in settlements if one.path.round is None}
    return ends | {state for state, ways in leaving.items() if len(ways) > 1}


@record
class _Stretch:
    """What lies from event ``begin`` to event ``end``, from passage ``first`` to passage ``last``: two at which ways
    part, or the ends of a play; ``end`` is None where it goes on to the end of the play."""

    edge: Edge
    begin: int
    end: int | None
    first: int
    last: int


def _stretches(settlement: Settlement, parts: set[int]) -> list[_Stretch]:
    """The part of a play that no other play has shown, cut where ways part. The last one of a play that has ended goes
    on to the end."""
    passages, states = settlement.path.passages, settlement.states
    fresh = max(settlement.recipe.way.fresh, 0)
    own = {fresh, settlement.path.settled if settlement.recipe.way.fresh < 0 else fresh}
    cuts = [number for number in range(fresh, len(states)) if number in own or states[number] in parts]
    ends = len(states) - 1
    found = []
    for first, last in zip(cuts, [*cuts[1:], None], strict=True):
        choice, outcome = passages[first].choice, passages[first].outcome
        end = ends if last is None else last
        over = last is None and (settlement.trace.finished or settlement.path.last is None)
        if end > first or over:
            edge = states[first], states[end], outcome, None if choice is None else choice.taken
            found.append(_Stretch(edge, passages[first].at, None if over else passages[end].at, first, end))
    if settlement.path.rest:
        # Behind the round, which is the last stretch, it goes on as in it.
        found.append(replace(found[-1], begin=passages[ends].at, end=None, first=ends, last=ends + 1))
    return found


def _portions(
    settlement: Settlement, named: Mapping[str, Sequence[Spell]], parts: set[int]
) -> Iterator[tuple[str, Edge, str, Duration]]:
    trace = settlement.trace
    at = [(trace.times[passage.at], passage.at) for passage in settlement.path.passages]
    stretches = _stretches(settlement, parts)
    asked = [
        (name, stretch, *part)
        for name, spells in named.items()
        for spell in spells
        for stretch in stretches
        if (part := _cut(trace.times, at, stretch, spell)) is not None
    ]
    rows = greatest_separations(trace.graph, both_ways((begin, end) for _, _, _, begin, end in asked))
    for name, stretch, kind, begin, end in asked:
        typical = trace.times[end] - trace.times[begin]
        goes_on = kind in ("closes", "passes") and settlement.path.passages[stretch.first].loose
        # What all comes about behind the state has its delays to itself.
        free = not goes_on or trace.graph.dominates(begin, end)
        yield name, stretch.edge, kind, Duration(-rows[end, begin], typical, closed(rows[begin, end]), free)


def _cut(
    times: Sequence[int], at: Sequence[tuple[int, int]], stretch: _Stretch, spell: Spell
) -> tuple[str, int, int] | None:
    """What of a spell lies in a stretch. ``first`` and ``last``: behind which passage it begins, and before which it
    ends."""
    first = bisect_right(at, (times[spell.begin], spell.begin)) - 1 if spell.first is None else spell.first
    last = len(at)
    if spell.end is not None:
        last = bisect_left(at, (times[spell.end], spell.end)) if spell.last is None else spell.last
    goes_on = stretch.end is None
    begins = not spell.under_way and stretch.first <= first and (first < stretch.last or goes_on)
    ends = spell.end is not None and stretch.first < last and (last <= stretch.last or goes_on)
    if begins and ends and spell.end is not None:
        return "within", spell.begin, spell.end
    if begins and stretch.end is not None:
        return "opens", spell.begin, stretch.end
    if ends and first < stretch.first and spell.end is not None:
        return "closes", stretch.begin, spell.end
    if first < stretch.first and last > stretch.last and stretch.end is not None:
        return "passes", stretch.begin, stretch.end
    return None


def _past_the_start(settlements: Sequence[Settlement]) -> Callable[[int], bool]:
    """Tells of a state whether a machine comes to it again and again, or from there; true of all where it goes round
    nowhere."""
    following: dict[int, set[int]] = {}
    for one in settlements:
        for number, _, _ in one.segments():
            following.setdefault(one.states[number], set()).add(one.states[number + 1])
            following.setdefault(one.states[number + 1], set())
    leading = Counter(end for ends in following.values() for end in ends)
    # What nothing leads to, and then what nothing else has led to, is come to only once.
    once = [state for state in following if not leading[state]]
    lasting = set(following)
    while once:
        state = once.pop()
        lasting.discard(state)
        for end in following[state]:
            leading[end] -= 1
            if not leading[end]:
                once.append(end)
    return lambda begin: not lasting or begin in lasting


def reached(following: Mapping[int, set[int]], begin: set[int]) -> set[int]:
    found = set(begin)
    waiting = list(found)
    while waiting:
        for state in following.get(waiting.pop(), set()) - found:
            found.add(state)
            waiting.append(state)
    return found
