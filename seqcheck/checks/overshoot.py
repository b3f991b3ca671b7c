"""``overshoot``: a cylinder stopped on a sensor can run on past an edge that somebody asks while it stands there."""

from __future__ import annotations

from collections.abc import Iterator
from functools import partial

from seqcheck.checks.check import Check, Obligation, Wording
from seqcheck.checks.study import Study
from seqcheck.checks.wording import in_time
from seqcheck.engine.strokes import reached_by
from seqcheck.engine.trace import Stroke
from seqcheck.machine.findings import Severity


def _obligations(study: Study) -> Iterator[Obligation]:
    for stroke in study.trace.strokes:
        if stroke.away is None or stroke.stands is None or not study.stopped_by_own_sensor(stroke):
            continue
        origin = stroke.away.by.origin
        for sensor, event in _edges_ahead(study, stroke):
            if _asked_while_standing(study, stroke, sensor):
                yield Obligation(
                    stroke.cylinder, origin.step, origin.place, stroke.stands, event, partial(_wording, stroke, sensor)
                )
                break


def _edges_ahead(study: Study, stroke: Stroke) -> Iterator[tuple[str, int]]:
    """The sensor edges behind the last one that the sequence waited for in this stroke, in the order of travel."""
    arrived = {edge.at for _, edge in study.waits_within(stroke)}
    positions = study.trace.marks[stroke.cylinder]
    events = [event for _, event in stroke.marks]
    start = max((number + 1 for number, event in enumerate(events) if event in arrived), default=0)
    for index, event in stroke.marks[start:]:
        for name in study.machine.cylinders[stroke.cylinder].sensors:
            if reached_by(study.machine.sensors[name], positions[index], stroke.out) is not None:
                yield name, event


def _asked_while_standing(study: Study, stroke: Stroke, sensor: str) -> bool:
    """Whether a step waits for the sensor at some time between the stop and the next stroke."""
    assert stroke.stands is not None
    strokes = study.trace.strokes_of[stroke.cylinder]
    following = strokes[stroke.number + 1 : stroke.number + 2]
    end = study.time(following[0].shift.reached) if following else None
    return any(study.waiting_for(sensor, study.time(stroke.stands), end))


def _wording(stroke: Stroke, sensor: str) -> Wording:
    return Wording(
        f"{stroke.cylinder} can run on {{by}} past the edge of {sensor} before it stands, and {sensor} is asked then",
        lambda by: f"stop the cylinder at least {in_time(by)} sooner, or move that edge of {sensor} further on",
    )


CHECK = Check("overshoot", Severity.WARNING, "a stopped cylinder runs on past a sensor that is asked", _obligations)
