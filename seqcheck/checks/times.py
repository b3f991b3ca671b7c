"""How long cycles and steps take, and which chain of events makes the longest cycle.

Takes a study; gives durations over the settled cycles, exact at both ends. A cycle runs from entering the first step
to entering it again; where that step waits for a signal from outside, from leaving it to entering it again; a sequence
that runs once, from its start to its end.
"""

from __future__ import annotations

from collections.abc import Collection, Iterable, Iterator, Sequence
from functools import partial, reduce
from itertools import pairwise

from seqcheck.checks.cycle_ways import CycleWays
from seqcheck.checks.narrate import describe
from seqcheck.checks.shown_states import branch_name
from seqcheck.checks.study import Study
from seqcheck.engine.bounds import Rows, both_ways, causes_since, closed, greatest_separations, separation_table
from seqcheck.engine.graph import Event
from seqcheck.engine.states import Run, TimedStates, waits_for_outside
from seqcheck.engine.trace import Read
from seqcheck.machine.findings import ChoiceTime, Duration, PathPart
from seqcheck.machine.model import Machine, items_of, steps_of
from seqcheck.machine.steps import Choose

_Interval = tuple[int, int]


def cycle_times(studies: Sequence[Study], timed: TimedStates) -> tuple[tuple[str, Duration], ...]:
    """Of every sequence. Where nothing comes out in several ways, as the plays themselves show it, exactly; else by
    all ways through the timed state graph."""
    found = []
    one_way = not any(state.choose for state in timed.states) and len(studies[0].machine.sequences) == 1
    for sequence in studies[0].machine.sequences:
        played = [duration for study in studies if (duration := _played(study, sequence.name)) is not None]
        ways = None if one_way or sequence.once else CycleWays(timed, sequence.name).duration()
        if ways is not None:
            typical = played[0].typical if played else ways.typical
            found.append((sequence.name, Duration(ways.least, typical, ways.greatest)))
        elif played:
            found.append((sequence.name, reduce(longer_of, played)))
    return tuple(found)


def choice_times(machine: Machine, timed: TimedStates) -> tuple[ChoiceTime, ...]:
    """The cycle of the sequence that chooses, for every branch that can be taken."""
    found = []
    owners = {
        id(item): one.name for one in machine.sequences for item in items_of(one.items) if isinstance(item, Choose)
    }
    choices = {state.choose.place: state.choose for state in timed.states if state.choose is not None}
    for choose in (choices[place] for place in sorted(choices)):
        ways = CycleWays(timed, owners[id(choose)])
        at = {state.number for state in timed.states if state.choose is choose}
        for number, choice in enumerate(choose.choices):
            duration = ways.duration(partial(_takes, at, number))
            if duration is not None:
                found.append(ChoiceTime(owners[id(choose)], choice.place, branch_name(choose, number), duration))
    return tuple(found)


def _takes(states: Collection[int], branch: int, run: Run) -> bool:
    return run.begin in states and run.outcome is not None and run.outcome.taken == branch


def _played(study: Study, sequence: str) -> Duration | None:
    intervals = list(cycles_in(study, sequence, settled=True))
    return _duration(study, intervals, _bounds(study, intervals)) if intervals else None


def longer_of(one: Duration, other: Duration) -> Duration:
    """From the least of both to the greatest of both; typical as the first."""
    longest = None if one.greatest is None or other.greatest is None else max(one.greatest, other.greatest)
    return Duration(min(one.least, other.least), one.typical, longest)


def step_times(studies: Sequence[Study]) -> tuple[tuple[str, Duration], ...]:
    """In the order of the text; steps that no settled cycle leaves are left out."""
    found: dict[str, Duration] = {}
    for study in studies:
        for name, duration in _step_times(study):
            found[name] = longer_of(found[name], duration) if name in found else duration
    steps = [step.name for sequence in studies[0].machine.sequences for step in steps_of(sequence)]
    return tuple((name, found[name]) for name in steps if name in found)


def _step_times(study: Study) -> Iterator[tuple[str, Duration]]:
    by_step: dict[str, list[_Interval]] = {}
    since = _settled_since(study)
    for visit in study.trace.visits:
        if visit.left is not None and study.time(visit.entered.event) >= since:
            by_step.setdefault(visit.step.name, []).append((visit.entered.event, visit.left.event))
    rows = _bounds(study, (interval for intervals in by_step.values() for interval in intervals))
    for name, intervals in by_step.items():
        yield name, _duration(study, intervals, rows)


def critical_path(study: Study) -> tuple[PathPart, ...]:
    """The chain of causes that makes the longest settled cycle as long as it can be."""
    intervals = list(cycles_in(study, study.machine.sequences[0].name, settled=True))
    if not intervals:
        return ()
    rows = _bounds(study, intervals)
    start, end = max(intervals, key=lambda interval: rows[interval])
    graph = study.trace.graph
    members = causes_since(graph, graph.common_dominator(start, end), {start, end})
    column = separation_table(graph, members, [start])[:, 0].tolist()
    latest = dict(zip(members, column, strict=True))
    return tuple(reversed(list(_told_backwards(study, latest, start, end))))


def _told_backwards(study: Study, latest: dict[int, int], start: int, end: int) -> Iterator[PathPart]:
    """From the end back to the start; the delays of events that have no words of their own go to the next one."""
    graph = study.trace.graph
    event, text, at = end, "", 0
    least = greatest = 0
    while True:
        words = _words(study, event)
        if words or event == end:
            if text:
                yield PathPart(text, closed(at), least, closed(greatest))
            text, at, least, greatest = words or "end of the cycle", latest[event], 0, 0
        if event == start or not graph.arcs[event]:
            yield PathPart(text, closed(at), least, closed(greatest))
            return
        arc = max(graph.arcs[event], key=lambda arc: latest.get(arc.cause, -(1 << 60)) + arc.span.greatest)
        if arc.cause not in latest:
            yield PathPart(text, closed(at), least, closed(greatest))
            return
        least, greatest = least + arc.span.least, greatest + arc.span.greatest
        event = arc.cause


def _words(study: Study, event: int) -> str:
    told = [describe(study, study.trace.graph.events[event])]
    if event in study.reads_by_event:
        told += [f"step {visit.step.name} entered" for visit in study.reads_by_event[event].entered]
    return ", ".join(text for text in told if text)


def cycles_in(study: Study, sequence: str, settled: bool = False) -> Iterator[_Interval]:
    """The cycles that a play has come through whole; only ``settled`` ones, if asked. A sequence that runs once has
    one, from its start to its end."""
    trace = study.trace
    rounds = trace.rounds[sequence]
    once = {one.name: one.once for one in study.machine.sequences}[sequence]
    if once:
        visits = [visit for visit in trace.visits if visit.step.name.split(".", 1)[0] == sequence]
        if visits and all(visit.left is not None for visit in visits):
            ends = [visit.left.event for visit in visits if visit.left is not None]
            yield _begin(study, rounds[0], sequence), study.last_of(Event("end", ""), ends)
        return
    since = _settled_since(study) if settled else 0
    for read, following in pairwise(rounds):
        if study.time(read.event) >= since:
            yield _begin(study, read, sequence), following.event


def _begin(study: Study, read: Read, sequence: str) -> int:
    """Entering the first step, or leaving it where it waits for a signal from outside."""
    entered = [visit for visit in read.entered if visit.step.name.split(".", 1)[0] == sequence]
    if len(entered) != 1 or entered[0].left is None:
        return read.event
    return entered[0].left.event if waits_for_outside(study.machine, entered[0].step) else read.event


def _settled_since(study: Study) -> int:
    """From when on the play shows cycles as they go on for ever. One in which something comes out otherwise shows it
    but once, and all that it has shown counts."""
    settlement = study.settlement
    if settlement.recipe.way.fresh >= 0 or settlement.first == settlement.last:
        return 0
    return study.time(settlement.trace.cycles[settlement.first].event)


def _bounds(study: Study, intervals: Iterable[_Interval]) -> Rows:
    return greatest_separations(study.trace.graph, both_ways(intervals))


def _duration(study: Study, intervals: list[_Interval], rows: Rows) -> Duration:
    typical = sum(study.time(end) - study.time(start) for start, end in intervals) // len(intervals)
    return Duration(
        min(-rows[end, start] for start, end in intervals),
        typical,
        closed(max(rows[interval] for interval in intervals)),
    )
