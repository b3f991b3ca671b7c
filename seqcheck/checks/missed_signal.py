"""``missed-signal``: what an exit waits for can come and go unseen, in an input's filter or between two reads."""

from __future__ import annotations

from collections.abc import Iterator
from functools import partial

from seqcheck.checks.check import Check, Obligation, Wording
from seqcheck.checks.stale_signal import own_move_missed
from seqcheck.checks.study import Study
from seqcheck.checks.wording import round_up
from seqcheck.engine.bounds import greatest_separation
from seqcheck.engine.conditions import Literal
from seqcheck.engine.graph import Event
from seqcheck.engine.inputs import input_path
from seqcheck.engine.strokes import reached_by
from seqcheck.engine.trace import Answer, Edge, Visit
from seqcheck.machine.conditions import TermKind
from seqcheck.machine.findings import Severity


def _obligations(study: Study) -> Iterator[Obligation]:
    for visit in study.trace.visits:
        for answer in visit.answers:
            if not (visit.signals and answer.literal in visit.signals):
                yield from _answered(study, visit, answer)
        if len(visit.literals) == 1 and not visit.signals:
            yield from _gone_again(study, visit, visit.literals[0])
    for sensor, edges in study.trace.edges.items():
        for edge in edges:
            if edge.lost_to is not None:
                yield from _lost(study, sensor, edge, edge.lost_to)


def _answered(study: Study, visit: Visit, answer: Answer) -> Iterator[Obligation]:
    """A sensor must outlast its own filter; whatever is asked must stay until the step has gone on. (A step that goes
    on with what was there before its own move is the business of ``stale-signal``.)"""
    assert visit.left is not None
    if own_move_missed(study, visit, answer) is not None:
        return
    goes = _goes(study, visit, answer)
    if goes is None:
        return
    at, arrived = goes
    if answer.edge is not None and answer.literal.term.kind in (TermKind.SENSOR, TermKind.SIGNAL):
        yield _obligation(visit, answer.literal, answer.edge.arrived, at)
    yield _obligation(visit, answer.literal, visit.left.event, arrived)


def _goes(study: Study, visit: Visit, answer: Answer) -> tuple[int, int] | None:
    """When it changes back next, itself and to the controller (a read may see that at once); for a sensor also where a
    stop has just kept it from that."""
    sensor = answer.literal.term.subject
    following = study.edge_after(sensor, answer.edge)
    if answer.edge is not None and answer.literal.term.kind is TermKind.SENSOR:
        ahead = _ahead_in_stroke(study, visit, answer.edge)
        if ahead is not None and (following is None or following.at != ahead):
            path = input_path(study.machine, sensor, not answer.literal.wanted)
            event = Event("input", sensor, "off" if answer.literal.wanted else "on")
            return ahead, study.later(event, ahead, path.whole)
    if following is None:
        return None
    seen = following.seen is not None and following.lost_to is None
    return following.at, following.seen if seen and following.seen is not None else following.arrived


def _ahead_in_stroke(study: Study, visit: Visit, edge: Edge) -> int | None:
    """The mark of the same stroke at which the sensor would change back, were it not for a stop that only comes after
    the visit has ended. (Whoever asks later, of a cylinder that stands there, is the business of ``overshoot``.)"""
    sensor = study.machine.sensors[edge.sensor]
    assert visit.left is not None
    for stroke in study.strokes_through(edge.at):
        if stroke.away is None or not study.trace.graph.leads_to(visit.left.event, stroke.away.by.origin.read.event):
            continue
        positions = study.trace.marks[stroke.cylinder]
        behind = False
        for index, event in stroke.marks:
            if behind and reached_by(sensor, positions[index], stroke.out) is (not edge.value):
                return event
            behind = behind or event == edge.at
    return None


def _lost(study: Study, sensor: str, edge: Edge, lost_to: int) -> Iterator[Obligation]:
    """In the played run itself a change has vanished while a step was waiting for it."""
    for visit in study.waiting_for(sensor, study.time(edge.at), study.time(lost_to)):
        for literal in visit.literals:
            if literal.term.subject == sensor and literal.wanted == edge.value:
                yield _obligation(visit, literal, edge.arrived if edge.seen is None else edge.seen, lost_to)


def _gone_again(study: Study, visit: Visit, literal: Literal) -> Iterator[Obligation]:
    """In the played run itself what the step waits for came, and was gone before the rest of the exit had come."""
    end = study.time(visit.left.event) if visit.left is not None else None
    for edge in study.edges_between(literal.term.subject, study.time(visit.entered.event), end):
        following = study.edge_after(edge.sensor, edge)
        if edge.value != literal.wanted or edge.seen is None or edge.lost_to is not None or following is None:
            continue
        steady = visit.step.steady
        seen = edge.seen
        if steady is not None:
            seen = study.later(Event("steady seen", visit.step.name), seen, study.noticed_after(steady))
        rest = [visit.entered.floor] + ([visit.dwell_seen] if visit.dwell_seen is not None else [])
        gone = study.time(following.arrived)
        last = max(map(study.time, (seen, *rest)))
        if not last > gone > study.time(visit.entered.event) or (end is not None and gone >= end):
            continue
        first = study.last_of(Event("exit seen", visit.step.name), [seen, *rest])
        bounces = steady is not None and end is not None
        if bounces and greatest_separation(study.trace.graph, first, following.arrived) < 0:
            continue  # Always too short for steady, which is there to sit it out.
        yield _obligation(visit, literal, first, following.arrived)


def _obligation(visit: Visit, literal: Literal, first: int, second: int) -> Obligation:
    term, step = literal.term, visit.step
    return Obligation(term.subject, step.name, term.place, first, second, partial(_wording, visit, literal))


def _wording(visit: Visit, literal: Literal) -> Wording:
    term = literal.term
    came, went = ("come", "go") if literal.wanted else ("go", "come back")
    how = " (a wider range, a slower move), or read faster" if term.kind is TermKind.SENSOR else ""
    return Wording(
        f"{term.subject} can {came} and {went} {{by}} too soon for {visit.step.name} to act on it",
        lambda by: f"let {term.subject} stay so at least {round_up(by)} longer{how}",
    )


CHECK = Check("missed-signal", Severity.ERROR, "an input comes and goes before it is acted on", _obligations)
