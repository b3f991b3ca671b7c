"""What the player refuses: everything it does not play raises ``NotImplementedError``, never a wrong run."""

from __future__ import annotations

from collections.abc import Iterator

from seqcheck.machine.conditions import Condition, Term, TermKind, terms_of
from seqcheck.machine.devices import FollowingSignal, OnConditions
from seqcheck.machine.model import Machine, steps_of
from seqcheck.machine.rules import Never, PathLimit
from seqcheck.machine.time import NO_TIME, WHOLE_SHARE


def refuse(machine: Machine) -> None:
    """Raise ``NotImplementedError`` for the first thing in the machine that the player does not play."""
    for sequence in machine.sequences:
        if next(steps_of(sequence), None) is None:
            raise NotImplementedError("a sequence without steps")
    for sensor in machine.sensors.values():
        if sensor.low == sensor.high and 0 < sensor.low < WHOLE_SHARE:
            raise NotImplementedError("a sensor that is on at a single point between the ends")
    for term in _looked_at(machine):
        output = machine.outputs.get(term.subject)
        if term.kind is TermKind.OUTPUT and output is not None and (output.on, output.off) != (NO_TIME, NO_TIME):
            raise NotImplementedError("a rule or a signal that looks at an output with times of its own")
    for cylinder in machine.cylinders.values():
        if isinstance(cylinder.drive, OnConditions):
            terms = [*terms_of(cylinder.drive.out), *terms_of(cylinder.drive.back)]
            if any(term.aspect == "shifting" for term in terms):
                raise NotImplementedError("a cylinder that looks at a valve's shifting")


def _looked_at(machine: Machine) -> Iterator[Term]:
    """The terms of everything that sees the machine itself."""
    conditions: list[Condition] = []
    for signal in machine.signals.values():
        if isinstance(signal, FollowingSignal):
            conditions.append(signal.follows)
    for rule in machine.rules:
        match rule:
            case Never():
                conditions.append(rule.condition)
            case PathLimit():
                conditions += [rule.start, rule.end]
    for condition in conditions:
        yield from terms_of(condition)
