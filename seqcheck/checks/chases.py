"""Where steps can chase each other for ever without time passing.

Takes settlements; gives the ways through the timed state graph that come round again in no time. In all that goes on
for ever at one instant every run from state to state takes no time, and so does every wait that ends in it: a dwell or
a signal from outside keeps a run from being one of these. Where all that holds and only several waits together need
time, more may be told than can be.
"""

from __future__ import annotations

from bisect import bisect_left
from collections.abc import Collection, Iterator, Mapping, Sequence

from seqcheck.checks.crossings import reached
from seqcheck.engine.bounds import both_ways, greatest_separations
from seqcheck.engine.settlement import Settlement
from seqcheck.engine.trace import Visit, Wait
from seqcheck.machine.model import Machine
from seqcheck.machine.records import record
from seqcheck.machine.steps import Step


@record
class Instant:
    """A run that can take no time, from passage ``number`` of a play to the next one; ``always``: it never takes any.
    ``steps`` are left in it."""

    settlement: Settlement
    number: int
    always: bool
    steps: tuple[Step, ...]

    @property
    def states(self) -> tuple[int, int]:
        return self.settlement.states[self.number], self.settlement.states[self.number + 1]


@record
class Chase:
    """Runs that lead round and round among these ``states``; ``step`` is the first of the text that is left in them.
    ``certain``: whoever comes there stays, and no time passes any more."""

    states: frozenset[int]
    runs: tuple[Instant, ...]
    step: Step
    certain: bool


def chases_of(machine: Machine, settlements: Sequence[Settlement]) -> tuple[Chase, ...]:
    if machine.controller.round.least > 0:
        return ()  # Every step lasts a round.
    leaving: dict[int, int] = {}
    instants: list[Instant] = []
    for one in settlements:
        fresh = [number for number, _, _ in one.segments() if number >= one.recipe.way.fresh]
        for number in fresh:
            leaving[one.states[number]] = leaving.get(one.states[number], 0) + 1
        instants += _instants(one, fresh)
    return tuple(_chases(instants, leaving))


def _instants(settlement: Settlement, numbers: Sequence[int]) -> Iterator[Instant]:
    passages, trace = settlement.path.passages, settlement.trace
    runs = {number: (passages[number].at, passages[number + 1].at) for number in numbers}
    ended = _ended_in(settlement, runs)
    rows = greatest_separations(
        trace.graph, both_ways([*runs.values(), *(_span(wait) for waits in ended.values() for wait in waits)])
    )
    for number, (begin, end) in runs.items():
        spans = [(begin, end), *(_span(wait) for wait in ended[number])]
        if all(rows[last, first] >= 0 for first, last in spans) and not any(map(_by_somebody, ended[number])):
            steps = tuple(wait.step for wait in ended[number] if isinstance(wait, Visit))
            yield Instant(settlement, number, rows[begin, end] <= 0, steps)


def _ended_in(settlement: Settlement, runs: Collection[int]) -> dict[int, list[Wait]]:
    """For each of these runs what has been waited for until then."""
    trace = settlement.trace
    at = [(trace.times[passage.at], passage.at) for passage in settlement.path.passages]
    found: dict[int, list[Wait]] = {number: [] for number in runs}
    for wait in (*trace.visits, *trace.choices):
        if wait.left is not None:
            number = bisect_left(at, (trace.times[wait.left.event], wait.left.event)) - 1
            if number in found:
                found[number].append(wait)
    return found


def _span(wait: Wait) -> tuple[int, int]:
    assert wait.left is not None
    return wait.entered.event, wait.left.event


def _by_somebody(wait: Wait) -> bool:
    """Whether a signal from outside has ended it."""
    return any(answer.literal in wait.signals for answer in wait.answers)


def _chases(instants: Sequence[Instant], leaving: Mapping[int, int]) -> Iterator[Chase]:
    following: dict[int, set[int]] = {}
    for one in instants:
        following.setdefault(one.states[0], set()).add(one.states[1])
    behind = {state: reached(following, ends) for state, ends in following.items()}
    told: set[int] = set()
    for state in sorted(behind):
        if state in behind[state] and state not in told:
            among = {other for other in behind[state] if state in behind.get(other, ())}
            told |= among
            runs = tuple(one for one in instants if among.issuperset(one.states))
            steps = [step for one in runs for step in one.steps]
            if steps:
                certain = sum(one.always for one in runs) == sum(leaving[one] for one in among)
                yield Chase(frozenset(among), runs, min(steps, key=lambda step: step.place), certain)
