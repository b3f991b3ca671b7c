"""What an exploration keeps: how each way was played, what came of it, and all of them together."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from seqcheck.engine.cylinders import NOT_PLACED, Placed, Regions
from seqcheck.engine.graph import DelayName
from seqcheck.engine.guide import Passage, Path, Way
from seqcheck.engine.order import Order, OrderKey
from seqcheck.engine.trace import Trace
from seqcheck.machine.records import record


@record
class Turn:
    """``order`` of the ``play``, by its number, of which another play is the other way round and else the same."""

    play: int
    order: Order


@record
class Recipe:
    """How to play one way: the outcomes of its choices, delays that are not typical, and which orders between the
    states at passage ``fresh`` and the next one they turn, the last of them by ``turn``."""

    way: Way
    delays: Mapping[DelayName, int]
    turned: frozenset[OrderKey] = frozenset()
    turn: Turn | None = None
    placed: Placed = NOT_PLACED


@record
class Settlement:
    """One play. ``first`` and ``last``: the settled cycles run from one to the other of ``trace.cycles`` (none for a
    sequence that runs once or does not come round). ``settled``: a known state has come up, or nothing was due any
    more; and pistons stand wherever its bounds leave them. ``states``: the numbers of the states that it came through,
    by passage."""

    trace: Trace
    recipe: Recipe
    regions: Regions
    path: Path
    settled: bool
    first: int
    last: int
    states: tuple[int, ...] = ()

    @property
    def delays(self) -> Mapping[DelayName, int]:
        return self.recipe.delays

    @property
    def fresh_since(self) -> int:
        """The typical time from which on the play shows what no other play has shown before."""
        fresh = self.recipe.way.fresh
        return self.trace.times[self.path.passages[fresh].at] if fresh >= 0 else 0

    def placed_at(self, number: int) -> Placed:
        """Where pistons stand that have been stopped up to a passage."""
        at = self.trace.times[self.path.passages[number].at]
        stands = (stroke.stands for stroke in self.trace.strokes if stroke.stands is not None)
        return Placed(self.regions, sum(self.trace.times[event] <= at for event in stands))

    def segments(self) -> Iterator[tuple[int, Passage, Passage]]:
        """Each run from one state to the next, by the number of its first passage."""
        for number, (begin, end) in enumerate(zip(self.path.passages, self.path.passages[1:], strict=False)):
            yield number, begin, end


@record
class StateGraph:
    """The first settlement is the typical one. ``complete``: whatever may come out otherwise was played. ``sewn``: more
    plays, of ways of which each run is known, for what lies on both sides of a state; ``all_sewn``: as many as it
    takes."""

    settlements: tuple[Settlement, ...]
    complete: bool
    sewn: tuple[Settlement, ...] = ()
    all_sewn: bool = True

    def unturned(self, recipe: Recipe) -> int:
        """The play from which another one has come, one order after the other turned behind the same state."""
        turn = recipe.turn
        assert turn is not None
        for _ in range(len(recipe.turned) - 1):
            turn = self.settlements[turn.play].recipe.turn
            assert turn is not None
        return turn.play
