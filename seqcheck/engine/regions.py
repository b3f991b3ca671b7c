"""Where a piston that was stopped between its ends may stand.

Takes a trace; gives, for each stroke that the valve ended, the stretch in which the bounds leave the piston. The order
of a stop and of the marks ahead may be a matter of time that nobody looks at; the round is then played again with the
piston anywhere in that stretch.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence

from seqcheck.engine.bounds import greatest_separation
from seqcheck.engine.strokes import Region
from seqcheck.engine.trace import Shift, Stroke, Trace
from seqcheck.machine.devices import Position
from seqcheck.machine.records import record


@record
class Placing:
    """Where a piston may stand, as found with so many orders taken for granted, for the events ``stands``."""

    region: Region | None
    stands: tuple[int, ...]
    assumed: int


def regions_of(trace: Trace, placings: Mapping[Stroke, Placing]) -> Iterator[tuple[tuple[str, int], Region]]:
    """Where each piston that the valve drove otherwise may stand, if that is more than one stretch between marks.
    ``placings``: what was found on the way."""
    for stroke in trace.strokes:
        if stroke.stands is not None:
            stands, placing = _may_stand_at(trace, stroke), placings.get(stroke)
            if placing is None or (placing.stands, placing.assumed) != (stands, len(trace.graph.assumed)):
                placing = place(trace, stroke, stands)
            region = placing.region
            if region is not None and region != stroke.stood:
                yield (stroke.cylinder, stroke.number), region


def place(trace: Trace, stroke: Stroke, stands: tuple[int, ...] | None = None) -> Placing:
    """The same for one stroke, by what has come so far."""
    stands = _may_stand_at(trace, stroke) if stands is None else stands
    return Placing(_region(trace, stroke, stands), stands, len(trace.graph.assumed))


def _may_stand_at(trace: Trace, stroke: Stroke) -> tuple[int, ...]:
    """The event at which the stroke ends as played; and as it ends where the other coil may take over the valve's
    return to centre although it did not, or may not although it did."""
    shift = stroke.away
    assert shift is not None and stroke.stands is not None
    stands = [stroke.stands]
    after, before = shift.following, shift.previous
    if shift.to is Position.CENTRE and after is not None and after.by.coil != shift.by.coil:
        if not _never_later(trace, shift.reached, after.asked):
            stands.append(after.reached)
    elif may_have_centred(trace, shift) and before is not None:
        stands.append(before.reached)
    return tuple(stands)


def may_have_centred(trace: Trace, shift: Shift) -> bool:
    """Whether the return to centre that this shift took over can be done before."""
    before = shift.previous
    return before is not None and before.taken_over and not _never_later(trace, shift.asked, before.reached)


def _never_later(trace: Trace, one: int, other: int) -> bool:
    """Whether no run has ``one`` after ``other``. The played one may show that it has, and mostly no bounds are needed
    to show that none has."""
    if trace.times[one] > trace.times[other]:
        return False
    graph = trace.graph
    shown = graph.never_later(one, other) or graph.leads_to(one, other)
    return shown or greatest_separation(graph, other, one) <= 0


def _region(trace: Trace, stroke: Stroke, stands: Sequence[int]) -> Region | None:
    """From the last mark that is passed in every run to the first that is reached in none; None where the stroke is
    done in every run."""

    def always_passed(event: int) -> bool:
        return all(_never_later(trace, event, at) for at in stands)

    def never_reached(event: int) -> bool:
        return all(_never_later(trace, at, event) for at in stands)

    if always_passed(stroke.end):
        return None
    behind = stroke.started.low if stroke.out else stroke.started.high
    rests = set()
    if behind in stroke.started.rests and stroke.leaves is not None and not always_passed(stroke.leaves):
        rests.add(behind)
    ahead = stroke.marks[-1][0]
    for index, event in stroke.marks:
        if event != stroke.end and always_passed(event):
            behind = index
        elif never_reached(event):
            ahead = index
            break
    else:
        rests.add(ahead)
    return Region(min(behind, ahead), max(behind, ahead), frozenset(rests & {behind, ahead}))
