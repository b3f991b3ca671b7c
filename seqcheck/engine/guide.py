"""Where a play is on the timed state graph, and when it has gone far enough.

Takes the way to go (outcomes of choices, in order) and the states that are known; follows a player through its states,
at starts of rounds and at choices that may come out in several ways. Once a state comes up again the play goes on a
little (round again, if it was its own), so that every pair of events across the border is in the trace, and stops.

A state is the machine and all that is under way, with the bounds of when it will come; what has come already but may
yet come after the state in other runs belongs to it, too, and so does a coil released so lately that its valve's
``gap`` is not over.
"""

from __future__ import annotations

from collections.abc import Callable, Collection, Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from typing import NamedTuple

from seqcheck.engine.bounds import both_ways, greatest_separations, is_open
from seqcheck.engine.controller import Outcome
from seqcheck.engine.graph import Event
from seqcheck.engine.order import Order
from seqcheck.engine.orders import Orders, Waits
from seqcheck.engine.player import Player
from seqcheck.engine.trace import Choice, Read, Trace
from seqcheck.machine.model import Machine, items_of
from seqcheck.machine.steps import Choose, Item, Jump, Repeat, Step, Together

Signature = tuple[object, ...]


class UnderWay(NamedTuple):
    """What is to come at a state, or ``came`` but may yet come later in other runs: how much later than the state it
    can be at the ``latest``, and how much ``before`` it, microseconds."""

    came: bool
    what: str
    subject: str
    detail: str
    latest: int
    before: int

    @property
    def loose(self) -> bool:
        """Whether it comes earlier or later behind the state as times have gone before it. (What may come at any time
        may do so whatever has been before.)"""
        free = is_open(self.latest) and self.before >= 0
        return self.latest > 0 and self.latest != -self.before and not free


#: Prefers one of the outcomes of a choice that nothing else decides.
Prefer = Callable[[Choice, Sequence[Outcome]], Outcome]

#: So many rounds of one sequence are played in search of a state that comes up again; or so many (if that is more) with
#: all that a ``repeat`` goes through counted each time.
MOST_ROUNDS = 12
_MOST_UNROLLED = 3


#: What looking at a state costs besides the separations that it takes, in as many of them.
_WORK_OF_A_STATE = 150
#: What was over so many states ago has no open order any more.
_LATE = 8


def _most_passages(machine: Machine) -> int:
    """So many states are gone through in search of one that comes up again."""
    items = [item for sequence in machine.sequences for item in items_of(sequence.items)]
    watchdogs = [item.watchdog for item in items if isinstance(item, Choose | Step) and item.watchdog is not None]
    targets = {item.target for item in items if isinstance(item, Jump)} | {one.target for one in watchdogs}
    once = sum(
        isinstance(item, Choose | Jump) or (isinstance(item, Step) and item.watchdog is not None) for item in items
    )
    unrolled = sum(_states_within(sequence.items, targets) for sequence in machine.sequences)
    begun = len(machine.sequences)
    return max(MOST_ROUNDS * (begun + once), _MOST_UNROLLED * (begun + unrolled))


def _states_within(items: Sequence[Item], targets: Collection[str | None]) -> int:
    """Choices, and steps that are ``targets`` of jumps and watchdogs, as often as they are come to in a round."""
    found = 0
    for item in items:
        match item:
            case Repeat(times, inner):
                found += times * _states_within(inner, targets)
            case Together(branches):
                found += sum(_states_within(branch, targets) for branch in branches)
            case Choose(choices):
                found += 1 + sum(_states_within(choice.items, targets) for choice in choices)
            case Step(name):
                found += name in targets
    return found


def first_of(choice: Choice, outcomes: Sequence[Outcome]) -> Outcome:
    return outcomes[0]


@dataclass(slots=True, eq=False)
class Passage:
    """A state as one play has come through it, at the read event ``at``. ``choice`` and ``outcomes`` where it is one
    that could come out otherwise, ``outcome`` as it did; else ``sequence``: which begins anew, or ``step``: which a
    jump or a watchdog may lead to."""

    at: int
    signature: Signature
    sequence: str | None = None
    choice: Choice | None = None
    outcomes: tuple[Outcome, ...] = ()
    outcome: Outcome | None = None
    step: str | None = None
    under_way: tuple[UnderWay, ...] = ()

    @property
    def loose(self) -> bool:
        """Whether how long anything takes from here hangs on how long it took to come here."""
        return any(one.loose for one in self.under_way)


@dataclass(slots=True)
class Way:
    """How to play: the ``outcomes`` of the first choices. Everything behind passage ``fresh`` is new (-1: all is)."""

    outcomes: tuple[Outcome, ...] = ()
    fresh: int = -1


@dataclass(slots=True)
class Path:
    """What the guide has seen. ``joined``: the passage at which a known state came up again, None while none has;
    ``settled``: where that state came up first in this very play. ``first`` to ``last``: the passages between which the
    play then goes once round; up to ``last`` a little further, where the state is one of another play. ``again``: the
    event from which the play goes once round to its end. ``rest``: behind ``last`` it goes on as behind ``first``, up
    to where that was as in the round before."""

    passages: list[Passage] = field(default_factory=list)
    orders: list[tuple[int, Order]] = field(default_factory=list)
    joined: int | None = None
    settled: int | None = None
    first: int | None = None
    last: int | None = None
    again: int | None = None
    rest: bool = False
    #: The way cannot be gone: a choice had no such outcome.
    astray: bool = False

    @property
    def round(self) -> tuple[int, int] | None:
        """``first`` and ``last``, if the play has come so far."""
        if self.first is None or self.last is None or self.last >= len(self.passages):
            return None
        return self.first, self.last


def outcomes_before(path: Path, number: int) -> tuple[Outcome, ...]:
    """How the choices at the first so many passages came out."""
    return tuple(passage.outcome for passage in path.passages[:number] if passage.outcome is not None)


class Scout:
    """``known``: signatures that other plays have come through. ``most``: the play stops at a state once it has cost
    so much work."""

    def __init__(
        self,
        machine: Machine,
        way: Way,
        known: Mapping[Signature, int],
        orders: Orders,
        prefer: Prefer = first_of,
        most: int | None = None,
    ) -> None:
        self.path = Path()
        self.player: Player | None = None
        self._machine = machine
        self._way = way
        self._known = known
        self._own: dict[Signature, int] = {}
        self._orders = orders
        self._prefer = prefer
        self._most = most
        self._decided = 0
        self._most_passages = _most_passages(machine)
        #: What milestones were like, with how many states had been before; the first that is as in the round before,
        #: with its event.
        self._milestones: dict[Signature, int] = {}
        self._alike: tuple[str, int] | None = None
        self._period = 0
        self._pool: list[int] = []
        self._seen_events = self._seen_at = 0
        self._waits = Waits()
        #: How long after a coil is released the gap of its valve lasts.
        self._gaps = {
            coil.name: (machine.valves[coil.valve].gap or 0) + coil.decay.greatest for coil in machine.coils.values()
        }
        self._most_gap = max(self._gaps.values(), default=0)

    def decide(self, choice: Choice, outcomes: Sequence[Outcome]) -> Outcome:
        outcome = self._prefer(choice, outcomes)
        if self._decided < len(self._way.outcomes):
            wanted = self._way.outcomes[self._decided]
            self.path.astray = self.path.astray or wanted not in outcomes
            outcome = wanted if wanted in outcomes else outcome
        passage = Passage(choice.entered.event, (), None, choice, tuple(outcomes), outcome)
        self._decided += 1
        self._pass(passage, ("choice", choice.choose.place))
        return outcome

    def round_begins(self, read: Read, sequence: str) -> None:
        self._pass(Passage(read.event, (), sequence), ("round", sequence))

    def step_comes_again(self, read: Read, step: str) -> None:
        self._pass(Passage(read.event, (), step=step), ("step", step))

    def milestone_comes(self, read: Read, step: str) -> None:
        """A typical play that comes round need not go once more through all that it first did otherwise: it goes round
        from the first milestone that was as in the round before."""
        path, player = self.path, self.player
        assert player is not None
        if path.rest:
            if self._alike is not None and step == self._alike[0]:
                player.stop()
        elif path.joined is None and self._alike is None and self._way.fresh < 0 and len(self._machine.sequences) == 1:
            player.trace.graph.work += _WORK_OF_A_STATE
            passed = len(path.passages)
            signature = (step, player.state, self._under_way(player, read.event))
            if self._milestones.setdefault(signature, passed) == passed - 1:
                self._alike = step, read.event

    def _pass(self, passage: Passage, where: tuple[object, ...]) -> None:
        path, player = self.path, self.player
        assert player is not None
        player.trace.graph.work += _WORK_OF_A_STATE
        index = len(path.passages)
        self._assume_orders(player.trace, player.trace.times[passage.at])
        passage.under_way = self._under_way(player, passage.at)
        passage.signature = (where, player.state, passage.under_way)
        path.passages.append(passage)
        if self._most is not None and player.trace.graph.work > self._most:
            player.stop()
        elif path.last is not None:
            if index >= path.last:
                player.stop()
        elif self._period:
            self._end_of_round(index)
        elif path.joined is not None:
            self._end_behind_join(index)
        elif index > self._way.fresh:
            self._look_up(player, index)

    def _look_up(self, player: Player, index: int) -> None:
        path = self.path
        passage = path.passages[index]
        before = self._own.get(passage.signature)
        if before is not None:
            path.joined, path.settled, self._period = index, before, index - before
            if self._period == 1 and self._alike is not None:
                path.first, path.last, path.again, path.rest = before, index, self._alike[1], True
            else:
                self._end_of_round(index)
        elif passage.signature in self._known:
            path.joined = index
        else:
            self._own[passage.signature] = index
            self._alike = None
            if index - self._way.fresh > self._most_passages:
                player.stop()

    def _end_of_round(self, index: int) -> None:
        """The play goes round once more from the first start of a round of the first sequence, if there is one."""
        path = self.path
        assert path.joined is not None
        name = self._machine.sequences[0].name
        if name == path.passages[index].sequence or index == path.joined + self._period - 1:
            path.first, path.last, path.again = index, index + self._period, path.passages[index].at
            self._period = 0

    def _end_behind_join(self, index: int) -> None:
        """On to the next state at which ways part, or at which a round of the first sequence begins."""
        path = self.path
        assert path.joined is not None and self.player is not None
        passage = path.passages[index]
        begins = passage.sequence == self._machine.sequences[0].name
        if passage.choice is not None or begins or index - path.joined >= _LATE:
            path.last = index
            self.player.stop()

    def _assume_orders(self, trace: Trace, end: int) -> None:
        """What was open since the last state is taken to be as it was played."""
        since, begin = self._looked_at(trace)
        found = self._orders.assume(trace, since, begin, end, self._waits)
        self.path.orders += [(len(self.path.passages) - 1, order) for order in found]

    def finish(self) -> None:
        """What was open behind the last state."""
        assert self.player is not None
        self._assume_orders(self.player.trace, max(self.player.trace.times) + 1)

    def _looked_at(self, trace: Trace) -> tuple[int, int]:
        """Since when something may still have orders that are open, and up to when they have been looked at."""
        at = [trace.times[passage.at] for passage in self.path.passages[-_LATE:]]
        return (at[0] if len(at) == _LATE else 0), (at[-1] if at else 0)

    def _under_way(self, player: Player, at: int) -> tuple[UnderWay, ...]:
        """What is still to come, and what may yet come later than the state, by when that is."""
        graph, happened = player.trace.graph, player.timeline.happened
        pending = player.timeline.pending
        came = [one for one in self._that_may_matter(player, at) if one in happened]
        bounds = greatest_separations(graph, both_ways((at, one) for one in (*pending, *came)))
        late = [one for one in came if bounds[at, one] > -self._gap_after(graph.events[one])]
        self._pool = [*late, *pending]
        self._seen_events, self._seen_at = len(graph.events), at
        return tuple(
            sorted(
                UnderWay(
                    number in happened,
                    graph.events[number].what,
                    graph.events[number].subject,
                    graph.events[number].detail,
                    bounds[at, number],
                    bounds[number, at],
                )
                for number in (*pending, *late)
            )
        )

    def _that_may_matter(self, player: Player, at: int) -> Iterator[int]:
        """The events of which plain intervals leave it open that they come after the state, or too shortly before it;
        of what was over at the last state no other than was kept then."""
        graph = player.trace.graph
        earliest, latest, dominator = graph.earliest, graph.latest, graph.dominator
        dominating = {at}
        top = at
        while top > self._seen_at:
            top = dominator[top]
            dominating.add(top)
        for number in (*self._pool, *range(self._seen_events, len(graph.events))):
            common = number
            while common not in dominating and common > top:
                common = dominator[common]
            if common not in dominating:
                common = graph.common_dominator(common, top)
            left = earliest[at] - earliest[common] - (latest[number] - latest[common])
            if left < 0 or (left < self._most_gap and left < self._gap_after(graph.events[number])):
                yield number

    def _gap_after(self, event: Event) -> int:
        """How long after this event the gap of a valve lasts."""
        return self._gaps.get(event.subject, 0) if (event.what, event.detail) == ("coil", "off") else 0
