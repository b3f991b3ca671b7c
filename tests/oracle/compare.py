"""The engine's word on a machine held against runs of the player.

Takes texts; gives what does not agree, as values: bounds that a run leaves or does not meet, incidents that nobody
foresaw, findings called certain that do not show, findings that do not show when their own run is played. Refuses
texts that cannot be read or are not analysed.

Where the typical run goes wrong, what the engine says of later events stands for the runs that go wrong likewise.
Another run may keep what the typical one breaks, and then come to things that were never played; the report names what
has to be mended first. The rules on bounds and on what is foreseen are therefore asked where nothing goes wrong in the
typical run, and of the typical run itself always.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from itertools import pairwise

from seqcheck.checks.catalogue import CHECKS
from seqcheck.checks.prove import Broken, Proof, prove
from seqcheck.checks.study import Study, studies_of
from seqcheck.checks.times import Times, times_of
from seqcheck.engine.explore import explore
from seqcheck.engine.graph import DelayName
from seqcheck.engine.scope import outside_scope
from seqcheck.engine.states import timed_states
from seqcheck.language.read import read_machine
from seqcheck.language.source import Source
from seqcheck.machine.conditions import TermKind
from seqcheck.machine.findings import Duration, Severity
from seqcheck.machine.model import Machine
from seqcheck.machine.time import Span
from tests.oracle import draws
from tests.oracle.player import play
from tests.oracle.records import Incident, Run

LIMIT = 2_000_000_000
"""Longer than any run that is compared, in microseconds."""

UNSEEN_BY_THE_PLAYER = frozenset({"command-race"})

Choice = tuple[str, draws.Draw]


@dataclass(frozen=True, slots=True)
class Disagreement:
    """``rule`` that does not hold, in the run whose delays come from ``draw``."""

    rule: str
    draw: str
    told: str


@dataclass(frozen=True, slots=True)
class Examined:
    """``studies``: the ways in which the machine was played, the typical one first; ``complete``: all there are."""

    machine: Machine
    studies: tuple[Study, ...]
    complete: bool
    proof: Proof
    times: Times

    @property
    def cycles(self) -> int:
        """As many as the engine has looked at, and some more."""
        return max(5, *(len(study.trace.cycles) + 1 for study in self.studies))

    @property
    def clean(self) -> bool:
        return all(one.finding.severity is Severity.NOTE for one in self.proof.broken)

    @property
    def settled(self) -> bool:
        return self.complete and all(study.settlement.settled for study in self.studies)

    @property
    def first_settled(self) -> int:
        return max(study.settlement.first for study in self.studies)

    @property
    def cycle_bounds(self) -> Duration | None:
        return dict(self.times.cycles).get(self.machine.sequences[0].name)

    @property
    def told(self) -> frozenset[tuple[str, str]]:
        return frozenset((one.finding.kind, one.finding.subject) for one in self.proof.broken)


def examine(text: str) -> Examined:
    machine = read_machine(Source("random.steps", text))
    if not isinstance(machine, Machine):
        raise AssertionError("\n".join([*(str(problem) for problem in machine), text]))
    assert not outside_scope(machine), text
    graph = explore(machine)
    studies = tuple(studies_of(machine, graph))
    return Examined(machine, studies, graph.complete, prove(studies, CHECKS), times_of(studies, timed_states(graph)))


def some_draws(random: int, corners: int, first: int = 0) -> tuple[Choice, ...]:
    """All typical, all least, all greatest, and so many at random and at corners of the tolerances."""
    return (
        ("typical", draws.typical),
        ("least", draws.least),
        ("greatest", draws.greatest),
        *((f"random {seed}", draws.at_random(seed)) for seed in range(first, first + random)),
        *((f"corners {seed}", draws.at_corners(seed)) for seed in range(first, first + corners)),
    )


def disagreements(examined: Examined, chosen: Iterable[Choice]) -> Iterator[Disagreement]:
    """Everything that does not agree; ``chosen`` begins with the typical run."""
    goes_wrong = False
    for name, draw in chosen:
        run = play(examined.machine, draw, examined.cycles, LIMIT, stop_at_first=True)
        first = first_of(examined, run)
        if first is None:
            yield from not_so_certain(examined, name)
        if not goes_wrong:
            yield from beyond_bounds(examined, name, run) if first is None else unforeseen(examined, name, first)
        goes_wrong = goes_wrong or (first is not None and draw is draws.typical)
    yield from not_reproduced(examined)
    yield from bounds_not_met(examined)


def first_of(examined: Examined, run: Run) -> Incident | None:
    """The first thing that goes wrong: an incident, or a bounce that the engine takes for one."""
    bounces = [bounce for bounce in run.bounces if (bounce.kind, bounce.subject) in examined.told]
    return min([*run.incidents[:1], *bounces[:1]], key=lambda each: each.time, default=None)


# --- bounds ---


def beyond_bounds(examined: Examined, name: str, run: Run) -> Iterator[Disagreement]:
    """Steps and cycles of a run without incidents that take less or more than the report says."""
    if not examined.settled:
        return
    steps = dict(examined.times.steps)
    for visit in run.visits:
        if visit.left is not None and visit.step in steps and visit.cycle >= examined.first_settled:
            yield from _outside(f"step {visit.step}", name, visit.left - visit.entered, steps[visit.step])
    bounds = examined.cycle_bounds
    if bounds is not None:
        for time in cycles_of(examined, run)[examined.first_settled :]:
            yield from _outside("cycle", name, time, bounds)


def _outside(what: str, name: str, time: int, bounds: Duration) -> Iterator[Disagreement]:
    if time < bounds.least or (bounds.greatest is not None and time > bounds.greatest):
        yield Disagreement("bounds", name, f"{what} takes {time} us, not {bounds.least}..{bounds.greatest}")


def cycles_of(examined: Examined, run: Run) -> list[int]:
    """From entering the first step to entering it again, or from leaving it where it alone waits for a signal; of a
    sequence that runs once from its start to its end."""
    sequence = examined.machine.sequences[0]
    ends = list(run.cycle_starts[sequence.name][1:])
    if sequence.once:
        lefts = [visit.left for visit in run.visits if visit.left is not None]
        ends = [max(lefts)] if len(lefts) == len(run.visits) else []
    return [end - _begin(examined, run, cycle) for cycle, end in enumerate(ends)]


def _begin(examined: Examined, run: Run, cycle: int) -> int:
    trace = examined.studies[0].trace
    start = run.cycle_starts[examined.machine.sequences[0].name][cycle]
    first = [visit for visit in run.visits if visit.cycle == cycle and visit.entered == start]
    waits = any(literal.term.kind is TermKind.SIGNAL for literal in trace.visits[0].literals)
    left = first[0].left
    return left if waits and left is not None and len(trace.cycles[0].entered) == 1 else start


def bounds_not_met(examined: Examined) -> Iterator[Disagreement]:
    """On a clean machine whose cycles each hang on their own start alone, the runs with all delays least and greatest
    are the shortest and the longest there are."""
    bounds, settlement = examined.cycle_bounds, examined.studies[0].settlement
    if bounds is None or not is_closed(examined):
        return
    within = slice(settlement.first, max(settlement.last, settlement.first + 1))
    shortest = cycles_of(examined, play(examined.machine, draws.least, examined.cycles, LIMIT))[within]
    if min(shortest) != bounds.least:
        yield Disagreement("bounds met", "least", f"cycles take {shortest} us, not {bounds.least} at least")
    if bounds.greatest is not None:
        longest = cycles_of(examined, play(examined.machine, draws.greatest, examined.cycles, LIMIT))[within]
        if max(longest) != bounds.greatest:
            yield Disagreement("bounds met", "greatest", f"cycles take {longest} us, not {bounds.greatest} at most")


def is_closed(examined: Examined) -> bool:
    """Clean, played in one way only, pistons at known places, and nothing under way from one cycle to the next."""
    if not examined.clean or not examined.settled or len(examined.studies) > 1:
        return False
    trace, settlement = examined.studies[0].trace, examined.studies[0].settlement
    events = [read.event for read in trace.cycles[settlement.first : settlement.last + 1]]
    return not settlement.regions and all(trace.graph.dominates(start, end) for start, end in pairwise(events))


# --- findings ---


def unforeseen(examined: Examined, name: str, incident: Incident) -> Iterator[Disagreement]:
    """An incident that no finding tells of, by kind, subject and, where both name one, step."""
    found = [one.finding for one in examined.proof.broken]
    steps = {one.step for one in found if (one.kind, one.subject) == (incident.kind, incident.subject)}
    if not steps or not (steps & {incident.step, None} or incident.step is None):
        yield Disagreement("foreseen", name, str(incident))


def not_so_certain(examined: Examined, name: str) -> Iterator[Disagreement]:
    """A run without any incident belies whatever is called certain because of its times."""
    for one in examined.proof.broken:
        finding = one.finding
        if finding.certain and finding.margin_us is not None and finding.kind not in UNSEEN_BY_THE_PLAYER:
            yield Disagreement("certain", name, f"{finding.kind} {finding.subject} does not show")


def not_reproduced(examined: Examined) -> Iterator[Disagreement]:
    for one in examined.proof.broken:
        if one.finding.replayed and one.finding.kind not in UNSEEN_BY_THE_PLAYER:
            runs = [_run_of(one)] if one.settlement else [_held(study.settlement.delays) for study in examined.studies]
            amiss = [_amiss(examined, one, draw) for draw in runs]
            if None not in amiss:
                finding = one.finding
                told = f"{finding.kind} {finding.subject} (step {finding.step}, margin {finding.margin_us}): {amiss}"
                yield Disagreement("reproduced", "witness", told)


def _amiss(examined: Examined, one: Broken, draw: draws.Draw) -> str | None:
    """What is amiss where the player, given the delays of a finding's run, does not come to the same incident."""
    run = play(examined.machine, draw, examined.cycles, LIMIT)
    if (one.finding.kind, one.finding.subject) in {(each.kind, each.subject) for each in run.incidents + run.bounces}:
        return None
    return f"only {[(each.time, each.kind, each.subject) for each in run.incidents[:4]]}"


def _run_of(one: Broken) -> draws.Draw:
    """The delays of a finding's witness, on top of those of the way of playing to which it belongs."""
    assert one.settlement is not None and one.witness is not None
    return _held({**one.settlement.delays, **one.witness.delays})


def _held(delays: Mapping[DelayName, int]) -> draws.Draw:
    """These delays as far as their spans go, all others typical."""

    def draw(what: str, name: str, n: int, span: Span) -> int:
        return min(max(delays.get((what, name, n), span.typical), span.least), span.greatest)

    return draw
