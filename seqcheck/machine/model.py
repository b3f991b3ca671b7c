"""The machine: every device, sequence and rule of one text with its timing sheets, resolved and complete."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from seqcheck.machine.accepts import Accept
from seqcheck.machine.assumed import AssumedTime
from seqcheck.machine.devices import Coil, Controller, Cylinder, Flag, Island, Output, Sensor, Signal, Valve
from seqcheck.machine.records import record
from seqcheck.machine.rules import Rule
from seqcheck.machine.steps import Choose, Item, Repeat, Sequence, Step, Together


@record
class Machine:
    """Devices by name, in the order of the text."""

    name: str
    file: str
    controller: Controller
    islands: Mapping[str, Island]
    valves: Mapping[str, Valve]
    coils: Mapping[str, Coil]
    outputs: Mapping[str, Output]
    cylinders: Mapping[str, Cylinder]
    sensors: Mapping[str, Sensor]
    signals: Mapping[str, Signal]
    flags: Mapping[str, Flag]
    sequences: tuple[Sequence, ...]
    rules: tuple[Rule, ...]
    sheets: tuple[str, ...]
    accepts: tuple[Accept, ...] = ()
    assumed: tuple[AssumedTime, ...] = ()


def items_of(items: tuple[Item, ...]) -> Iterator[Item]:
    """Every item of a sequence, outer ones first, in the order of the text."""
    for item in items:
        yield item
        match item:
            case Together(branches):
                for branch in branches:
                    yield from items_of(branch)
            case Choose(choices):
                for choice in choices:
                    yield from items_of(choice.items)
            case Repeat(_, inner):
                yield from items_of(inner)
            case _:
                pass


def steps_of(sequence: Sequence) -> Iterator[Step]:
    """Every step of a sequence, in the order of the text."""
    return (item for item in items_of(sequence.items) if isinstance(item, Step))
