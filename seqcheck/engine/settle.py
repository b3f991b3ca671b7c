"""Going round: play until the state at the start of a cycle has come up before.

Takes a machine; gives one trace that stands for all runs, and which of its cycles are the settled ones. What is
under way at the start of a cycle belongs to its state with the bounds of when it will come. After a state has come
up again the round that lies between is played once more, so that every pair across the border is in the trace.

Where a piston was stopped between its ends, the order of the stop and of the marks ahead may be a matter of time that
nobody looks at. The round is then played again with the piston anywhere that the bounds leave it, until these
regions no longer change.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

from seqcheck.engine.bounds import Rows, both_ways, greatest_separation, greatest_separations
from seqcheck.engine.cylinders import Regions
from seqcheck.engine.graph import DelayName, EventGraph
from seqcheck.engine.player import Player
from seqcheck.engine.strokes import Region
from seqcheck.engine.timeline import given
from seqcheck.engine.trace import Read, Shift, Stroke, Trace
from seqcheck.machine.devices import Position
from seqcheck.machine.model import Machine

MOST_CYCLES = 12
_MOST_ROUNDS = 8


@dataclass(frozen=True, slots=True)
class Settlement:
    """``first`` and ``last``: the settled cycles run from one to the other of ``trace.cycles`` (none for a sequence
    that runs once or does not come round). ``settled``: a state has come up again, or nothing was due any more.
    ``delays``: those that were not played at their typical times."""

    trace: Trace
    delays: Mapping[DelayName, int]
    regions: Regions
    settled: bool
    first: int
    last: int


@dataclass(slots=True)
class _Rounds:
    """Counts the cycles of one play and tells when they have settled."""

    seen: dict[tuple[object, ...], int]
    first: int | None = None
    last: int | None = None
    #: The number of the cycle that has just begun.
    count: int = -1

    def go_on(self, player: Player, read: Read) -> bool:
        self.count += 1
        if self.last is not None:
            return self.count < self.last
        signature = _signature(player, read)
        if signature in self.seen:
            self.first = self.count
            self.last = self.count + self.count - self.seen[signature]
        self.seen.setdefault(signature, self.count)
        return self.count < MOST_CYCLES


def settle(machine: Machine, delays: Mapping[DelayName, int] | None = None) -> Settlement:
    regions: dict[tuple[str, int], Region] = {}
    for _ in range(_MOST_ROUNDS):
        settlement = _play(machine, delays or {}, regions)
        if settlement.trace.too_long:
            break
        found = dict(_regions(settlement.trace))
        if found == regions:
            break
        regions = found
    return settlement


def _play(machine: Machine, delays: Mapping[DelayName, int], regions: Regions) -> Settlement:
    rounds = _Rounds({})
    trace = Player(machine, rounds.go_on, given(delays), regions).play()
    done = len(trace.cycles) - 1
    if rounds.first is None or rounds.last is None or done < rounds.last:
        return Settlement(trace, delays, regions, trace.finished or trace.endless, max(0, done - 1), done)
    return Settlement(trace, delays, regions, True, rounds.first, rounds.last)


def _signature(player: Player, read: Read) -> tuple[object, ...]:
    """The state, and for what is under way how long after the start of the cycle it can come."""
    graph = player.trace.graph
    pending = player.timeline.pending
    start = read.event
    bounds = greatest_separations(graph, both_ways((start, one) for one in pending))
    offsets = sorted(
        (graph.events[one].what, graph.events[one].subject, bounds[start, one], bounds[one, start]) for one in pending
    )
    return player.state, tuple(offsets)


def _regions(trace: Trace) -> Iterator[tuple[tuple[str, int], Region]]:
    """Where each piston that the valve drove otherwise may stand, if that is more than one stretch between marks."""
    parted = [(stroke, _may_stand_at(trace.graph, stroke)) for stroke in trace.strokes if stroke.stands is not None]
    pairs = ((at, event) for stroke, stands in parted for event in _passings(stroke) for at in stands)
    rows = greatest_separations(trace.graph, both_ways(pairs))
    for stroke, stands in parted:
        region = _region(stroke, stands, rows)
        if region is not None and region != stroke.stood:
            yield (stroke.cylinder, stroke.number), region


def _may_stand_at(graph: EventGraph, stroke: Stroke) -> list[int]:
    """The event at which the stroke ends as played; and as it ends where the other coil may take over the valve's
    return to centre although it did not, or may not although it did."""
    shift = stroke.away
    assert shift is not None and stroke.stands is not None
    stands = [stroke.stands]
    after, before = shift.following, shift.previous
    if shift.to is Position.CENTRE and after is not None and after.by.coil != shift.by.coil:
        if greatest_separation(graph, after.asked, shift.reached) > 0:
            stands.append(after.reached)
    elif may_have_centred(graph, shift) and before is not None:
        stands.append(before.reached)
    return stands


def may_have_centred(graph: EventGraph, shift: Shift) -> bool:
    """Whether the return to centre that this shift took over can be done before."""
    before = shift.previous
    return before is not None and before.taken_over and greatest_separation(graph, before.reached, shift.asked) > 0


def _passings(stroke: Stroke) -> list[int]:
    return [event for _, event in stroke.marks] + ([stroke.leaves] if stroke.leaves is not None else [])


def _region(stroke: Stroke, stands: Sequence[int], rows: Rows) -> Region | None:
    """From the last mark that is passed in every run to the first that is reached in none."""

    def always_passed(event: int) -> bool:
        return all(rows[at, event] <= 0 for at in stands)

    def never_reached(event: int) -> bool:
        return all(rows[event, at] <= 0 for at in stands)

    behind = stroke.started.low if stroke.out else stroke.started.high
    rests = set()
    if behind in stroke.started.rests and stroke.leaves is not None and not always_passed(stroke.leaves):
        rests.add(behind)
    ahead = stroke.marks[-1][0]
    for index, event in stroke.marks:
        if always_passed(event):
            behind = index
        elif never_reached(event):
            ahead = index
            break
    if always_passed(stroke.end):
        return None
    if ahead == stroke.marks[-1][0] and not never_reached(stroke.end):
        rests.add(ahead)
    return Region(min(behind, ahead), max(behind, ahead), frozenset(rests & {behind, ahead}))
