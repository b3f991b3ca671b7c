"""``unreachable``, ``no-watchdog`` and ``unused``: what the sequence leaves out."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence

from seqcheck.checks.check import Check, Sight
from seqcheck.checks.standstill import dead_ends
from seqcheck.checks.study import Study
from seqcheck.engine.knowledge import asked_conditions
from seqcheck.engine.program import compile_sequence
from seqcheck.machine.conditions import TermKind, terms_of
from seqcheck.machine.devices import FollowingSignal, OnConditions
from seqcheck.machine.findings import Severity
from seqcheck.machine.model import Machine, items_of, steps_of
from seqcheck.machine.rules import CycleLimit, Never
from seqcheck.machine.steps import Choose, Step
from seqcheck.machine.steps import Sequence as StepSequence


def _unreachable(studies: Sequence[Study]) -> Iterator[Sight]:
    """Nothing where runs that may enter more were not played. What only a dead end keeps from being entered is told
    with the dead end. Steps to which a watchdog leads are there for the day on which a part fails, and no healthy
    machine enters them."""
    if not studies[0].whole or any(True for one in studies for _ in dead_ends(one)):
        return
    for sequence in studies[0].machine.sequences:
        known = studies[0].entered | _behind_watchdogs(sequence, studies[0].entered)
        missing = [step for step in steps_of(sequence) if step.name not in known]
        if missing:
            more = f", nor {len(missing) - 1} more" if len(missing) > 1 else ""
            message = f"no run enters {missing[0].name}{more}"
            yield Sight(missing[0].name, missing[0].name, missing[0].place, message)


def _behind_watchdogs(sequence: StepSequence, entered: frozenset[str]) -> set[str]:
    program = compile_sequence(sequence)
    watchdogs = [item.watchdog for item in items_of(sequence.items) if isinstance(item, Step | Choose)]
    targets = {one.target for one in watchdogs if one is not None and one.target is not None}
    return {name for target in targets for name in program.steps_behind(target, entered)}


def _no_watchdog(machine: Machine) -> Iterator[Sight]:
    for sequence in machine.sequences:
        bare = [step.name for step in steps_of(sequence) if _waits_for_sensor(machine, step) and step.watchdog is None]
        if bare:
            verb = "waits" if len(bare) == 1 else "wait"
            message = f"{', '.join(bare)} {verb} for sensors without a watchdog"
            yield Sight(sequence.name, None, sequence.place, message)


def _waits_for_sensor(machine: Machine, step: Step) -> bool:
    return any(
        term.kind is TermKind.SENSOR
        or (term.kind is TermKind.SIGNAL and isinstance(machine.signals[term.subject], FollowingSignal))
        for term in terms_of(step.until)
    )


def _unused(machine: Machine) -> Iterator[Sight]:
    used = set(_used_names(machine))
    idle = [
        (device.place, device.name)
        for devices in (machine.coils, machine.outputs, machine.sensors, machine.signals, machine.flags)
        for device in devices.values()
        if device.name not in used
    ]
    if idle:
        idle.sort()
        verb = "is" if len(idle) == 1 else "are"
        message = f"{', '.join(name for _, name in idle)} {verb} never used"
        yield Sight(idle[0][1], None, idle[0][0], message)


def _used_names(machine: Machine) -> Iterable[str]:
    for sequence in machine.sequences:
        for step in steps_of(sequence):
            yield from (command.target for command in step.commands)
    for condition in asked_conditions(machine):
        yield from (term.subject for term in terms_of(condition))
    for signal in machine.signals.values():
        if isinstance(signal, FollowingSignal):
            yield from (term.subject for term in terms_of(signal.follows))
    for cylinder in machine.cylinders.values():
        if isinstance(cylinder.drive, OnConditions):
            for condition in (cylinder.drive.out, cylinder.drive.back):
                yield from (term.subject for term in terms_of(condition))
    for rule in machine.rules:
        match rule:
            case Never(condition):
                yield from (term.subject for term in terms_of(condition))
            case CycleLimit():
                pass
            case _:
                for condition in (rule.start, rule.end):
                    yield from (term.subject for term in terms_of(condition))


UNREACHABLE = Check("unreachable", Severity.WARNING, "a step that no run enters", omissions=_unreachable)
NO_WATCHDOG = Check("no-watchdog", Severity.NOTE, "steps wait for sensors without a watchdog", reading=_no_watchdog)
UNUSED = Check("unused", Severity.NOTE, "coils, outputs, sensors or signals never used", reading=_unused)
