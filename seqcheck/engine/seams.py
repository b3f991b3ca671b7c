"""Ways that go through known runs, for what lies on both sides of a state.

Plays join where a state is known, so that not every run that leads to it was played with every run that leaves it. What
can break is found all the same, as what may come later than a state belongs to it; how much is left between an event
before it and one behind it only a play tells that goes through both. Takes the plays of a state graph; gives ways that
together go on from every state as from every other run that leads to it.
"""

from __future__ import annotations

from collections import deque
from collections.abc import Iterator, Mapping, Sequence
from itertools import pairwise

from seqcheck.engine.bounds import greatest_separations
from seqcheck.engine.controller import Outcome
from seqcheck.engine.graph import DelayName
from seqcheck.engine.guide import Way, outcomes_before
from seqcheck.engine.order import OrderKey
from seqcheck.engine.settlement import Settlement
from seqcheck.machine.records import record

#: From one state at which ways part (-1: from the start) to the next, as the choice at the first came out, and which
#: orders were turned.
_Edge = tuple[int, Outcome | None, frozenset[OrderKey]]
#: Edges one after the other, all but the first together brief.
_Past = tuple[_Edge, ...]
#: What takes no longer than this parts nothing: what lies before it is looked at with what lies behind it; but no more
#: than so many edges at once.
_BRIEF_US = 100_000
_MOST_EDGES = 3
#: So many choices a way goes through before another one is begun.
_LONG = 60
#: What is new is looked for behind no more pasts than these.
_FAR = 30


@record
class _Reach:
    """Where an edge leads: to which state, through how many passages, in what time at least."""

    state: int
    passages: int
    least_us: int


@record
class _Place:
    """How a play has come to a state at which ways part: the outcomes of its choices, the number of its passage, delays
    that are not typical."""

    outcomes: tuple[Outcome, ...]
    passage: int
    delays: Mapping[DelayName, int]


class Seams:
    """``apart_us``: what lies further apart is not asked about."""

    def __init__(self, settlements: Sequence[Settlement], apart_us: int) -> None:
        self._brief_us = max(_BRIEF_US, apart_us)
        self._outcomes: dict[int, tuple[Outcome, ...]] = {}
        self._reach: dict[_Edge, _Reach] = {}
        self._shown: set[tuple[_Past, Outcome]] = set()
        self._places: dict[_Past, _Place] = {}
        self._waiting: deque[_Past] = deque()
        for one in settlements:
            self._note(one)

    def ways(self) -> Iterator[tuple[Way, Mapping[DelayName, int]]]:
        """Each with the delays that are not typical on it."""
        while self._waiting:
            past = self._waiting[0]
            if all((past, outcome) in self._shown for outcome in self._leaving(past)):
                self._waiting.popleft()
            else:
                yield self._way(past), self._places[past].delays

    def _way(self, past: _Past) -> Way:
        """On from there to what no play has shown, and from there to more."""
        place = self._places[past]
        outcomes, passage, last = list(place.outcomes), place.passage, place.passage
        route = self._to_what_is_new(past)
        while route and len(outcomes) < len(place.outcomes) + _LONG:
            for outcome in route:
                self._shown.add((past, outcome))
                outcomes.append(outcome)
                last = passage
                edge = self._edge(past, outcome)
                if edge not in self._reach:
                    return Way(tuple(outcomes), last)
                past = self._behind(past, edge)
                passage += self._reach[edge].passages
                self._come(past, _Place(tuple(outcomes), passage, place.delays))
            route = self._to_what_is_new(past)
        return Way(tuple(outcomes), last)

    def _to_what_is_new(self, past: _Past) -> tuple[Outcome, ...]:
        """The fewest outcomes of which the last is shown by no play behind what comes before it; none where there are
        no such, or they are far away."""
        reached = {past}
        waiting: deque[tuple[_Past, tuple[Outcome, ...]]] = deque([(past, ())])
        while waiting and len(reached) <= _FAR:
            now, route = waiting.popleft()
            for outcome in self._leaving(now):
                if (now, outcome) not in self._shown:
                    return (*route, outcome)
                edge = self._edge(now, outcome)
                if edge in self._reach and (following := self._behind(now, edge)) not in reached:
                    reached.add(following)
                    waiting.append((following, (*route, outcome)))
        return ()

    def _note(self, one: Settlement) -> None:
        """What a play shows one behind the other; what it has gone through before in other than typical times is known
        from elsewhere."""
        passages, delays, fresh = one.path.passages, one.recipe.delays, one.recipe.way.fresh
        parting = [number for number, passage in enumerate(passages) if len(passage.outcomes) > 1]
        for number in parting:
            self._outcomes.setdefault(one.states[number], passages[number].outcomes)
        past: _Past = ()
        for begin, end in pairwise((-1, *parting)):
            if delays and end <= fresh:
                continue
            turned = one.recipe.turned if begin <= fresh < end else frozenset[OrderKey]()
            edge = (-1, None, turned) if begin < 0 else (one.states[begin], passages[begin].outcome, turned)
            if edge not in self._reach:
                least = _least(one, begin, end) if begin >= 0 else self._brief_us + 1
                self._reach[edge] = _Reach(one.states[end], end - max(begin, 0), least)
            past = self._behind(past, edge)
            self._come(past, _Place(outcomes_before(one.path, end), end, delays))
            outcome = passages[end].outcome
            if outcome is not None and (end < parting[-1] or one.path.last is None):
                self._shown.add((past, outcome))

    def _leaving(self, past: _Past) -> tuple[Outcome, ...]:
        return self._outcomes[self._reach[past[-1]].state]

    def _edge(self, past: _Past, outcome: Outcome) -> _Edge:
        return self._reach[past[-1]].state, outcome, frozenset()

    def _behind(self, past: _Past, edge: _Edge) -> _Past:
        """The edge and those before it, as far back as what lies between is brief; one with an order turned, to which
        every play would have to go anew, by itself only."""
        kept: _Past = (edge,)
        between = self._reach[edge].least_us
        for before in reversed(past):
            if between > self._brief_us or len(kept) == _MOST_EDGES or before[2]:
                break
            kept = (before, *kept)
            between += self._reach[before].least_us
        return kept

    def _come(self, past: _Past, place: _Place) -> None:
        if past not in self._places:
            self._places[past] = place
            self._waiting.append(past)


def _least(one: Settlement, begin: int, end: int) -> int:
    """How long the play takes at least from one passage to another."""
    pair = (one.path.passages[end].at, one.path.passages[begin].at)
    return -greatest_separations(one.trace.graph, [pair])[pair]
