"""The timed state graph as it is read: states, and the runs between them with how long they take.

Takes settlements; gives every state once, and every run from one to the next with its least, typical and greatest
duration over all plays that have come through it. Exact for each run; where something else is under way across a state,
adding runs up is safe and may be a little wide.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field, replace

from seqcheck.engine.bounds import both_ways, closed, greatest_separations
from seqcheck.engine.controller import Outcome
from seqcheck.engine.explore import Settlement, StateGraph
from seqcheck.engine.guide import Passage
from seqcheck.engine.trace import Trace, Visit
from seqcheck.machine.conditions import TermKind, terms_of
from seqcheck.machine.devices import OutsideSignal
from seqcheck.machine.findings import Duration
from seqcheck.machine.model import Machine
from seqcheck.machine.steps import Choose, Step


@dataclass(frozen=True, slots=True)
class State:
    """``rounds``: the sequences that begin anew there; else a ``choose``, behind step ``after``."""

    number: int
    rounds: tuple[str, ...]
    choose: Choose | None
    after: str | None


@dataclass(frozen=True, slots=True)
class Run:
    """``outcome``: how the choice at its first state came out, None where there was none. ``play`` and ``passage``:
    where it was first come through. ``shared``: something is under way across its end that does not wait for it.
    ``counted``: how much of it counts for the cycle of a sequence, where that is not all: until such a sequence has
    left a first step that waits for a signal from outside, nothing does."""

    begin: int
    end: int
    outcome: Outcome | None
    duration: Duration
    play: int
    passage: int
    shared: bool = False
    counted: Mapping[str, Duration] = field(default_factory=dict)

    def for_cycle(self, sequence: str) -> Duration:
        return self.counted.get(sequence, self.duration)


@dataclass(frozen=True, slots=True)
class TimedStates:
    states: tuple[State, ...]
    runs: tuple[Run, ...]


def timed_states(machine: Machine, graph: StateGraph) -> TimedStates:
    states: dict[int, State] = {}
    runs: dict[tuple[object, ...], Run] = {}
    firsts = dict(_waiting_firsts(machine))
    for play, settlement in enumerate(graph.settlements):
        for number, passage in zip(settlement.states, settlement.path.passages, strict=True):
            states.setdefault(number, _state(number, passage))
        for run in _runs(play, settlement, firsts):
            key = (run.begin, run.outcome, run.end)
            known = runs.get(key)
            runs[key] = run if known is None else _merged(known, run)
    return TimedStates(tuple(states[number] for number in sorted(states)), tuple(runs.values()))


def _waiting_firsts(machine: Machine) -> Iterator[tuple[str, str]]:
    """Sequences whose first step waits for a signal from outside, with that step."""
    for sequence in machine.sequences:
        first = sequence.items[0] if sequence.items else None
        if isinstance(first, Step) and waits_for_outside(machine, first):
            yield sequence.name, first.name


def waits_for_outside(machine: Machine, step: Step) -> bool:
    return any(
        term.kind is TermKind.SIGNAL and isinstance(machine.signals[term.subject], OutsideSignal)
        for term in terms_of(step.until)
    )


def _state(number: int, passage: Passage) -> State:
    choice = passage.choice
    if choice is None:
        return State(number, passage.rounds, None, None)
    return State(number, (), choice.choose, choice.after)


def _runs(play: int, settlement: Settlement, firsts: Mapping[str, str]) -> Iterator[Run]:
    trace, states = settlement.trace, settlement.states
    waits = {name: [visit for visit in trace.visits if visit.step.name == step] for name, step in firsts.items()}
    for number, begin, end in settlement.segments():
        if number < settlement.recipe.way.fresh:
            continue
        following = settlement.path.passages[number + 2 : number + 3]
        shared = any(not trace.graph.dominates(end.at, later.at) and later.at != end.at for later in following)
        counted = dict(_counted(trace, waits, begin.at, end.at))
        yield Run(
            states[number],
            states[number + 1],
            begin.outcome,
            _duration(trace, begin.at, end.at),
            play,
            number,
            shared,
            counted,
        )


def _counted(trace: Trace, waits: Mapping[str, list[Visit]], begin: int, end: int) -> Iterator[tuple[str, Duration]]:
    """From where a first step that is waiting as the run begins is left; nothing, if that is only after its end."""
    times = trace.times
    for name, visits in waits.items():
        for visit in visits:
            if times[visit.entered.event] > times[begin] or (
                visit.entered.event != begin and _is_left(trace, visit, begin)
            ):
                continue
            if visit.left is not None and times[visit.left.event] <= times[end]:
                yield name, _duration(trace, visit.left.event, end)
            else:
                yield name, Duration(0, 0, 0)


def _is_left(trace: Trace, visit: Visit, event: int) -> bool:
    return visit.left is not None and trace.times[visit.left.event] <= trace.times[event]


def _duration(trace: Trace, begin: int, end: int) -> Duration:
    rows = greatest_separations(trace.graph, both_ways([(begin, end)]))
    return Duration(-rows[end, begin], trace.times[end] - trace.times[begin], closed(rows[begin, end]))


def _merged(one: Run, other: Run) -> Run:
    counted = {name: _both(one.for_cycle(name), other.for_cycle(name)) for name in (*one.counted, *other.counted)}
    return replace(
        one, duration=_both(one.duration, other.duration), shared=one.shared or other.shared, counted=counted
    )


def _both(one: Duration, other: Duration) -> Duration:
    greatest = None if one.greatest is None or other.greatest is None else max(one.greatest, other.greatest)
    return Duration(min(one.least, other.least), one.typical, greatest)
