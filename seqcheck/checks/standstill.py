"""``dead-end`` and ``endless-loop``: nothing can happen any more, or steps chase each other without time passing."""

from __future__ import annotations

from collections.abc import Iterator

from seqcheck.checks.check import Check, Sight
from seqcheck.checks.choice_race import choice_name
from seqcheck.checks.narrate import narrate_typical
from seqcheck.checks.study import Study
from seqcheck.engine.bounds import both_ways, greatest_separations
from seqcheck.engine.trace import Choice, Trace, Visit, Wait
from seqcheck.machine.conditions import TermKind
from seqcheck.machine.findings import Moment, Severity
from seqcheck.machine.model import steps_of
from seqcheck.machine.places import Place


def _dead_ends(study: Study) -> Iterator[Sight]:
    """Once nothing is due any more, every wait that is not over lasts for ever: a signal from outside would be due. So
    does one that goes on all round, while other sequences come round again. A watchdog that would then expire is no
    finding of its own."""
    trace = study.trace
    if trace.finished:
        stuck, last = _waiting_since(trace, None), max(trace.happened, key=study.time)
        more = "nothing more happens"
    elif study.settlement.path.round is not None:
        begin, last = (study.settlement.path.passages[number].at for number in study.settlement.path.round)
        stuck = [
            wait
            for wait in _waiting_since(trace, study.time(begin))
            if not _may_yet_end(study, wait) and not (isinstance(wait, Visit) and wait.step.name in study.left)
        ]
        more = "nothing else brings that"
    else:
        return
    steps = [step.name for one in study.machine.sequences for step in steps_of(one)]
    missing = [name for name in steps if name not in study.entered]
    others = f" and {len(missing) - 1} more" if len(missing) > 1 else ""
    never = f" ({missing[0]}{others} never entered)" if missing else ""
    for wait in stuck:
        name, place = _who(wait)
        waits = ", ".join(_missing(study, wait)) or "its exit"
        message = f"{name} is never left: it waits for {waits}, and {more}{never}"
        run = narrate_typical(study, wait.entered.event, last)
        yield Sight(name, wait.step.name if isinstance(wait, Visit) else None, place, message, run, at=last)


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
    """Steps without end at one instant, or a whole cycle that can go by in no time, waiting for nobody outside."""
    trace, settlement = study.trace, study.settlement
    if trace.endless:
        yield _chase(study, trace.visits[-1] if trace.visits else None, True, ())
        return
    for number in range(settlement.first, settlement.last):
        begin, end = trace.cycles[number].event, trace.cycles[number + 1].event
        visits = [visit for visit in trace.visits if visit.cycle == number]
        if any(visit.signals for visit in visits):
            continue
        rows = greatest_separations(trace.graph, both_ways([(begin, end)]))
        if rows[end, begin] >= 0:
            yield _chase(study, visits[0], rows[begin, end] <= 0, narrate_typical(study, begin, end))
            return


def _chase(study: Study, visit: Visit | None, certain: bool, run: tuple[Moment, ...]) -> Sight:
    """``visit``: one of those that chase each other; None where the sequence has no step that it ever enters."""
    sequence = study.machine.sequences[0]
    if visit is None:
        place, subject, step = sequence.place, sequence.name, None
        message = f"sequence {sequence.name} has no step that it ever enters"
    else:
        place, subject, step = visit.step.place, visit.step.name, visit.step.name
        message = f"steps follow one another without time passing, {subject} among them"
    mend = "let one of the steps wait for a sensor or dwell, or give the controller its scan time"
    return Sight(subject, step, place, message, run, mend, certain)


DEAD_END = Check("dead-end", Severity.ERROR, "nothing can happen any more", sights=_dead_ends)
ENDLESS_LOOP = Check("endless-loop", Severity.ERROR, "steps chase each other without time passing", sights=_endless)
