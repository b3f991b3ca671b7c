"""What the analysis covers so far, and how an exit reads once it is inside that scope.

Takes a machine; gives the places at which it uses what is not analysed yet, as problems. Nothing is skipped
silently: a machine that comes through here is analysed whole.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from seqcheck.machine.conditions import AllOf, AnyOf, Condition, Not, Term, TermKind, terms_of
from seqcheck.machine.devices import FollowingSignal, OnConditions, ValveReturn
from seqcheck.machine.findings import Problem
from seqcheck.machine.model import Machine, items_of, steps_of
from seqcheck.machine.places import Place
from seqcheck.machine.rules import Never
from seqcheck.machine.steps import Choose, Jump, Step


@dataclass(frozen=True, slots=True)
class Literal:
    """One part of an exit: a term, and whether it has to be true or false."""

    term: Term
    wanted: bool


def literals_of(condition: Condition | None) -> tuple[Literal, ...]:
    """The parts that must all hold. The condition holds no alternative (``outside_scope`` says so before)."""
    return tuple(_literals(condition, True)) if condition is not None else ()


def _literals(condition: Condition, wanted: bool) -> Iterator[Literal]:
    match condition:
        case Term():
            yield Literal(condition, wanted)
        case Not(part):
            yield from _literals(part, not wanted)
        case AllOf(parts) | AnyOf(parts):
            for part in parts:
                yield from _literals(part, wanted)


def outside_scope(machine: Machine) -> tuple[Problem, ...]:
    """A problem for each use of what cannot be analysed yet, in the order of the text."""
    found = [*_devices(machine), *_sequences(machine), *_rules(machine)]
    return tuple(
        Problem(place, f"{what} cannot be checked yet", None, "this version reads it but does not analyse it")
        for place, what in sorted(found, key=lambda entry: entry[0])
    )


def _devices(machine: Machine) -> Iterator[tuple[Place, str]]:
    for island in machine.islands.values():
        yield island.place, f"an input and output island ('io {island.name}')"
    for valve in machine.valves.values():
        if valve.kind is ValveReturn.MOTOR:
            yield valve.place, f"a motor valve ('{valve.name}')"
    for cylinder in machine.cylinders.values():
        if isinstance(cylinder.drive, OnConditions):
            yield cylinder.place, f"a cylinder driven by conditions ('cylinder {cylinder.name} out when')"
    for signal in machine.signals.values():
        if isinstance(signal, FollowingSignal):
            yield signal.place, f"a signal that follows the machine ('{signal.name}')"
    for flag in machine.flags.values():
        yield flag.place, f"a flag ('{flag.name}')"


def _sequences(machine: Machine) -> Iterator[tuple[Place, str]]:
    for sequence in machine.sequences[1:]:
        yield sequence.place, f"more than one sequence ('{sequence.name}')"
    for sequence in machine.sequences:
        for item in items_of(sequence.items):
            match item:
                case Choose():
                    yield item.place, "'choose'"
                case Jump():
                    yield item.place, "'jump'"
                case _:
                    pass
        for step in steps_of(sequence):
            yield from _step(step)


def _step(step: Step) -> Iterator[tuple[Place, str]]:
    if step.watchdog is not None and step.watchdog.target is not None:
        yield step.watchdog.place, "'within .. else'"
    if step.until is not None and _has_alternative(step.until, True):
        yield step.until.place, "an exit with alternatives ('or', or 'not' before an 'and')"
    for term in terms_of(step.until):
        if term.kind is TermKind.FLAG:
            yield term.place, f"a flag ('{term.subject}') in an exit"


def _has_alternative(condition: Condition, wanted: bool) -> bool:
    match condition:
        case Term():
            return False
        case Not(part):
            return _has_alternative(part, not wanted)
        case AllOf(parts):
            return not wanted or any(_has_alternative(part, wanted) for part in parts)
        case AnyOf(parts):
            return wanted or any(_has_alternative(part, wanted) for part in parts)


def _rules(machine: Machine) -> Iterator[tuple[Place, str]]:
    for rule in machine.rules:
        yield rule.place, "'never'" if isinstance(rule, Never) else "'limit'"
