"""How long cycles and steps take, and which chain of events makes the longest cycle.

Takes a study; gives durations over the settled cycles, exact at both ends. A cycle runs from entering the first step
to entering it again; where that step waits for a signal from outside, from leaving it to entering it again; a sequence
that runs once, from its start to its end.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from itertools import pairwise

from seqcheck.checks.narrate import describe
from seqcheck.checks.study import Study
from seqcheck.engine.bounds import Rows, both_ways, causes_since, closed, greatest_separations, separation_table
from seqcheck.engine.graph import Event
from seqcheck.engine.trace import Read
from seqcheck.machine.conditions import TermKind
from seqcheck.machine.findings import Duration, PathPart
from seqcheck.machine.model import steps_of

_Interval = tuple[int, int]


def together(worlds: Iterable[tuple[tuple[str, Duration], ...]]) -> tuple[tuple[str, Duration], ...]:
    """The durations of all the ways in which a machine was played; the first way is the typical one."""
    found: dict[str, Duration] = {}
    for durations in worlds:
        for name, one in durations:
            known = found.get(name, one)
            longest = None if known.greatest is None or one.greatest is None else max(known.greatest, one.greatest)
            found[name] = Duration(min(known.least, one.least), known.typical, longest)
    return tuple(found.items())


def cycle_times(study: Study) -> tuple[tuple[str, Duration], ...]:
    found = []
    for sequence in study.machine.sequences:
        intervals = list(cycles_in(study, sequence.name, settled=True))
        if intervals:
            found.append((sequence.name, _duration(study, intervals, _bounds(study, intervals))))
    return tuple(found)


def step_times(study: Study) -> tuple[tuple[str, Duration], ...]:
    """In the order of the text; steps that no settled cycle leaves are left out."""
    by_step: dict[str, list[_Interval]] = {}
    since = _settled_since(study)
    for visit in study.trace.visits:
        if visit.left is not None and study.time(visit.entered.event) >= since:
            by_step.setdefault(visit.step.name, []).append((visit.entered.event, visit.left.event))
    rows = _bounds(study, (interval for intervals in by_step.values() for interval in intervals))
    return tuple(
        (step.name, _duration(study, by_step[step.name], rows))
        for sequence in study.machine.sequences
        for step in steps_of(sequence)
        if step.name in by_step
    )


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
            yield _begin(rounds[0], sequence), study.last_of(Event("end", ""), ends)
        return
    since = _settled_since(study) if settled else 0
    for read, following in pairwise(rounds):
        if study.time(read.event) >= since:
            yield _begin(read, sequence), following.event


def _begin(read: Read, sequence: str) -> int:
    """Entering the first step, or leaving it where it waits for a signal from outside."""
    entered = [visit for visit in read.entered if visit.step.name.split(".", 1)[0] == sequence]
    if len(entered) != 1 or entered[0].left is None:
        return read.event
    waits = any(literal.term.kind is TermKind.SIGNAL for literal in entered[0].literals)
    return entered[0].left.event if waits else read.event


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
