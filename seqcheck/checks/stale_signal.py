"""``stale-signal``: a step can find what it waits for as it was before, and go on too early for that."""

from __future__ import annotations

from collections.abc import Iterator
from functools import partial

from seqcheck.checks.check import Check, Obligation, Wording
from seqcheck.checks.study import Study
from seqcheck.checks.wording import in_time
from seqcheck.engine.graph import Event
from seqcheck.engine.strokes import reached_by
from seqcheck.engine.trace import Answer, Visit
from seqcheck.machine.findings import Severity


def _obligations(study: Study) -> Iterator[Obligation]:
    for visit in study.trace.visits:
        for answer in visit.answers:
            if not (visit.signals and answer.literal in visit.signals):
                pair = own_move_missed(study, visit, answer) or _last_change_back(study, visit, answer)
                if pair is not None:
                    yield _obligation(visit, answer, *pair)


def own_move_missed(study: Study, visit: Visit, answer: Answer) -> tuple[int, int] | None:
    """In the played run itself the step has gone on before its own move reached the sensor."""
    sensor = study.machine.sensors.get(answer.literal.term.subject)
    assert visit.left is not None
    if sensor is None or not answer.literal.wanted:
        return None
    for stroke in study.moves_of(visit):
        goal = stroke.marks[-1][0]
        positions = study.trace.marks[stroke.cylinder]
        if stroke.cylinder != sensor.cylinder or not sensor.covers(positions[goal]):
            continue
        for index, event in stroke.marks:
            if reached_by(sensor, positions[index], stroke.out) and (answer.edge is None or answer.edge.at != event):
                return event, visit.left.event
    return None


def _last_change_back(study: Study, visit: Visit, answer: Answer) -> tuple[int, int] | None:
    """The sensor must have been seen to go before anything else lets the step go on."""
    if answer.edge is None:
        return None
    before = study.edge_before(answer.edge)
    if before is None or before.seen is None:
        return None
    others = [other.seen for other in visit.answers if other is not answer]
    waits = [visit.entered.floor, *others] + ([visit.dwell_seen] if visit.dwell_seen is not None else [])
    steady = visit.step.steady
    if steady is not None:
        came = study.edge_before(before)
        since = came.seen if came is not None and came.seen is not None else 0
        waits.append(study.later(Event("steady before", visit.step.name), since, study.noticed_after(steady)))
    return before.seen, study.last_of(Event("rest of the exit", visit.step.name), waits)


def _obligation(visit: Visit, answer: Answer, first: int, second: int) -> Obligation:
    term, step = answer.literal.term, visit.step
    return Obligation(term.subject, step.name, term.place, first, second, partial(_wording, visit, answer))


def _wording(visit: Visit, answer: Answer) -> Wording:
    sensor, state = answer.literal.term.subject, "on" if answer.literal.wanted else "off"
    message = f"{visit.step.name} can find {sensor} still {state} from before"
    return Wording(
        f"{message}, {{by}} too early",
        lambda by: f"let the step before last at least {in_time(by)} longer, or wait for {sensor} to change first",
        message,
    )


CHECK = Check("stale-signal", Severity.ERROR, "a step goes on with a sensor that is on from before", _obligations)
