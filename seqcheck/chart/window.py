"""Which part of a run a chart shows, and from which event its times are measured.

Takes a machine and what was asked for; gives the played run, long enough, with the window in it. Refuses, in words, a
step that there is none of or that the shown cycles do not come to.
"""

from __future__ import annotations

import difflib
from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass, replace

from seqcheck.checks.study import Study
from seqcheck.engine.player import Player
from seqcheck.engine.settle import Settlement
from seqcheck.engine.strokes import Region
from seqcheck.engine.timeline import given
from seqcheck.engine.trace import Read, Visit
from seqcheck.machine.conditions import TermKind
from seqcheck.machine.model import Machine, items_of, steps_of
from seqcheck.machine.steps import Choose

MOST_CYCLES = 100


@dataclass(frozen=True, slots=True)
class Part:
    """What is asked for. Steps by name, qualified or not; ``rows`` by device or sequence (all if empty); ``choices``
    as ``PLACE=BRANCH``."""

    cycles: int = 1
    from_step: str | None = None
    to_step: str | None = None
    anchor: str | None = None
    rows: tuple[str, ...] = ()
    choices: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
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


class Unplaceable(Exception):
    """What was asked for is not there; the message says so to the user."""


def window_of(machine: Machine, settlement: Settlement, part: Part) -> Window:
    """Raises ``Unplaceable`` where a step is unknown or not come to."""
    _check_choices(machine, part.choices)
    wanted = {asked: _named(machine, asked) for asked in (part.from_step, part.to_step, part.anchor) if asked}
    settlement = _long_enough(machine, settlement, part.cycles + (1 if wanted else 0))
    study = Study(machine, settlement)
    return _narrowed(_cycles(study, part.cycles), part, wanted)


def _check_choices(machine: Machine, choices: tuple[str, ...]) -> None:
    if choices:
        if any(isinstance(item, Choose) for sequence in machine.sequences for item in items_of(sequence.items)):
            raise Unplaceable(f"--choice {choices[0]}: the way that a choice goes cannot be asked for yet")
        raise Unplaceable(f"--choice {choices[0]}: this text has nothing to choose")


def _cycles(study: Study, wanted: int) -> Window:
    """So many settled cycles; from the last start to the end of the run where it ends."""
    trace, settlement, name = study.trace, study.settlement, study.machine.sequences[0].name
    if trace.finished or trace.endless or len(trace.cycles) < 2:
        start = trace.cycles[-1]
        end = max(study.time(event) for event in trace.happened)
        begin = study.time(start.event)
        title = f"sequence {name} from its start to its end"
        return Window(study, begin, end + (end - begin) // 20, *anchor_of(start), title, None, ())
    shown = trace.cycles[settlement.first : settlement.first + wanted + 1]
    count = len(shown) - 1
    title = f"a settled cycle of {name}" if count == 1 else f"{count} settled cycles of {name}"
    if not settlement.settled:
        title = title.replace("settled cycle", "cycle") + " (none is like another one)"
    anchor, anchored = anchor_of(shown[0])
    return Window(
        study=study,
        begin=study.time(shown[0].event),
        end=study.time(shown[-1].event),
        anchor=anchor,
        anchored=anchored,
        title=title,
        cycle=(anchor, shown[1].event),
        starts=tuple(study.time(read.event) for read in shown),
    )


def _named(machine: Machine, asked: str) -> str:
    """The qualified name of a step."""
    names = [step.name for sequence in machine.sequences for step in steps_of(sequence)]
    found = [name for name in names if name == asked] or [name for name in names if name.partition(".")[2] == asked]
    if not found:
        near = difflib.get_close_matches(asked, [*names, *(name.partition(".")[2] for name in names)], 1, 0.6)
        advice = f"did you mean {near[0]}?" if near else f"the steps are {', '.join(names[:12])}"
        raise Unplaceable(f"there is no step {asked}; {advice}")
    return found[0]


def _narrowed(window: Window, part: Part, names: dict[str, str]) -> Window:
    study = window.study
    begin, end, anchor, anchored = window.begin, window.end, window.anchor, window.anchored
    if part.from_step:
        visit = _visit(study, names[part.from_step], begin)
        begin = study.time(visit.entered.event)
        if not part.to_step and begin >= end:
            raise Unplaceable(f"step {part.from_step} is not entered in the cycles shown")
    if part.to_step:
        visit = _visit(study, names[part.to_step], begin)
        if visit.left is None:
            raise Unplaceable(f"step {part.to_step} is not left in the run")
        end = study.time(visit.left.event)
    if part.anchor:
        visit = _visit(study, names[part.anchor], begin)
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


def _long_enough(machine: Machine, settlement: Settlement, cycles: int) -> Settlement:
    """A settlement whose trace holds so many cycles from the first settled one on, if its sequence comes round."""
    trace = settlement.trace
    needed = settlement.first + cycles
    if len(trace.cycles) > needed or settlement.first == settlement.last or trace.finished or trace.endless:
        return settlement
    regions = {**dict(_further_regions(settlement, cycles)), **settlement.regions}
    player = Player(machine, lambda player, _: len(player.trace.cycles) <= needed, given(settlement.delays), regions)
    return replace(settlement, trace=player.play(), regions=regions)


def _further_regions(settlement: Settlement, cycles: int) -> Iterator[tuple[tuple[str, int], Region]]:
    """Where stopped pistons may stand in the cycles to come: as in the settled ones, whose strokes come again."""
    trace = settlement.trace
    begin, end = (trace.times[trace.cycles[number].event] for number in (settlement.first, settlement.last))
    a_round = Counter(stroke.cylinder for stroke in trace.strokes if begin <= trace.times[stroke.shift.reached] < end)
    for (cylinder, number), region in sorted(settlement.regions.items(), key=lambda item: item[0]):
        for times in range(1, cycles + 1):
            yield (cylinder, number + times * a_round[cylinder]), region


def anchor_of(start: Read) -> tuple[int, str]:
    """Where a cycle is counted from, and in words: entering its first step, or leaving it where it waits for a signal
    from outside."""
    if len(start.entered) == 1:
        (first,) = start.entered
        if first.left is not None and any(literal.term.kind is TermKind.SIGNAL for literal in first.literals):
            return first.left.event, f"leaving step {first.step.name}, which waits for a signal from outside"
    names = " and ".join(visit.step.name for visit in start.entered)
    return start.event, f"entering step {names}, the start of the cycle"
