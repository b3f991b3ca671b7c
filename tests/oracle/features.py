"""Which parts of the language a machine uses."""

from __future__ import annotations

from collections.abc import Iterator

from seqcheck.machine.conditions import AnyOf, Condition, Not, TermKind, terms_of
from seqcheck.machine.devices import FollowingSignal, OnConditions, OutsideSignal, ValveReturn
from seqcheck.machine.model import Machine, items_of
from seqcheck.machine.rules import CycleLimit, Never
from seqcheck.machine.steps import Choose, Jump, Repeat, Step, Together

ALL = (
    "choice from outside",
    "choice on a sensor",
    "choice on a following signal",
    "choice on a flag",
    "choice without otherwise",
    "choice with a watchdog",
    "choice in a choice",
    "three choices or more",
    "empty branch",
    "jump",
    "within else",
    "or",
    "not",
    "steady",
    "together",
    "repeat",
    "two sequences",
    "waits for the other sequence",
    "flag",
    "follows",
    "from outside",
    "motor valve",
    "2/2 valve",
    "3/2 valve",
    "cylinder on two valves",
    "io",
    "never",
    "limit cycle",
    "limit from",
)


def features(machine: Machine) -> frozenset[str]:
    """Some of ``ALL``."""
    return frozenset((*_of_devices(machine), *_of_items(machine), *_of_exits(machine), *_of_rules(machine)))


def _of_devices(machine: Machine) -> Iterator[str]:
    for valve in machine.valves.values():
        if valve.kind is ValveReturn.MOTOR:
            yield "motor valve"
        if valve.ports in (2, 3):
            yield f"{valve.ports}/2 valve"
    if any(isinstance(each.drive, OnConditions) for each in machine.cylinders.values()):
        yield "cylinder on two valves"
    for signal in machine.signals.values():
        yield "follows" if isinstance(signal, FollowingSignal) else "from outside"
    if machine.islands:
        yield "io"
    if machine.flags:
        yield "flag"


def _of_items(machine: Machine) -> Iterator[str]:
    if len(machine.sequences) > 1:
        yield "two sequences"
    items = [item for sequence in machine.sequences for item in items_of(sequence.items)]
    chooses = [item for item in items if isinstance(item, Choose)]
    if len(chooses) > 2:
        yield "three choices or more"
    for item in items:
        match item:
            case Jump():
                yield "jump"
            case Together():
                yield "together"
            case Repeat():
                yield "repeat"
            case _:
                pass
    for choose in chooses:
        yield from _of_choose(machine, choose)


def _of_choose(machine: Machine, choose: Choose) -> Iterator[str]:
    if choose.watchdog is not None:
        yield "choice with a watchdog"
    if all(choice.condition is not None for choice in choose.choices):
        yield "choice without otherwise"
    for choice in choose.choices:
        if not choice.items:
            yield "empty branch"
        if any(isinstance(item, Choose) for item in items_of(choice.items)):
            yield "choice in a choice"
        for term in terms_of(choice.condition):
            match term.kind:
                case TermKind.SIGNAL if isinstance(machine.signals[term.subject], OutsideSignal):
                    yield "choice from outside"
                case TermKind.SIGNAL:
                    yield "choice on a following signal"
                case TermKind.SENSOR:
                    yield "choice on a sensor"
                case TermKind.FLAG:
                    yield "choice on a flag"
                case _:
                    pass


def _of_exits(machine: Machine) -> Iterator[str]:
    for sequence in machine.sequences:
        for item in items_of(sequence.items):
            if not isinstance(item, Step):
                continue
            if item.watchdog is not None and item.watchdog.target is not None:
                yield "within else"
            if item.steady is not None:
                yield "steady"
            yield from _of_condition(item.until)
            for term in terms_of(item.until):
                if term.kind is TermKind.STEP and not term.subject.startswith(f"{sequence.name}."):
                    yield "waits for the other sequence"


def _of_condition(condition: Condition | None) -> Iterator[str]:
    match condition:
        case None:
            return
        case Not(part):
            yield "not"
            yield from _of_condition(part)
        case _ if hasattr(condition, "parts"):
            if isinstance(condition, AnyOf):
                yield "or"
            for part in condition.parts:
                yield from _of_condition(part)


def _of_rules(machine: Machine) -> Iterator[str]:
    for rule in machine.rules:
        yield "never" if isinstance(rule, Never) else "limit cycle" if isinstance(rule, CycleLimit) else "limit from"
