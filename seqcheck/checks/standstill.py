"""``dead-end`` and ``endless-loop``: nothing can happen any more, or steps chase each other without time passing."""

from __future__ import annotations

from collections.abc import Iterator

from seqcheck.checks.check import Check
from seqcheck.checks.study import Study
from seqcheck.engine.trace import Visit
from seqcheck.machine.conditions import TermKind
from seqcheck.machine.findings import Finding, Severity
from seqcheck.machine.model import steps_of


def _dead_ends(study: Study) -> Iterator[Finding]:
    """Once nothing is due any more, every step that is still active waits for ever: a signal from outside would be
    due. A watchdog that would then expire is no finding of its own."""
    if not study.trace.finished:
        return
    entered = {visit.step.name for visit in study.trace.visits}
    missing = [step.name for one in study.machine.sequences for step in steps_of(one) if step.name not in entered]
    more = f" and {len(missing) - 1} more" if len(missing) > 1 else ""
    never = f" ({missing[0]}{more} never entered)" if missing else ""
    for visit in study.trace.visits:
        if visit.left is None:
            waits = ", ".join(_missing(study, visit)) or "its exit"
            yield Finding(
                kind="dead-end",
                severity=Severity.ERROR,
                certain=True,
                subject=visit.step.name,
                step=visit.step.name,
                place=visit.step.place,
                message=f"{visit.step.name} is never left: it waits for {waits}, and nothing more happens{never}",
                margin_us=None,
                replayed=None,
                run=(),
                mend=None,
            )


def _missing(study: Study, visit: Visit) -> Iterator[str]:
    for literal in visit.literals:
        term = literal.term
        edges = [edge for edge in study.trace.edges.get(term.subject, ()) if edge.seen in study.trace.happened]
        starts_on = study.starts_on(term.subject) if term.kind is TermKind.SENSOR else False
        if (edges[-1].value if edges else starts_on) != literal.wanted:
            yield term.subject if literal.wanted else f"not {term.subject}"


def _endless(study: Study) -> Iterator[Finding]:
    if not study.trace.endless:
        return
    if not study.trace.visits:
        sequence = study.machine.sequences[0]
        place, name, step = sequence.place, sequence.name, None
        message = f"sequence {name} has no step that it ever enters"
    else:
        visit = study.trace.visits[-1]
        place, name, step = visit.step.place, visit.step.name, visit.step.name
        message = f"steps follow one another without time passing, {name} among them"
    yield Finding(
        kind="endless-loop",
        severity=Severity.ERROR,
        certain=True,
        subject=name,
        step=step,
        place=place,
        message=message,
        margin_us=None,
        replayed=None,
        run=(),
        mend="let one of the steps wait for a sensor or dwell, or give the controller its scan time",
    )


DEAD_END = Check("dead-end", Severity.ERROR, "nothing can happen any more", findings=_dead_ends)
ENDLESS_LOOP = Check("endless-loop", Severity.ERROR, "steps chase each other without time passing", findings=_endless)
