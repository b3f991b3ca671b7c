"""A machine divided into parts that share nothing, so that each can be proved alone.

Takes a machine; gives one for each part, with its sequences, rules and devices, in the order of their first sequences.
Two sequences are of one part where anything ties them, directly or by a chain: what one commands or asks and the other
commands or asks too, a step of the other, a signal from outside that both ask (it stays until every step that waits for
it is left), the coils of one valve, what moves a cylinder, what a signal follows, what one rule names. What no sequence
has to do with belongs to the first part.

Why nothing is lost. An event comes a delay after its causes, and every delay is drawn for itself. What causes an event
of one part lies in that part, with two exceptions: the read at the start, and a read to which sequences of several
parts come by the same causes, which all go back to that start. So whoever looks at one part of a run of the whole
machine sees a run of that part; and every run of the part is seen so, since delays of the others may be anything, and
what a shared read has in common (its round) is drawn within the same span. What an obligation, a rule or a duration
holds against each other lies within one part. Its greatest separation there is that of the whole machine, to the
microsecond.

All of that is so while time goes on. Steps that chase each other without time passing, which only a controller that
takes no time lets them do, would bring all sequences to a stand; that is a finding, and the others are told as they are
once it is mended.

A controller is no tie: the wait for a read is drawn for each change that is seen, not for a clock that all changes have
in common. An ``io`` island is none: its update is drawn for each change of an input, and for each write, which is that
of one read, so that parts would have an update in common only where they have the read.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import replace
from typing import TypeVar

from seqcheck.engine.knowledge import asked_conditions
from seqcheck.machine.conditions import Condition, TermKind, terms_of
from seqcheck.machine.devices import FollowingSignal, OnConditions
from seqcheck.machine.model import Machine, steps_of
from seqcheck.machine.rules import CycleLimit, Never, Rule

_Device = TypeVar("_Device")


def parts_of(machine: Machine) -> tuple[Machine, ...]:
    """The machine itself where all its sequences are of one part."""
    if len(machine.sequences) < 2:
        return (machine,)
    groups = _Groups()
    for names in _ties(machine):
        groups.tie(names)
    found = list(dict.fromkeys(groups.of(_steps_of_all(sequence.name)) for sequence in machine.sequences))
    if len(found) == 1:
        return (machine,)

    def part(number: int) -> Machine:
        def holds(name: str) -> bool:
            group = groups.of(name)
            return group == found[number] or (number == 0 and group not in found)

        return _part(machine, holds)

    return tuple(map(part, range(len(found))))


class _Groups:
    """Names in groups that grow together; a group goes by a number."""

    def __init__(self) -> None:
        self._of: dict[str, int] = {}
        self._names: list[list[str]] = []

    def of(self, name: str) -> int:
        if name not in self._of:
            self._of[name] = len(self._names)
            self._names.append([name])
        return self._of[name]

    def tie(self, names: Iterable[str]) -> None:
        """The largest group takes in the others, so that no name changes its group often."""
        found = {self.of(name) for name in names}
        largest = max(found, key=lambda group: len(self._names[group]))
        for group in found - {largest}:
            self._of.update(dict.fromkeys(self._names[group], largest))
            self._names[largest] += self._names[group]
            self._names[group] = []


def _ties(machine: Machine) -> Iterator[list[str]]:
    """Names of devices, and of sequences, that belong together."""
    for sequence in machine.sequences:
        commanded = [command.target for step in steps_of(sequence) for command in step.commands]
        yield [_steps_of_all(sequence.name), *commanded, *_named(*asked_conditions(machine, (sequence,)))]
    for coil in machine.coils.values():
        yield [coil.name, coil.valve]
    for cylinder in machine.cylinders.values():
        drive = cylinder.drive
        driving = _named(drive.out, drive.back) if isinstance(drive, OnConditions) else [drive.valve]
        yield [cylinder.name, *driving, *cylinder.sensors]
    for signal in machine.signals.values():
        if isinstance(signal, FollowingSignal):
            yield [signal.name, *_named(signal.follows)]
    for rule in machine.rules:
        yield _named_by(rule)


def _named_by(rule: Rule) -> list[str]:
    match rule:
        case CycleLimit(sequence):
            return [_steps_of_all(sequence)]
        case Never(condition):
            return _named(condition)
        case _:
            return _named(rule.start, rule.end)


def _named(*conditions: Condition) -> list[str]:
    """The devices that conditions name; for a step its sequence."""
    terms = [term for condition in conditions for term in terms_of(condition)]
    return [
        _steps_of_all(term.subject.partition(".")[0]) if term.kind is TermKind.STEP else term.subject for term in terms
    ]


def _steps_of_all(sequence: str) -> str:
    """A sequence by a name that no device can have: they have names of their own, and may be called alike."""
    return f"{sequence}."


def _part(machine: Machine, holds: Callable[[str], bool]) -> Machine:
    """The machine with what a part holds, by name."""

    def held(devices: Mapping[str, _Device]) -> dict[str, _Device]:
        return {name: device for name, device in devices.items() if holds(name)}

    return replace(
        machine,
        valves=held(machine.valves),
        coils=held(machine.coils),
        outputs=held(machine.outputs),
        cylinders=held(machine.cylinders),
        sensors=held(machine.sensors),
        signals=held(machine.signals),
        flags=held(machine.flags),
        sequences=tuple(one for one in machine.sequences if holds(_steps_of_all(one.name))),
        rules=tuple(rule for rule in machine.rules if holds(_named_by(rule)[0])),
    )
