"""``dead-end`` and ``endless-loop``: nothing can happen any more, or steps chase each other without time passing."""

from __future__ import annotations

from collections.abc import Iterator

from seqcheck.checks.check import Check, Sight
from seqcheck.checks.narrate import narrate_typical
from seqcheck.checks.study import Study
from seqcheck.engine.bounds import both_ways, greatest_separations
from seqcheck.engine.trace import Visit
from seqcheck.machine.conditions import TermKind
from seqcheck.machine.findings import Moment, Severity
from seqcheck.machine.model import steps_of


def _dead_ends(study: Study) -> Iterator[Sight]:
    """Once nothing is due any more, every step that is still active waits for ever: a signal from outside would be
    due. A watchdog that would then expire is no finding of its own."""
    if not study.trace.finished:
        return
    steps = [step.name for one in study.machine.sequences for step in steps_of(one)]
    missing = [name for name in steps if name not in study.entered]
    more = f" and {len(missing) - 1} more" if len(missing) > 1 else ""
    never = f" ({missing[0]}{more} never entered)" if missing else ""
    last = max(study.trace.happened, key=study.time)
    for visit in study.trace.visits:
        if visit.left is None:
            waits = ", ".join(_missing(study, visit)) or "its exit"
            name = visit.step.name
            message = f"{name} is never left: it waits for {waits}, and nothing more happens{never}"
            run = narrate_typical(study, visit.entered.event, last)
            yield Sight(name, name, visit.step.place, message, run, at=last)


def _missing(study: Study, visit: Visit) -> Iterator[str]:
    for literal in visit.literals:
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
        if any(literal.term.kind is TermKind.SIGNAL for visit in visits for literal in visit.literals):
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
