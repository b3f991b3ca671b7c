"""The line of a valve: from where it sets out to where it gets.

Takes a study and a valve; gives the changes of its line. A 2/2 valve is told by open and closed, any other one by the
letters of its positions.
"""

from __future__ import annotations

from collections.abc import Iterator

from seqcheck.chart.changes import Change, words
from seqcheck.chart.model import HIGH, LOW, MIDDLE, TAP
from seqcheck.checks.study import Study
from seqcheck.engine.trace import Shift
from seqcheck.machine.conditions import TermKind, terms_of
from seqcheck.machine.devices import Cylinder, OnValve, Position, Valve, ValveReturn

_LEVELS = {Position.A: HIGH, Position.B: LOW, Position.CENTRE: MIDDLE}
_CLOSED, _OPEN = TAP


def ends_of(valve: Valve) -> tuple[str, str]:
    return TAP if _is_tap(valve) else (Position.B.value, Position.A.value)


def level_of(valve: Valve, position: Position) -> int:
    """A 2/2 valve that is normally open is high at ``b``."""
    level = _LEVELS[position]
    return HIGH - level if _is_tap(valve) and valve.normally_open else level


def way_of(valve: Valve, position: Position) -> str:
    """What a valve does that goes there."""
    if not _is_tap(valve):
        return f"to {position.value}"
    return "opens" if level_of(valve, position) == HIGH else "closes"


def valves_of(cylinder: Cylinder) -> set[str]:
    """Those whose positions drive it."""
    if isinstance(cylinder.drive, OnValve):
        return {cylinder.drive.valve}
    conditions = (cylinder.drive.out, cylinder.drive.back)
    return {term.subject for one in conditions for term in terms_of(one) if term.kind is TermKind.VALVE}


def shift_changes(study: Study, valve: Valve) -> Iterator[Change]:
    """One that is called off falls back to where it was; a motor valve stands where it has come to."""
    level = level_of(valve, valve.starts)
    for shift in study.trace.shifts:
        if shift.valve != valve.name:
            continue
        yield Change(shift.asked, level, _sets_out(valve, shift))
        if shift.called_off is None:
            level = level_of(valve, shift.to)
            yield Change(shift.reached, level, _reaches(study, valve, shift))
        else:
            there = _on_the_way(study, valve, shift, level)
            yield from _called_off(valve, shift, level, there)
            level = there if valve.kind is ValveReturn.MOTOR else level


def _is_tap(valve: Valve) -> bool:
    return valve.ports == 2


def _aim(valve: Valve, shift: Shift) -> str:
    """Where it goes, in words."""
    if not _is_tap(valve):
        return shift.to.value
    return _OPEN if level_of(valve, shift.to) == HIGH else _CLOSED


def _sets_out(valve: Valve, shift: Shift) -> str:
    if _is_tap(valve):
        return f"{valve.name} begins to {'open' if _aim(valve, shift) == _OPEN else 'close'}"
    return f"{valve.name} sets out for {shift.to.value}"


def _reaches(study: Study, valve: Valve, shift: Shift) -> str:
    return f"{valve.name} is fully {_aim(valve, shift)}" if _is_tap(valve) else words(study, shift.reached)


def _on_the_way(study: Study, valve: Valve, shift: Shift, level: int) -> int:
    """Where it has come to as it is called off, at typical times."""
    assert shift.called_off is not None
    asked, due = study.time(shift.asked), study.time(shift.reached)
    gone = study.time(shift.called_off.event) - asked
    return level + (level_of(valve, shift.to) - level) * gone // max(due - asked, 1)


def _called_off(valve: Valve, shift: Shift, level: int, there: int) -> Iterator[Change]:
    assert shift.called_off is not None
    event, aim = shift.called_off.event, _aim(valve, shift)
    if valve.kind is ValveReturn.MOTOR:
        yield Change(event, there, f"{valve.name} is stopped or turned on its way to {aim}")
        return
    if shift.taken_over:
        yield Change(event, there, f"{valve.name} is taken over on its way to {aim}")
    else:
        yield Change(event, there, f"{valve.name} is called off on its way to {aim}", lasting=False)
    yield Change(event, level, f"{valve.name} is where it was", lasting=shift.taken_over)
