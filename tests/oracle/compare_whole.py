"""Reports on machines of the whole language held against runs of the player.

Takes texts; gives what does not agree, as values. All that is known of the examination is its report. A machine of
which it says that not every run was played is left out, and counted by whoever asks.

Bounds are asked of runs in which nothing diverts the machine, from the cycle on in which they are taken to have
settled (``SETTLED``), and of sequences that run once. A broken rule, or a watchdog whose text says how to go on,
diverts nothing.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import combinations

from seqcheck.language.read import read_machine
from seqcheck.language.source import Source
from seqcheck.machine.conditions import TermKind, terms_of
from seqcheck.machine.devices import OutsideSignal
from seqcheck.machine.findings import Duration, Finding, Report
from seqcheck.machine.model import Machine, items_of, steps_of
from seqcheck.machine.rules import CycleLimit, Never, PathLimit
from seqcheck.machine.steps import Choose
from seqcheck.pipeline import examine_source
from tests.oracle import draws
from tests.oracle.player import play
from tests.oracle.records import Incident, RuleTold, Run, Taken, Visit

LIMIT = 60_000_000
"""So much of a run is looked at, in microseconds."""

CYCLES = 5
SETTLED = 2


@dataclass(frozen=True, slots=True)
class Disagreement:
    """``rule`` that does not hold, in the run of that name."""

    rule: str
    run: str
    told: str


@dataclass(frozen=True, slots=True)
class Examined:
    machine: Machine
    report: Report

    @property
    def whole(self) -> bool:
        """Every run was played; else the report says of which it speaks."""
        return "not-settled" not in self.kinds

    @property
    def kinds(self) -> frozenset[str]:
        return frozenset(finding.kind for finding in self.report.findings)


def examine(text: str) -> Examined:
    source = Source("random.steps", text)
    machine = read_machine(source)
    if not isinstance(machine, Machine):
        raise AssertionError("\n".join([*map(str, machine), text]))
    return Examined(machine, examine_source(source))


def runs_of(machine: Machine, seed: int, count: int) -> dict[str, Run]:
    """``count`` runs for each of two ways in which everybody outside answers what choices ask: all typical, then at
    random and at the corners of the tolerances."""
    runs: dict[str, Run] = {}
    for answers in (seed, seed + 1):
        for number in range(count):
            times = (draws.at_random, draws.at_corners)[number % 2](seed + number) if number else draws.typical
            drawn = draws.either_way(answers, times)
            runs[f"answers {answers}, times {number}"] = play(machine, drawn, CYCLES, LIMIT, stop_at_first=True)
    return runs


def disagreements(examined: Examined, runs: dict[str, Run]) -> Iterator[Disagreement]:
    """Everything that does not agree. Where the typical run is diverted, what others come to was never examined; then
    that run alone is asked."""
    names = list(runs)
    diverted = runs[names[0]].first_diversion is not None
    for name in names[:1] if diverted else names:
        yield from unforeseen(examined, name, runs[name])
        if runs[name].first_diversion is None and not _goes_on_with_the_old(examined):
            yield from beyond_bounds(examined, name, runs[name])
            yield from worse_than_told(examined, name, runs[name])
    if not diverted:
        yield from untold_races(examined, runs)


def _goes_on_with_the_old(examined: Examined) -> bool:
    """A step may go on with a following signal, or a step of another sequence, as it was before: no incident to the
    player, but it diverts, and the report says that its figures do not hold there."""
    sensors = examined.machine.sensors
    return any(one.kind == "stale-signal" and one.subject not in sensors for one in examined.report.findings)


# --- bounds ---


def beyond_bounds(examined: Examined, name: str, run: Run) -> Iterator[Disagreement]:
    """Steps and cycles that take less or more than the report says."""
    once = {sequence.name for sequence in examined.machine.sequences if sequence.once}
    steps = dict(examined.report.steps)
    for visit in run.visits:
        settled = visit.cycle >= SETTLED or visit.step.partition(".")[0] in once
        if visit.left is not None and visit.step in steps and settled:
            yield from _outside(f"step {visit.step}", name, visit.left - visit.entered, steps[visit.step])
    for sequence, bounds in examined.report.cycles:
        for time in _cycle_times(examined.machine, run, sequence, sequence in once):
            yield from _outside(f"cycle of {sequence}", name, time, bounds)


def _cycle_times(machine: Machine, run: Run, sequence: str, once: bool) -> list[int]:
    """Of a sequence that runs once: from its start to its end, if it has come to that."""
    if not once:
        return [cycle.end - cycle.begin for cycle in run.cycles[sequence][SETTLED:]]
    visits = [visit for visit in run.visits if visit.step.startswith(f"{sequence}.")]
    if visits and visits[0].step in _waiting_for_outside(machine):
        return []  # It counts from where that step is left.
    lefts = [visit.left for visit in visits if visit.left is not None]
    stands = any(choice.sequence == sequence for choice in run.choices)
    return [max(lefts)] if len(lefts) == len(visits) > 0 and not stands else []


def _waiting_for_outside(machine: Machine) -> set[str]:
    return {
        step.name
        for sequence in machine.sequences
        for step in steps_of(sequence)
        for term in terms_of(step.until)
        if term.kind is TermKind.SIGNAL and isinstance(machine.signals[term.subject], OutsideSignal)
    }


def _outside(what: str, name: str, time: int, bounds: Duration) -> Iterator[Disagreement]:
    if time < bounds.least or (bounds.greatest is not None and time > bounds.greatest):
        yield Disagreement("bounds", name, f"{what} takes {time} us, not {bounds.least}..{bounds.greatest}")


# --- findings ---


def unforeseen(examined: Examined, name: str, run: Run) -> Iterator[Disagreement]:
    """Incidents, up to the first that diverts the machine, that no finding tells of."""
    for incident in run.incidents:
        if not any(_tells_of(examined.machine, finding, incident) for finding in examined.report.findings):
            yield Disagreement("foreseen", name, str(incident))
        if incident.diverts:
            return


def _tells_of(machine: Machine, finding: Finding, incident: Incident) -> bool:
    """By kind, subject and, where both name one, step. A choice is known by the lines in which it stands."""
    if finding.kind != incident.kind:
        return False
    if incident.subject.startswith("choose "):
        line = int(incident.subject.removeprefix("choose ").partition(":")[0])
        return any(
            line <= finding.place.line <= item.place.end_line
            for sequence in machine.sequences
            for item in items_of(sequence.items)
            if isinstance(item, Choose) and item.place.line == line
        )
    return finding.subject == incident.subject and (finding.step is None or incident.step in (finding.step, None))


def worse_than_told(examined: Examined, name: str, run: Run) -> Iterator[Disagreement]:
    """Rules that a run breaks by more than the finding says."""
    for told in run.rules:
        worst = margin_of(examined.machine, told)
        found = [one for one in examined.report.findings if (one.kind, one.subject) == (told.kind, told.text)]
        if not told.broken or not found or worst is None:
            continue
        if not any(one.margin_us is None or one.margin_us <= worst for one in found):
            text = f"{told.text}: the run has {worst} us, the report {[one.margin_us for one in found]}"
            yield Disagreement("margin", name, text)


def margin_of(machine: Machine, told: RuleTold) -> int | None:
    """What a run leaves of a rule, negative where it is broken; None where it has measured nothing."""
    rule = next(rule for rule in machine.rules if rule.text == told.text and rule.place.line == told.line)
    if told.longest is None:
        return None
    match rule:
        case Never(tolerated=most) | CycleLimit(greatest=most):
            return most - told.longest
        case PathLimit(least=least, greatest=most):
            left = most - told.longest
            return left if least is None or told.shortest is None else min(left, told.shortest - least)


# --- choices ---

Decision = tuple[str, int]


def untold_races(examined: Examined, runs: dict[str, Run]) -> Iterator[Disagreement]:
    """Choices that come out in two ways in runs in which everybody outside answers alike. Only the first thing that two
    runs decide differently counts: what comes later may follow from it."""
    raced = {finding.place.line for finding in examined.report.findings if finding.kind == "choice-race"}
    for (one, first), (two, second) in combinations(runs.items(), 2):
        if one.partition(",")[0] != two.partition(",")[0]:
            continue
        race = first_race(first, second)
        if race is None or _hangs_on_someone(examined.machine, *race):
            continue
        taken = race[0]
        if not raced & lines_of(examined.machine, taken):
            yield Disagreement("race", f"{one} and {two}", f"{taken.name} comes out both ways, number {taken.occasion}")


def first_race(first: Run, second: Run) -> tuple[Taken, Taken] | None:
    """The choice that the two runs make differently before they do anything else differently, as each has made it."""
    ways = [_decisions(run) for run in (first, second)]
    apart = [key for key in ways[0] if key in ways[1] and ways[0][key][1] != ways[1][key][1]]
    if not apart:
        return None
    key = min(apart, key=lambda each: ways[0][each][0])
    made = ways[0][key][2]
    other = ways[1][key][2]
    if not isinstance(made, Taken) or not isinstance(other, Taken):
        return None
    return (made, other) if other.index is not None and made.index is not None else None


def _decisions(run: Run) -> dict[Decision, tuple[int, int | bool | None, Taken | Visit]]:
    """Choices, and steps with or without their watchdogs run out, by name and number: when, how, and what it was."""
    made: dict[Decision, tuple[int, int | bool | None, Taken | Visit]] = {}
    for taken in run.choices:
        made[taken.name, taken.occasion] = taken.time, taken.index, taken
    counts: dict[str, int] = {}
    for visit in run.visits:
        number = counts.get(visit.step, 0)
        counts[visit.step] = number + 1
        if visit.left is not None:
            made[visit.step, number] = visit.left, visit.expired, visit
    return made


def _hangs_on_someone(machine: Machine, one: Taken, other: Taken) -> bool:
    """A choice that stood and waits for someone outside: which comes first is no matter of the machine's times."""
    choose = _choose_of(machine, one)
    terms = [term for choice in choose.choices for term in terms_of(choice.condition)]
    outside = any(
        term.kind is TermKind.SIGNAL and isinstance(machine.signals[term.subject], OutsideSignal) for term in terms
    )
    return outside and (one.stood or other.stood)


def lines_of(machine: Machine, taken: Taken) -> frozenset[int]:
    """Where a finding on a choice may point: the choice itself, or one of its conditions."""
    choose = _choose_of(machine, taken)
    return frozenset({choose.place.line, *(choice.place.line for choice in choose.choices)})


def _choose_of(machine: Machine, taken: Taken) -> Choose:
    items = (item for sequence in machine.sequences for item in items_of(sequence.items))
    return next(
        item
        for item in items
        if isinstance(item, Choose) and (item.place.line, item.place.column) == (taken.line, taken.column)
    )
