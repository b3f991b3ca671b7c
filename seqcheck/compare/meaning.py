"""What the devices, steps and rules of two machines differ in, by meaning: the spelling, the layout and the order of
statements make no difference, nor does it matter whether a time stands in the text or in a sheet.

Takes two machines; gives changes, devices first, then sequences and steps, then rules, each in the order of the text.
"""

from __future__ import annotations

import dataclasses
from collections import Counter
from collections.abc import Iterator, Mapping
from enum import Enum
from pathlib import Path
from typing import Any

from seqcheck.compare.course import course_changes, places_in_course, renamed_steps
from seqcheck.compare.differences import Change, Difference, Part
from seqcheck.compare.spelling import (
    spelled_command,
    spelled_condition,
    spelled_share,
    spelled_span,
    spelled_stroke,
    spelled_watchdog,
)
from seqcheck.language.durations import format_duration
from seqcheck.machine.conditions import AllOf, AnyOf, Not, Term
from seqcheck.machine.devices import OnConditions, OnValve, Stroke
from seqcheck.machine.model import Machine, steps_of
from seqcheck.machine.rules import CycleLimit, Never, Rule
from seqcheck.machine.steps import Sequence, Step
from seqcheck.machine.time import Span

#: What a thing is like, by aspect: which part of the text that is, and its value in words.
Aspects = Mapping[str, tuple[Part, str]]

_NOTHING = "none"
#: Aspects that read better otherwise than their field's name does.
_WORDS = {"low": "on from", "high": "on up to", "kind": "kind", "to": "moves the valve to", "starts": "starts at"}
_SHARES = {"uneven", "low", "high"}
_TIMES = {"gap"}
#: Told elsewhere: by the coil's valve, the sensor's cylinder and by the name in front.
_TOLD_ELSEWHERE = {"name", "place", "coils", "sensors"}


def machine_changes(old: Machine, new: Machine) -> tuple[tuple[Change, ...], Mapping[str, str]]:
    """The changes, and the steps that only have another name now, old name to new."""
    renamed: dict[str, str] = {}
    for before, after in _same_sequences(old, new):
        renamed |= renamed_steps(before, after, step_aspects)
    changes = [
        *_changes(Part.DEVICE, _devices(old), _devices(new)),
        *(Change(Part.STEP, f"step {was}", Difference.CHANGED, "name", was, now) for was, now in renamed.items()),
        *_sequence_changes(old, new, renamed),
        *_changes(Part.RULE, _rules(old), _rules(new)),
    ]
    return tuple(changes), renamed


def device_aspects(record: Any) -> Aspects:
    """Every field of a device that says something about it."""
    return {
        _WORDS.get(field.name, field.name.replace("_", " ")): _told(field.name, getattr(record, field.name))
        for field in dataclasses.fields(record)
        if field.name not in _TOLD_ELSEWHERE
    }


def step_aspects(step: Step) -> Aspects:
    watchdog = None if step.watchdog is None else spelled_watchdog(step.watchdog)
    return {
        "label": (Part.STEP, step.label or _NOTHING),
        "commands": (Part.STEP, ", ".join(sorted(map(spelled_command, step.commands))) or _NOTHING),
        "until": (Part.STEP, _NOTHING if step.until is None else spelled_condition(step.until)),
        "steady": (Part.TIME, _duration(step.steady)),
        "dwell": (Part.TIME, _duration(step.dwell)),
        "within": (Part.TIME, watchdog or _NOTHING),
        "moves": (Part.STEP, ", ".join(sorted(f"{move.cylinder}{'-+'[move.out]}" for move in step.moves)) or _NOTHING),
    }


def rule_aspects(rule: Rule) -> tuple[str, Aspects]:
    """What the rule is about, and what it says of it."""
    match rule:
        case Never():
            aspects = {"for": (Part.RULE, _duration(rule.tolerated)), "why": (Part.RULE, rule.why or _NOTHING)}
            return f"never {spelled_condition(rule.condition)}", aspects
        case CycleLimit():
            return f"limit cycle {rule.sequence}", {"greatest": (Part.RULE, _duration(rule.greatest))}
        case _:
            about = f"limit from {spelled_condition(rule.start)} to {spelled_condition(rule.end)}"
            return about, {
                "least": (Part.RULE, _duration(rule.least)),
                "greatest": (Part.RULE, _duration(rule.greatest)),
            }


def _told(field: str, value: Any) -> tuple[Part, str]:
    match value:
        case Span():
            return Part.TIME, spelled_span(value)
        case Stroke():
            return Part.TIME, spelled_stroke(value)
        case OnValve(valve, reverse):
            return Part.DEVICE, f"{valve} reversed" if reverse else valve
        case OnConditions(out, back):
            return Part.DEVICE, f"out when {spelled_condition(out)} in when {spelled_condition(back)}"
        case Term() | Not() | AllOf() | AnyOf():
            return Part.DEVICE, spelled_condition(value)
        case bool():
            return Part.DEVICE, "yes" if value else "no"
        case Enum():
            return Part.DEVICE, str(value.value)
        case int() if field in _SHARES:
            return Part.DEVICE, spelled_share(value)
        case int() if field in _TIMES:
            return Part.TIME, format_duration(value)
        case _:
            return Part.DEVICE, _NOTHING if value is None else str(value)


def _duration(time: int | None) -> str:
    return _NOTHING if time is None else format_duration(time)


def _devices(machine: Machine) -> dict[str, Aspects]:
    sections = (
        ("io", machine.islands),
        ("valve", machine.valves),
        ("coil", machine.coils),
        ("output", machine.outputs),
        ("cylinder", machine.cylinders),
        ("sensor", machine.sensors),
        ("signal", machine.signals),
        ("flag", machine.flags),
    )
    found: dict[str, Aspects] = {
        "machine": {"name": (Part.DEVICE, _own_name(machine))},
        "controller": device_aspects(machine.controller),
    }
    for word, devices in sections:
        found |= {f"{word} {name}": device_aspects(device) for name, device in devices.items()}
    return found


def _own_name(machine: Machine) -> str:
    """A machine without a name goes by that of its file, which says nothing about it."""
    unnamed = "machine" if machine.file == "-" else Path(machine.file).stem
    return _NOTHING if machine.name == unnamed else machine.name


def _rules(machine: Machine) -> dict[str, Aspects]:
    """Two rules about the same thing are told apart by number."""
    found: dict[str, Aspects] = {}
    seen: Counter[str] = Counter()
    for about, aspects in sorted(map(rule_aspects, machine.rules), key=repr):
        seen[about] += 1
        found[about if seen[about] == 1 else f"{about} ({seen[about]})"] = aspects
    return found


def _changes(part: Part, old: Mapping[str, Aspects], new: Mapping[str, Aspects]) -> Iterator[Change]:
    for name, aspects in new.items():
        if name not in old:
            yield Change(part, name, Difference.NEW)
        else:
            yield from _aspect_changes(name, old[name], aspects)
    yield from (Change(part, name, Difference.GONE) for name in old if name not in new)


def _aspect_changes(name: str, old: Aspects, new: Aspects) -> Iterator[Change]:
    """A signal may have become one of another kind, with other aspects."""
    for aspect in dict.fromkeys((*new, *old)):
        part, before = old.get(aspect, (Part.DEVICE, _NOTHING))
        part, after = new.get(aspect, (part, _NOTHING))
        if before != after:
            yield Change(part, name, Difference.CHANGED, aspect, before, after)


def _same_sequences(old: Machine, new: Machine) -> Iterator[tuple[Sequence, Sequence]]:
    before = {sequence.name: sequence for sequence in old.sequences}
    return ((before[one.name], one) for one in new.sequences if one.name in before)


def _sequence_changes(old: Machine, new: Machine, renamed: Mapping[str, str]) -> Iterator[Change]:
    before, after = ({one.name: one for one in machine.sequences} for machine in (old, new))
    for name, sequence in after.items():
        if name not in before:
            yield Change(Part.STEP, f"sequence {name}", Difference.NEW)
        else:
            yield from _aspect_changes(f"sequence {name}", _sequence_aspects(before[name]), _sequence_aspects(sequence))
            yield from _step_changes(before[name], sequence, renamed)
            yield from course_changes(before[name], sequence, renamed)
    yield from (Change(Part.STEP, f"sequence {name}", Difference.GONE) for name in before if name not in after)


def _sequence_aspects(sequence: Sequence) -> Aspects:
    return {
        "label": (Part.STEP, sequence.label or _NOTHING),
        "runs": (Part.STEP, "once" if sequence.once else "round"),
    }


def _step_changes(old: Sequence, new: Sequence, renamed: Mapping[str, str]) -> Iterator[Change]:
    before = {renamed.get(step.name, step.name): step for step in steps_of(old)}
    after = {step.name: step for step in steps_of(new)}
    places = places_in_course(new)
    for name, step in after.items():
        if name not in before:
            yield Change(Part.STEP, f"step {name}", Difference.NEW, new=places[name])
        else:
            yield from _aspect_changes(f"step {name}", step_aspects(before[name]), step_aspects(step))
    yield from (Change(Part.STEP, f"step {name}", Difference.GONE) for name in before if name not in after)
