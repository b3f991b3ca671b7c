"""``dead-end`` and ``endless-loop``: nothing can happen any more, or steps chase each other without time passing."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from seqcheck.checks.chases import Chase
from seqcheck.checks.check import Check, Sight
from seqcheck.checks.choice_race import choice_name
from seqcheck.checks.narrate import narrate, narrate_typical
from seqcheck.checks.study import Study
from seqcheck.engine.explore import replay
from seqcheck.engine.trace import Choice, Trace, Visit, Wait
from seqcheck.engine.witness import witness
from seqcheck.machine.conditions import TermKind
from seqcheck.machine.findings import Moment, Severity
from seqcheck.machine.model import steps_of
from seqcheck.machine.places import Place
from seqcheck.machine.steps import Step

_MEND = "let one of the steps wait for a sensor or dwell, or give the controller its scan time"


def dead_ends(study: Study) -> Iterator[Sight]:
    """Once nothing is due any more, every wait that is not over lasts for ever: a signal from outside would be due. So
    does one that goes on all round, while other sequences come round again. A watchdog that would then expire is no
    finding of its own."""
    if study.for_ever is None:
        return
    at, last = study.for_ever
    stuck = _waiting_since(study.trace, None if study.trace.finished else study.time(at))
    if not study.trace.finished:
        stuck = [
            wait
            for wait in stuck
            if not _may_yet_end(study, wait) and not (isinstance(wait, Visit) and wait.step.name in study.left)
        ]
    steps = [step.name for one in study.machine.sequences for step in steps_of(one)]
    missing = [name for name in steps if name not in study.entered]
    others = f" and {len(missing) - 1} more" if len(missing) > 1 else ""
    never = f" ({missing[0]}{others} never entered)" if missing else ""
    for wait in stuck:
        name, place = _who(wait)
        waits = ", ".join(_missing(study, wait)) or "its exit"
        message = f"{name} is never left: it waits for {waits}, and nothing brings that any more{never}"
        run = narrate_typical(study, wait.entered.event, last)
        yield Sight(name, wait.step.name if isinstance(wait, Visit) else None, place, message, run, at=at, stops=True)


def _who(wait: Wait) -> tuple[str, Place]:
    if isinstance(wait, Visit):
        return wait.step.name, wait.step.place
    assert isinstance(wait, Choice)
    return choice_name(wait), wait.choose.place


def _waiting_since(trace: Trace, since: int | None) -> list[Wait]:
    """The waits that are not over, begun before ``since`` (at any time, if None)."""
    return [
        wait
        for wait in (*trace.visits, *trace.choices)
        if wait.left is None and (since is None or trace.times[wait.entered.event] < since)
    ]


def _may_yet_end(study: Study, wait: Wait) -> bool:
    """Whether something is due that may end it: a signal from outside, a dwell, a watchdog."""
    due = [seen for _, seen in wait.signals.values()]
    due += [event for event in (wait.dwell_seen, wait.steady_seen) if event is not None]
    due += [wait.alarm.over] if wait.alarm is not None else []
    return any(event not in study.trace.happened for event in due)


def _missing(study: Study, wait: Wait) -> Iterator[str]:
    for literal in wait.literals:
        term = literal.term
        edges = [edge for edge in study.trace.edges.get(term.subject, ()) if edge.seen in study.trace.happened]
        starts_on = study.starts_on(term.subject) if term.kind is TermKind.SENSOR else False
        if (edges[-1].value if edges else starts_on) != literal.wanted:
            yield term.subject if literal.wanted else f"not {term.subject}"


def _endless(study: Study) -> Iterator[Sight]:
    """Steps without end at one instant, or a way that can come round again in no time, waiting for nobody outside."""
    trace = study.trace
    for sequence in study.machine.sequences:
        if sequence.name == trace.stepless:
            message = f"sequence {sequence.name} goes round and round at one read and enters no step"
            at = trace.reads[-1].event
            yield Sight(sequence.name, None, sequence.place, message, mend=_MEND, at=at, stops=True)
    for chase in study.chases:
        numbers = [one.number for one in chase.runs if one.settlement is study.settlement]
        shown = _shown_round(study, chase, numbers)
        for number in numbers:
            run, replayed = shown if number == numbers[0] else ((), True)
            yield _steps_chase(chase.step, chase.certain, study.settlement.path.passages[number].at, run, replayed)


def _shown_round(study: Study, chase: Chase, numbers: Sequence[int]) -> tuple[tuple[Moment, ...], bool]:
    """A whole round in no time and whether that was really played; nothing where the play shows no such round."""
    states, passages = study.settlement.states, study.settlement.path.passages
    for last in (number + 1 for number in numbers):
        first = last - 1
        while first > 0 and states[first] != states[last] and states[first] in chase.states:
            first -= 1
        if states[first] == states[last]:
            begin, end = passages[first].at, passages[last].at
            if study.time(begin) == study.time(end):
                return narrate_typical(study, begin, end), True
            run = witness(study.trace, begin, end)
            entered = [
                again.trace.times[visit.entered.event]
                for again in [replay(study.machine, study.settlement, run)]
                for visit in again.trace.visits
                if visit.step is chase.step
            ]
            return narrate(study, run), len(set(entered)) < len(entered)
    return (), True


def _steps_chase(step: Step, certain: bool, at: int, run: tuple[Moment, ...], replayed: bool) -> Sight:
    message = f"steps follow one another without time passing, {step.name} among them"
    return Sight(step.name, step.name, step.place, message, run, _MEND, certain, at, replayed=replayed, stops=True)


DEAD_END = Check("dead-end", Severity.ERROR, "nothing can happen any more", sights=dead_ends)
ENDLESS_LOOP = Check("endless-loop", Severity.ERROR, "steps chase each other without time passing", sights=_endless)
