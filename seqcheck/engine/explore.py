"""The timed state graph: every state that a machine comes through, and every run between two of them.

Takes a machine; gives plays that together stand for all runs, and the graph over them. A play goes on from the start,
as typical times and the first outcome of each choice have it, until a state comes up again. What might have come out
otherwise on its way is played otherwise from there: other outcomes of a choice, and the other way round every order
that the bounds leave open and that is nobody's fault. Runs that come to a known state join there; work grows with
states.
"""

from __future__ import annotations

from bisect import bisect_left
from collections import Counter, deque
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field, replace

from seqcheck.engine.bounds import greatest_separation
from seqcheck.engine.controller import Outcome
from seqcheck.engine.cylinders import Placed, Regions
from seqcheck.engine.guide import Passage, Path, Prefer, Scout, Signature, Way, first_of, outcomes_before
from seqcheck.engine.order import Order
from seqcheck.engine.orders import Orders
from seqcheck.engine.player import Player
from seqcheck.engine.program import Program, programs_of
from seqcheck.engine.regions import regions_of
from seqcheck.engine.seams import Seams
from seqcheck.engine.settlement import Recipe, Settlement, StateGraph, Turn
from seqcheck.engine.timeline import given
from seqcheck.engine.trace import Choice, Read, Trace
from seqcheck.engine.witness import Witness, witness
from seqcheck.machine.model import Machine, items_of
from seqcheck.machine.steps import Choose, Step

#: More ways than this in which orders may turn out between two states are not played; the report then says so.
MOST_ORDERS = 16
#: So often a way is played again with pistons where the play before has left them.
_MOST_PLACINGS = 8
#: What an event of a play costs besides the separations, in as many of them.
_WORK_OF_AN_EVENT = 5


@dataclass(slots=True)
class _Explorer:
    machine: Machine
    orders: Orders
    programs: Mapping[str, Program]
    states: dict[Signature, int] = field(default_factory=dict)
    found: list[Settlement] = field(default_factory=list)
    waiting: deque[Recipe] = field(default_factory=deque)
    planned: set[tuple[object, ...]] = field(default_factory=set)
    turns: Counter[tuple[object, ...]] = field(default_factory=Counter)
    complete: bool = True
    all_sewn: bool = True
    work_left: int = 0

    def explore(self, apart_us: int) -> StateGraph:
        self.waiting.append(Recipe(Way(), {}))
        self.work_left = most_work(self.machine)
        while self.waiting and self.work_left > 0:
            recipe = self.waiting.popleft()
            most = self.work_left if self.found else self.work_left + _more_for_the_first(self.machine)
            settlement = play(self.machine, recipe, self.orders, self.states, programs=self.programs, most=most)
            self.work_left -= _work_of(settlement)
            if settlement.path.astray:
                self.complete = False
                continue
            numbered = self._numbered(settlement)
            ended = recipe.way.fresh >= len(numbered)
            if ended:
                # It has come to an end before it came to where it was to part from the others.
                settlement = replace(settlement, recipe=replace(recipe, way=Way(recipe.way.outcomes)))
            self.found.append(replace(settlement, states=numbered))
            if settlement.trace.too_long:
                break
            if not ended:
                self._plan(self.found[-1])
        self.complete = self.complete and not self.waiting
        whole = self.complete and all(one.settled for one in self.found)
        sewn = tuple(self._sewn(apart_us)) if whole else ()
        return StateGraph(tuple(self.found), self.complete, sewn, self.all_sewn)

    def _sewn(self, apart_us: int) -> Iterator[Settlement]:
        self.work_left = most_work(self.machine)
        for way, delays in Seams(self.found, apart_us).ways():
            recipe = Recipe(way, delays)
            settlement = play(
                self.machine, recipe, self.orders, self.states, programs=self.programs, most=self.work_left
            )
            self.work_left -= _work_of(settlement)
            if self.work_left <= 0 or settlement.path.astray or not settlement.settled:
                self.all_sewn = False
                return
            yield replace(settlement, recipe=replace(recipe, way=Way(way.outcomes)))

    def _numbered(self, settlement: Settlement) -> tuple[int, ...]:
        """The states that it came through; up to where it turns an order they are those of the play that it turns, even
        where what comes later for that has moved behind one of them."""
        turn, passages = settlement.recipe.turn, settlement.path.passages
        before = () if turn is None else self.found[turn.play].states[: settlement.recipe.way.fresh + 1]
        own = passages[len(before) :]
        return before[: len(passages)] + tuple(
            self.states.setdefault(passage.signature, len(self.states)) for passage in own
        )

    def _plan(self, settlement: Settlement) -> None:
        """What else may come out between the states that this play was the first to come through."""
        path, recipe = settlement.path, settlement.recipe
        joined = len(path.passages) if path.joined is None else path.joined
        for number in range(recipe.way.fresh + 1, joined):
            passage = path.passages[number]
            for outcome in passage.outcomes:
                if outcome is not passage.outcome:
                    way = Way((*outcomes_before(path, number), outcome), number)
                    self.waiting.append(Recipe(way, recipe.delays, placed=settlement.placed_at(number)))
        times = settlement.trace.times
        at = [(times[passage.at], passage.at) for passage in path.passages]
        for number, order in path.orders:
            # The other way round, the play parts from this one before what the first of the two brings; if other plays
            # have shown that, where this one parts from them: they do not come to the second.
            parts = max(0, recipe.way.fresh, min(number, bisect_left(at, (times[order.first], order.first)) - 1))
            if recipe.way.fresh <= number and parts < joined:
                self._turn(settlement, parts, order)

    def _turn(self, settlement: Settlement, number: int, order: Order) -> None:
        recipe, path = settlement.recipe, settlement.path
        turned = recipe.turned if number == recipe.way.fresh else frozenset()
        if order.key in turned:
            return
        both = turned | {order.key}
        where = (settlement.states[number], path.passages[number].outcome)
        if (where, both) in self.planned:
            return
        if self.work_left <= 0:
            self.complete = False
            return
        before = settlement.trace.graph.work
        run = _turned_run(settlement.trace, order)
        self.work_left -= settlement.trace.graph.work - before
        if run is None:
            return
        if self.turns[where] >= MOST_ORDERS - 1:
            self.complete = False
            return
        self.turns[where] += 1
        self.planned.add((where, both))
        way = Way(outcomes_before(path, number + 1), number)
        turn = Turn(len(self.found) - 1, order)
        self.waiting.append(Recipe(way, {**recipe.delays, **run.delays}, both, turn, settlement.placed_at(number)))


def _turned_run(trace: Trace, order: Order) -> Witness | None:
    """A run that has the order the other way round and all others as they were played; None where there is none."""
    with trace.graph.not_assuming([(order.first, order.second)], order.keeping):
        turns = greatest_separation(trace.graph, order.second, order.first) > 0
        return witness(trace, order.first, order.second) if turns else None


def _work_of(settlement: Settlement) -> int:
    return settlement.trace.graph.work + _WORK_OF_AN_EVENT * len(settlement.trace.times)


def most_work(machine: Machine) -> int:
    """More work than this, in separations worked out, is not done; the report then says so. Sequences that go side by
    side and never wait for one another come to ever new states, whose pasts have nothing in common."""
    items = (item for sequence in machine.sequences for item in items_of(sequence.items))
    return 180_000 + 20_000 * sum(isinstance(item, Choose) for item in items)


def _more_for_the_first(machine: Machine) -> int:
    """The typical play of a machine of many steps comes round, whatever that takes in proportion to them."""
    return 2_000 * sum(isinstance(item, Step) for sequence in machine.sequences for item in items_of(sequence.items))


def explore(machine: Machine, apart_us: int = 0) -> StateGraph:
    """``apart_us``: how far apart events on two sides of a state may lie for their distance to matter."""
    return _Explorer(machine, Orders(machine), programs_of(machine)).explore(apart_us)


def play(
    machine: Machine,
    recipe: Recipe,
    orders: Orders,
    known: Mapping[Signature, int],
    prefer: Prefer = first_of,
    programs: Mapping[str, Program] | None = None,
    most: int | None = None,
) -> Settlement:
    """One way, pistons anywhere that its own bounds leave them. What is known as a piston stops mostly says it all; if
    not, it is played again, as far as that is known to be the same. ``most``: it goes no further than so much work
    takes it."""
    placed = recipe.placed
    for _ in range(_MOST_PLACINGS + 1):
        scout = Scout(machine, recipe.way, known, orders, prefer, most)
        player = scout.player = Player(machine, scout, given(recipe.delays), placed, programs=programs)
        trace = player.play()
        scout.finish()
        found = dict(regions_of(trace, player.cylinders.placings))
        used, stops = player.cylinders.regions, player.cylinders.stops
        stand = all(found.get(stroke) == used.get(stroke) for stroke in stops)
        if stand or trace.too_long:
            break
        placed = Placed(found, len(stops))
    return _settlement(recipe, trace, used, scout.path, stand)


def _settlement(recipe: Recipe, trace: Trace, regions: Regions, path: Path, stand: bool) -> Settlement:
    """``stand``: pistons stand in the ``regions`` that the bounds of the trace leave them."""
    last = len(trace.cycles) - 1
    first = max(0, last - 1)
    if path.round is not None:
        begin, end = (trace.times[path.passages[number].at] for number in path.round)
        within = [number for number, read in enumerate(trace.cycles) if begin <= trace.times[read.event] <= end]
        first, last = min(within, default=last), max(within, default=last)
    settled = stand and (path.joined is not None or trace.finished or trace.stepless is not None)
    return Settlement(trace, recipe, regions, path, settled, first, last)


def replay(machine: Machine, settlement: Settlement, run: Witness) -> Settlement:
    """The machine played with the delays of the witness, until a little after its last event."""
    delays = {**settlement.delays, **run.delays}
    outcomes = outcomes_before(settlement.path, len(settlement.path.passages))
    last = max(run.times.values())
    limit = last + last // 10 + 1_000_000
    follower = _Follower(outcomes, len(settlement.path.passages) + 1)
    player = follower.player = Player(machine, follower, given(delays), Placed({}), until_us=limit)
    trace = player.play()
    recipe = Recipe(Way(outcomes), delays)
    return Settlement(trace, recipe, {}, Path(), False, 0, len(trace.cycles) - 1)


def follow(machine: Machine, outcomes: Sequence[Outcome], passages: int) -> Settlement:
    """The machine at typical times, its first choices come out so, through so many states."""
    follower = _Follower(outcomes, passages)
    player = follower.player = Player(machine, follower)
    trace = player.play()
    Orders(machine).assume(trace, 0, 0, max(trace.times) + 1)
    return Settlement(trace, Recipe(Way(tuple(outcomes)), {}), {}, follower.path, False, 0, len(trace.cycles) - 1)


class _Follower:
    """Takes choices as another play has taken them, and goes through no more states than so many."""

    def __init__(self, outcomes: Sequence[Outcome], passages: int) -> None:
        self.player: Player | None = None
        self.path = Path()
        self._outcomes = list(outcomes)
        self._passages = passages

    def decide(self, choice: Choice, outcomes: Sequence[Outcome]) -> Outcome:
        wanted = self._outcomes.pop(0) if self._outcomes else outcomes[0]
        outcome = wanted if wanted in outcomes else outcomes[0]
        self._pass(Passage(choice.entered.event, (), None, choice, tuple(outcomes), outcome))
        return outcome

    def round_begins(self, read: Read, sequence: str) -> None:
        self._pass(Passage(read.event, (), sequence))

    def step_comes_again(self, read: Read, step: str) -> None:
        self._pass(Passage(read.event, (), step=step))

    def milestone_comes(self, read: Read, step: str) -> None:
        pass

    def _pass(self, passage: Passage) -> None:
        self.path.passages.append(passage)
        if len(self.path.passages) > self._passages and self.player is not None:
            self.player.stop()
