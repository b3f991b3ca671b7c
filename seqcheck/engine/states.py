"""The timed state graph as it is read: states, and the runs between them with how long they take.

Takes settlements; gives every state once, and every run from one to the next with its least, typical and greatest
duration over all plays that have come through it. Exact for each run; where something else is under way across a state,
adding runs up is safe and may be a little wide.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import replace

from seqcheck.engine.bounds import both_ways, closed, greatest_separations
from seqcheck.engine.controller import Outcome
from seqcheck.engine.guide import Passage
from seqcheck.engine.settlement import Settlement, StateGraph
from seqcheck.machine.conditions import TermKind, terms_of
from seqcheck.machine.devices import OutsideSignal
from seqcheck.machine.findings import Duration
from seqcheck.machine.model import Machine
from seqcheck.machine.records import record
from seqcheck.machine.steps import Choose, Step


@record
class State:
    """``sequence``: which begins anew there; or a ``choose``, behind step ``after``; or a ``step`` to which a jump or a
    watchdog may lead."""

    number: int
    sequence: str | None
    choose: Choose | None
    after: str | None
    step: str | None = None


@record
class Run:
    """``outcome``: how the choice at its first state came out, None where there was none."""

    begin: int
    end: int
    outcome: Outcome | None
    duration: Duration


@record
class TimedStates:
    states: tuple[State, ...]
    runs: tuple[Run, ...]


def timed_states(graph: StateGraph) -> TimedStates:
    states: dict[int, State] = {}
    runs: dict[tuple[object, ...], Run] = {}
    for settlement in graph.settlements:
        for number, passage in zip(settlement.states, settlement.path.passages, strict=True):
            states.setdefault(number, _state(number, passage))
        for run in _runs(settlement):
            known = runs.setdefault((run.begin, run.outcome, run.end), run)
            runs[run.begin, run.outcome, run.end] = replace(known, duration=known.duration.widened(run.duration))
    return TimedStates(tuple(states[number] for number in sorted(states)), tuple(runs.values()))


def side_by_side(graphs: Sequence[TimedStates]) -> TimedStates:
    """Those of several parts of a machine, numbered through; no run leads from one part to another."""
    states: list[State] = []
    runs: list[Run] = []
    for graph in graphs:
        before = len(states)
        states += [replace(one, number=one.number + before) for one in graph.states]
        runs += [replace(one, begin=one.begin + before, end=one.end + before) for one in graph.runs]
    return TimedStates(tuple(states), tuple(runs))


def waits_for_outside(machine: Machine, step: Step) -> bool:
    return any(
        term.kind is TermKind.SIGNAL and isinstance(machine.signals[term.subject], OutsideSignal)
        for term in terms_of(step.until)
    )


def _state(number: int, passage: Passage) -> State:
    choice = passage.choice
    if choice is None:
        return State(number, passage.sequence, None, None, passage.step)
    return State(number, None, choice.choose, choice.after)


def _runs(settlement: Settlement) -> Iterator[Run]:
    trace, states = settlement.trace, settlement.states
    new = [one for one in settlement.segments() if one[0] >= settlement.recipe.way.fresh]
    rows = greatest_separations(trace.graph, both_ways((begin.at, end.at) for _, begin, end in new))
    for number, begin, end in new:
        typical = trace.times[end.at] - trace.times[begin.at]
        duration = Duration(-rows[end.at, begin.at], typical, closed(rows[begin.at, end.at]))
        yield Run(states[number], states[number + 1], begin.outcome, duration)
