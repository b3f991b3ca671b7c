"""``early-dwell``: a step that starts a move and whose only exit is ``dwell`` can be left before the move is done."""

from __future__ import annotations

from collections.abc import Iterator
from functools import partial

from seqcheck.checks.check import Check, Obligation, Wording
from seqcheck.checks.study import Study
from seqcheck.checks.wording import round_up
from seqcheck.engine.graph import Event
from seqcheck.engine.trace import Visit
from seqcheck.machine.devices import OnValve
from seqcheck.machine.findings import Severity
from seqcheck.machine.records import record
from seqcheck.machine.steps import Step
from seqcheck.machine.time import WHOLE_SHARE


def _obligations(study: Study) -> Iterator[Obligation]:
    for visit in study.trace.visits:
        step = visit.step
        if step.dwell is None or step.until is not None or visit.left is None:
            continue
        for move in (*_strokes(study, visit), *_called_off(study, visit)):
            yield Obligation(
                step.name,
                step.name,
                step.place,
                move.end,
                visit.left.event,
                partial(_wording, step, move),
                lever=visit.dwell_over,
                # What goes on otherwise where the move is not done yet is for the stroke, the shift, the sensor to say.
                diverts=False,
                as_if=move.reached,
            )


@record
class _Move:
    """``reached``: the valve's position that it takes for granted, where the played run has called that off."""

    cylinder: str
    out: bool
    end: int
    reached: int | None = None


def _strokes(study: Study, visit: Visit) -> Iterator[_Move]:
    for stroke in study.moves_of(visit):
        yield _Move(stroke.cylinder, stroke.out, stroke.end)


def _called_off(study: Study, visit: Visit) -> Iterator[_Move]:
    """Moves that the played run has called off at the valve: when they would have been done."""
    for shift in study.shifts_of(visit):
        if shift.called_off is None:
            continue
        for cylinder in study.machine.cylinders.values():
            if not isinstance(cylinder.drive, OnValve):
                continue
            out = cylinder.drive.sends_out(shift.to)
            if cylinder.drive.valve != shift.valve or out is None:
                continue
            if not study.stands_at_end(cylinder.name, out, study.time(shift.called_off.event)):
                travel = cylinder.extend if out else cylinder.retract
                begin = shift.asked if travel.from_coil else shift.reached
                end = study.later(Event("mark", cylinder.name, str(WHOLE_SHARE if out else 0)), begin, travel.time)
                yield _Move(cylinder.name, out, end, shift.reached)


def _wording(step: Step, move: _Move) -> Wording:
    return Wording(
        f"{step.name} can be left {{by}} before {move.cylinder} is fully {'extended' if move.out else 'retracted'}",
        lambda by: f"a dwell of at least {round_up((step.dwell or 0) + by)} is safe",
    )


CHECK = Check("early-dwell", Severity.ERROR, "a dwell is over before the move that it waits for", _obligations)
