"""Which part of a run a chart shows, and from which event its times are measured.

Takes a machine, its plays and what was asked for; gives the played run, long enough, with the window in it. Refuses, in
words, a step that there is none of or that the shown cycles do not come to.
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Sequence
from dataclasses import replace

from seqcheck.chart.asked import Part, Unplaceable, step_named, wishes_of
from seqcheck.chart.ways import Shown, long_enough, shown_way
from seqcheck.checks.study import Study
from seqcheck.engine.states import waits_for_outside
from seqcheck.engine.trace import Read, Visit
from seqcheck.machine.model import Machine, steps_of
from seqcheck.machine.records import record


@record
class Window:
    """``begin`` and ``end`` are typical times of the run; ``anchor`` is an event. ``cycle``: the events from which to
    which the first shown cycle is counted, None where nothing comes round. ``starts``: the cycles within."""

    study: Study
    begin: int
    end: int
    anchor: int
    anchored: str
    title: str
    cycle: tuple[int, int] | None
    starts: tuple[int, ...]


def window_of(machine: Machine, studies: Sequence[Study], part: Part) -> Window:
    """Raises ``Unplaceable`` where a step is unknown or not come to, or no run goes the way that is asked for."""
    wanted = {asked: step_named(machine, asked) for asked in (part.from_step, part.to_step, part.anchor) if asked}
    shown = shown_way(machine, studies, wishes_of(machine, part.choices))
    shown = long_enough(machine, shown, part.cycles + (1 if wanted else 0))
    return _narrowed(_cycles(shown, part.cycles), part, wanted)


def cycle_around(study: Study, time: int, title: str) -> Window:
    """The cycle in which a time of the run lies; to the end of the run where it does not come to the end of that."""
    starts = study.trace.cycles
    first = max(bisect_right(starts, time, key=lambda read: study.time(read.event)) - 1, 0)
    begin = study.time(starts[first].event)
    end = _end_of_run(study) if first + 1 == len(starts) else study.time(starts[first + 1].event)
    return Window(
        study, begin, max(end, time + (time - begin) // 20), *anchor_of(study, starts[first]), title, None, ()
    )


def _cycles(shown: Shown, wanted: int) -> Window:
    """So many settled cycles; a loop within one, once; to the end of the run where it ends."""
    study, settlement = shown.study, shown.study.settlement
    trace, name = study.trace, study.machine.sequences[0].name
    if shown.loop is not None:
        return _loop(study, shown.loop)
    cycles = trace.cycles[shown.first : shown.first + wanted + 1]
    if len(cycles) < 2:
        start = trace.cycles[-1]
        begin, end = study.time(start.event), _end_of_run(study)
        title = f"sequence {name} from its start {'to its end' if trace.finished else 'as far as it was played'}"
        return Window(study, begin, end + (end - begin) // 20, *anchor_of(study, start), title, None, ())
    count = len(cycles) - 1
    settled = "settled cycle" if settlement.settled and shown.first >= settlement.first else "cycle"
    title = f"a {settled} of {name}" if count == 1 else f"{count} {settled}s of {name}"
    if not settlement.settled:
        title += " (none is like another one)"
    anchor, anchored = anchor_of(study, cycles[0])
    return Window(
        study=study,
        begin=study.time(cycles[0].event),
        end=study.time(cycles[-1].event),
        anchor=anchor,
        anchored=anchored,
        title=title,
        cycle=(anchor, cycles[1].event),
        starts=tuple(study.time(read.event) for read in cycles),
    )


def _loop(study: Study, loop: tuple[int, int]) -> Window:
    """Once round where the first sequence never begins anew."""
    begin, end = (study.time(event) for event in loop)
    taken = (one for one in study.trace.choices if one.left is not None and one.left.event == loop[0])
    line = next((one.choose.place.line for one in taken), None)
    anchored = "the read at which the loop begins" if line is None else f"the choice in line {line}"
    title = f"once round the loop in which {study.machine.sequences[0].name} stays"
    return Window(study, begin, end, loop[0], anchored, title, loop, ())


def _end_of_run(study: Study) -> int:
    return max(study.time(event) for event in study.trace.happened)


def _narrowed(window: Window, part: Part, names: dict[str, str]) -> Window:
    study = window.study
    begin, end, anchor, anchored = window.begin, window.end, window.anchor, window.anchored
    if part.from_step:
        begin = study.time(_visit(study, names[part.from_step], begin).entered.event)
        if not part.to_step and begin >= end:
            raise Unplaceable(f"step {part.from_step} is not entered in the cycles shown")
    if part.to_step:
        left = _visit(study, names[part.to_step], begin).left
        if left is None:
            raise Unplaceable(f"step {part.to_step} is not left in the run")
        end = study.time(left.event)
    if part.anchor:
        visit = _nearest_visit(study, names[part.anchor], begin, end)
        anchor, anchored = visit.entered.event, f"entering step {visit.step.name}"
    title = window.title
    if part.from_step or part.to_step:
        steps = f"{part.from_step or 'the start'} to {part.to_step or 'the end'}"
        title = f"from {steps}, {title}"
    return replace(window, begin=begin, end=end, anchor=anchor, anchored=anchored, title=title)


def _visit(study: Study, name: str, since: int) -> Visit:
    """The first time from ``since`` on that the step is entered."""
    for visit in study.trace.visits:
        if visit.step.name == name and study.time(visit.entered.event) >= since:
            return visit
    raise Unplaceable(f"step {name} is not entered in the part of the run that is asked for")


def _nearest_visit(study: Study, name: str, begin: int, end: int) -> Visit:
    """Where the step is entered first in the window, last before it, or first after it."""
    visits = [visit for visit in study.trace.visits if visit.step.name == name]
    times = [study.time(visit.entered.event) for visit in visits]
    within = [visit for visit, time in zip(visits, times, strict=True) if begin <= time < end]
    before = [visit for visit, time in zip(visits, times, strict=True) if time < begin]
    if not visits:
        raise Unplaceable(f"step {name} is not entered in the run that is shown")
    return (within or before[-1:] or visits)[0]


def anchor_of(study: Study, start: Read) -> tuple[int, str]:
    """Where a cycle is counted from, and in words: entering its first step, or leaving it where it waits for a signal
    from outside."""
    names = {step.name for step in steps_of(study.machine.sequences[0])}
    own = [visit for visit in start.entered if visit.step.name in names]
    if len(own) == 1 and own[0].left is not None and waits_for_outside(study.machine, own[0].step):
        return own[0].left.event, f"leaving step {own[0].step.name}, which waits for a signal from outside"
    entered = " and ".join(visit.step.name for visit in own)
    return start.event, f"entering step {entered}, the start of the cycle" if own else "the start of the cycle"
