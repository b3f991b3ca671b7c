"""What the player refuses: everything it does not play raises ``NotImplementedError``, never a wrong run."""

from __future__ import annotations

from dataclasses import dataclass

from seqcheck.machine.conditions import AllOf, AnyOf, Condition, Not, Term, TermKind
from seqcheck.machine.devices import FollowingSignal, OnConditions, ValveReturn
from seqcheck.machine.model import Machine, items_of, steps_of
from seqcheck.machine.steps import Choose, Jump, Step
from seqcheck.machine.time import WHOLE_SHARE

_PLAYED = (TermKind.SENSOR, TermKind.SIGNAL, TermKind.COIL, TermKind.OUTPUT, TermKind.STEP)


@dataclass(frozen=True, slots=True)
class Part:
    """One part of a conjunction: ``subject`` is to be ``wanted``."""

    kind: TermKind
    subject: str
    wanted: bool


def parts_of(condition: Condition | None, wanted: bool = True) -> tuple[Part, ...]:
    """The parts of a conjunction of possibly negated terms, from left to right."""
    match condition:
        case None:
            return ()
        case Term(kind, subject, None) if kind in _PLAYED:
            return (Part(kind, subject, wanted),)
        case Not(inner):
            return parts_of(inner, not wanted)
        case AllOf(parts) if wanted:
            return tuple(part for each in parts for part in parts_of(each))
        case AnyOf(parts) if not wanted:
            return tuple(part for each in parts for part in parts_of(each, False))
    raise NotImplementedError(f"not a conjunction of terms that the player knows: {condition}")


def refuse(machine: Machine) -> None:
    """Raise ``NotImplementedError`` for the first thing in the machine that the player does not play."""
    _refuse_devices(machine)
    if len(machine.sequences) != 1:
        raise NotImplementedError("more or fewer than one sequence")
    sequence = machine.sequences[0]
    if any(isinstance(item, Choose | Jump) for item in items_of(sequence.items)):
        raise NotImplementedError("choose and jump")
    if next(steps_of(sequence), None) is None:
        raise NotImplementedError("a sequence without steps")
    for step in steps_of(sequence):
        _refuse_step(machine, step)


def _refuse_devices(machine: Machine) -> None:
    if machine.islands or machine.flags or machine.rules:
        raise NotImplementedError("io, flags and rules")
    if any(valve.kind is ValveReturn.MOTOR for valve in machine.valves.values()):
        raise NotImplementedError("motor valves")
    if any(isinstance(signal, FollowingSignal) for signal in machine.signals.values()):
        raise NotImplementedError("signals that follow a condition")
    if any(isinstance(cylinder.drive, OnConditions) for cylinder in machine.cylinders.values()):
        raise NotImplementedError("cylinders on several valves")
    for sensor in machine.sensors.values():
        if sensor.low == sensor.high and 0 < sensor.low < WHOLE_SHARE:
            raise NotImplementedError("a sensor that is on at a single point between the ends")


def _refuse_step(machine: Machine, step: Step) -> None:
    parts_of(step.until)
    if step.watchdog is not None and step.watchdog.target is not None:
        raise NotImplementedError("a watchdog that goes to another step")
    for command in step.commands:
        if command.target not in machine.coils and command.target not in machine.outputs:
            raise NotImplementedError("commands to anything but coils and outputs")
