"""``assumed-times``: which times nobody gave, and what rests on the ordinary ones that stand in for them."""

from __future__ import annotations

from collections.abc import Iterable, Iterator

from seqcheck.checks.check import Check, Sight
from seqcheck.machine.conditions import terms_of
from seqcheck.machine.devices import Cylinder, OnValve
from seqcheck.machine.findings import Severity
from seqcheck.machine.model import Machine, steps_of
from seqcheck.machine.places import Place

_MOST_NAMED = 6


def told_devices(machine: Machine) -> str | None:
    """``on, off of V1; extend of clamp``: the times that are assumed; None where all are given."""
    keys: dict[str, list[str]] = {}
    for one in machine.assumed:
        keys.setdefault(one.device or "the controller", []).append(one.key)
    return _few([f"{', '.join(of)} of {device}" for device, of in keys.items()], "; ") if keys else None


def told_results(machine: Machine) -> str:
    """What rests on them: every figure, or the steps that switch or move such a device and what they are part of."""
    steps = list(_resting(machine))
    every = [step for sequence in machine.sequences for step in steps_of(sequence)]
    if any(one.device is None for one in machine.assumed) or len(steps) == len(every):
        return "every figure rests on them"
    if not steps:
        return "no step switches these"
    return f"the cycle times rest on them, and the figures of {_few(steps, ', ')}"


def _resting(machine: Machine) -> Iterator[str]:
    """The steps that switch a coil or wait for a sensor on which something assumed has a bearing."""
    assumed = {one.device for one in machine.assumed}
    driven = [one for one in machine.cylinders.values() if one.name in assumed]
    valves = assumed | {valve for one in driven for valve in _valves_of(one)}
    moved = {one.name for one in machine.cylinders.values() if not valves.isdisjoint(_valves_of(one))}
    moved |= {one.name for one in driven}
    switched = {coil.name for coil in machine.coils.values() if coil.valve in valves or coil.via in assumed}
    switched |= {output.name for output in machine.outputs.values() if output.via in assumed}
    sensors = {sensor for one in machine.cylinders.values() if one.name in moved for sensor in one.sensors}
    sensors |= {sensor.name for sensor in machine.sensors.values() if sensor.via in assumed}
    for sequence in machine.sequences:
        for step in steps_of(sequence):
            named = {command.target for command in step.commands} | {term.subject for term in terms_of(step.until)}
            if not named.isdisjoint(switched | sensors):
                yield step.name


def _valves_of(cylinder: Cylinder) -> frozenset[str]:
    if isinstance(cylinder.drive, OnValve):
        return frozenset((cylinder.drive.valve,))
    conditions = (cylinder.drive.out, cylinder.drive.back)
    return frozenset(term.subject for condition in conditions for term in terms_of(condition))


def _few(words: list[str], between: str) -> str:
    more = [f"and {len(words) - _MOST_NAMED} more"] if len(words) > _MOST_NAMED else []
    return between.join(words[:_MOST_NAMED] + more)


def _assumed_times(machine: Machine) -> Iterable[Sight]:
    """One note for all of them."""
    devices = told_devices(machine)
    if devices is None:
        return
    first = machine.assumed[0]
    place = next((one.place for one in machine.assumed if one.place), Place(machine.file, 1, 1, 1, 1))
    message = (
        f"nobody gives {devices}: times ordinary for {first.medium} stand in (common practice, no source), and"
        f" {told_results(machine)}"
    )
    yield Sight(
        next((one.device for one in machine.assumed if one.device), "controller"),
        None,
        place,
        message,
        mend="take these times from data sheets, or measure them, and write them in a timing sheet",
    )


CHECK = Check(
    "assumed-times", Severity.NOTE, "ordinary times stand in for some that nobody gives", reading=_assumed_times
)
