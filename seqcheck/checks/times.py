"""How long cycles and steps take, and which chain of events makes the longest cycle.

Takes a study; gives durations over the settled cycles, exact at both ends. A cycle runs from entering the first step
to entering it again; where that step waits for a signal from outside, from leaving it to entering it again; a sequence
that runs once, from its start to its end.
"""

from __future__ import annotations

from collections.abc import Callable, Collection, Iterable, Iterator, Mapping, Sequence
from dataclasses import replace
from functools import partial
from itertools import pairwise
from operator import itemgetter

from seqcheck.checks.crossings import Crossings, Edge, Spell, crossings
from seqcheck.checks.narrate import describe
from seqcheck.checks.shown_states import branch_name
from seqcheck.checks.study import Study
from seqcheck.engine.bounds import Rows, both_ways, causes_since, closed, greatest_separations
from seqcheck.engine.columns import separation_column
from seqcheck.engine.graph import Event, EventGraph
from seqcheck.engine.states import TimedStates, waits_for_outside
from seqcheck.engine.trace import Read
from seqcheck.machine.findings import ChoiceTime, Duration, PathPart
from seqcheck.machine.model import Machine, items_of, steps_of
from seqcheck.machine.records import record
from seqcheck.machine.steps import Choose, Step
from seqcheck.machine.time import NO_TIME, Span

_Interval = tuple[int, int]


@record
class Times:
    """``cycles`` of every sequence and ``choices``: the cycle for every branch that a choice can take; ``steps`` in the
    order of the text, those left out that no settled cycle leaves."""

    cycles: tuple[tuple[str, Duration], ...]
    choices: tuple[ChoiceTime, ...]
    steps: tuple[tuple[str, Duration], ...]


def times_of(studies: Sequence[Study], timed: TimedStates, with_steps: bool = True) -> Times:
    machine = studies[0].machine
    cycles = {
        **crossings([(study.settlement, _cycle_spells(study, False)) for study in studies]),
        **crossings([(study.settlement, _cycle_spells(study, True)) for study in studies], settled=False),
    }
    steps = crossings([(study.settlement, _step_spells(study)) for study in studies]) if with_steps else {}
    return Times(
        tuple(_shown(cycles, studies, [sequence.name for sequence in machine.sequences], _typical_cycle)),
        tuple(_choices(machine, timed, cycles)),
        tuple(_shown(steps, studies, [one.name for all in machine.sequences for one in steps_of(all)], _typical_step)),
    )


def times_of_all(machine: Machine, parts: Sequence[Times]) -> Times:
    """Those of the parts of a machine in the order of the text."""
    sequences = [one.name for one in machine.sequences]
    steps = {step.name: place for place, step in enumerate(one for all in machine.sequences for one in steps_of(all))}
    return Times(
        tuple(sorted((one for part in parts for one in part.cycles), key=lambda one: sequences.index(one[0]))),
        tuple(sorted((one for part in parts for one in part.choices), key=lambda one: sequences.index(one.sequence))),
        tuple(sorted((one for part in parts for one in part.steps), key=lambda one: steps[one[0]])),
    )


def _shown(
    found: Mapping[str, Crossings],
    studies: Sequence[Study],
    names: Iterable[str],
    typical: Callable[[Study, str], int | None],
) -> Iterator[tuple[str, Duration]]:
    for name in names:
        if name in found and (duration := found[name].duration(0)) is not None:
            times = (typical(study, name) for study in studies)
            usual = next((time for time in times if time is not None), duration.least)
            yield name, replace(duration, typical=max(duration.least, usual))


def _choices(machine: Machine, timed: TimedStates, cycles: Mapping[str, Crossings]) -> Iterator[ChoiceTime]:
    choices = {state.choose.place: state.choose for state in timed.states if state.choose is not None}
    for sequence in machine.sequences:
        for item in items_of(sequence.items):
            if not isinstance(item, Choose) or item.place not in choices or sequence.name not in cycles:
                continue
            at = {state.number for state in timed.states if state.choose is item}
            for number, choice in enumerate(item.choices):
                duration = cycles[sequence.name].duration(0, partial(_takes, at, number))
                if duration is not None:
                    duration = replace(duration, typical=duration.least)
                    yield ChoiceTime(sequence.name, choice.place, branch_name(item, number), duration)


def _takes(states: Collection[int], branch: int, edge: Edge) -> bool:
    return edge[0] in states and edge[3] == branch


def _cycle_spells(study: Study, once: bool) -> dict[str, list[Spell]]:
    """Of the sequences that go round, or of those that run ``once``."""
    names = [sequence.name for sequence in study.machine.sequences if sequence.once == once]
    if once:
        return {
            name: [Spell(begin, end, _passages_of(study, name).get(begin)) for begin, end in cycles_in(study, name)]
            for name in names
        }
    return {name: cycle_spells(study, name, settled=True) for name in names}


def _passages_of(study: Study, sequence: str) -> dict[int, int]:
    """The passages at which a sequence begins anew, by the events of their reads."""
    passages = enumerate(study.settlement.path.passages)
    return {passage.at: number for number, passage in passages if passage.sequence == sequence}


def cycle_spells(study: Study, name: str, settled: bool = False) -> list[Spell]:
    """The cycles of a sequence that goes round, the last one, which the play has not come through, included; only those
    that go on for ever, if ``settled``."""
    since = _settled_since(study) if settled else 0
    at = _passages_of(study, name)
    spells = []
    rounds = study.trace.rounds[name]
    for read, following in zip(rounds, (*rounds[1:], None), strict=True):
        if following is not None and study.time(following.event) <= since:
            continue
        begin = _begin(study, read, name)
        first = at.get(read.event) if begin == read.event else None
        if following is None:
            spells.append(Spell(begin, None, first))
        else:
            spells.append(Spell(begin, following.event, first, at.get(following.event)))
    return spells


def _step_spells(study: Study) -> dict[str, list[Spell]]:
    found: dict[str, list[Spell]] = {}
    since = _settled_since(study)
    for visit in study.trace.visits:
        left = visit.left.event if visit.left is not None else None
        if left is not None and study.time(left) < since:
            continue
        found.setdefault(visit.step.name, []).append(Spell(visit.entered.event, left))
    return found


def _typical_cycle(study: Study, sequence: str) -> int | None:
    return _mean(study, list(cycles_in(study, sequence, settled=True)))


def _typical_step(study: Study, step: str) -> int | None:
    since = _settled_since(study)
    return _mean(
        study,
        [
            (visit.entered.event, visit.left.event)
            for visit in study.visits_of(step)
            if visit.left is not None and study.time(visit.entered.event) >= since
        ],
    )


def _mean(study: Study, intervals: Sequence[_Interval]) -> int | None:
    lengths = [study.time(end) - study.time(begin) for begin, end in intervals]
    return sum(lengths) // len(lengths) if lengths else None


def critical_path(study: Study) -> tuple[PathPart, ...]:
    """The chain of causes that makes the longest settled cycle as long as it can be; the delays of events that have no
    words of their own go to the next one."""
    intervals = list(cycles_in(study, study.machine.sequences[0].name, settled=True))
    if not intervals:
        return ()
    rows = _bounds(study, intervals)
    start, end = max(intervals, key=lambda interval: rows[interval])
    path: list[PathPart] = []
    least = greatest = 0
    for link in critical_chain(study, start, end):
        least, greatest = least + link.span.least, greatest + link.span.greatest
        words = _words(study, link.event)
        if words or link.event == end:
            path.append(PathPart(words or "end of the cycle", closed(link.latest), least, closed(greatest)))
            least = greatest = 0
    return tuple(path)


@record
class Link:
    """An event of a chain of causes: how late it can come after the start of the chain, and the delay that brings
    it."""

    event: int
    latest: int
    span: Span


def critical_chain(study: Study, start: int, end: int) -> tuple[Link, ...]:
    """The chain of causes that makes ``end`` come as late after ``start`` as it can, in the order of time."""
    graph = study.trace.graph
    latest = _latest_after(graph, start, end)
    chain: list[Link] = []
    event = end
    while event != start:
        known = [
            (time + arc.span.greatest, arc) for arc in graph.arcs[event] if (time := latest(arc.cause)) is not None
        ]
        if not known:
            break
        _, arc = max(known, key=itemgetter(0))
        chain.append(Link(event, latest(event) or 0, arc.span))
        event = arc.cause
    return (Link(event, latest(event) or 0, NO_TIME), *reversed(chain))


def _latest_after(graph: EventGraph, start: int, end: int) -> Callable[[int], int | None]:
    """How late after ``start`` the causes of ``end`` since their common dominator can be; None for all others."""
    common = graph.common_dominator(start, end)
    if common == start and not graph.assumed_between(start, end):
        # All that there is between the two hangs on the start alone: plain sums say how late it can be.
        return lambda event: graph.latest[event] - graph.latest[start]
    return separation_column(graph, causes_since(graph, common, {start, end}), start).get


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
    items = next(one.items for one in study.machine.sequences if one.name == sequence)
    first = items[0] if items else None
    if isinstance(first, Step) and waits_for_outside(study.machine, first):
        for visit in read.entered:
            if visit.step is first and visit.left is not None:
                return visit.left.event
    return read.event


def _settled_since(study: Study) -> int:
    """From when on the play shows cycles as they go on for ever. One in which something comes out otherwise shows it
    but once, and all that it has shown counts."""
    settlement = study.settlement
    if settlement.recipe.way.fresh >= 0 or settlement.path.settled is None:
        return 0
    return study.time(settlement.path.passages[settlement.path.settled].at)


def _bounds(study: Study, intervals: Iterable[_Interval]) -> Rows:
    return greatest_separations(study.trace.graph, both_ways(intervals))
