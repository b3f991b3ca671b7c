"""What a text declares, and how a name is found in it.

Takes the records of a text; gives lookups by name and kind; reports names and addresses that stand twice, and names
that are unknown or of the wrong kind. A name that a broken statement would have declared is forgiven.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator

from seqcheck.language.assumed import AssumedTimes
from seqcheck.language.parse import Parsed
from seqcheck.language.problems import Problems, short
from seqcheck.language.syntax import (
    CoilText,
    CylinderText,
    FlagText,
    IslandText,
    OutputText,
    SensorText,
    SequenceText,
    SignalText,
    StatementText,
    ValveText,
    Word,
)
from seqcheck.language.times import Times
from seqcheck.machine.places import Place

DeviceText = IslandText | ValveText | CoilText | OutputText | CylinderText | SensorText | SignalText | FlagText

#: What each kind of device is called, and its section in a timing sheet.
KINDS: dict[type[DeviceText], tuple[str, str | None]] = {
    IslandText: ("io", "io"),
    ValveText: ("valve", "valves"),
    CoilText: ("coil", "coils"),
    OutputText: ("output", "outputs"),
    CylinderText: ("cylinder", "cylinders"),
    SensorText: ("sensor", "sensors"),
    SignalText: ("signal", "signals"),
    FlagText: ("flag", None),
}


class Registry:
    """All that has a name. ``times_complete`` is False where a sheet or a ``timing`` could not be read."""

    def __init__(self, parsed: Parsed, times: Times, problems: Problems, medium: str | None = None) -> None:
        """``medium``: whose ordinary times stand in for those that nobody gives, None where none do."""
        self.problems = problems
        self.times = times
        self.assumed = AssumedTimes(medium)
        self._missing: set[tuple[Place, str]] = set()
        self.times_complete = parsed.timing_whole
        self.whole = parsed.whole
        self._forgiven = parsed.forgiven
        self.devices: dict[str, DeviceText] = {}
        self.valve_of_coil: dict[str, ValveText] = {}
        self.sequences: dict[str, SequenceText] = {}
        self.steps: dict[str, dict[str, Place]] = {}
        self._addresses: dict[str, Word] = {}
        for statement in parsed.statements:
            self._declare_statement(statement)

    def _declare_statement(self, statement: StatementText) -> None:
        if isinstance(statement, SequenceText):
            if statement.name.text in self.sequences:
                self._twice(statement.name, self.sequences[statement.name.text].name.place)
            else:
                self.sequences[statement.name.text] = statement
            return
        for device in _devices_in(statement):
            self._declare(device)
            if isinstance(statement, ValveText) and isinstance(device, CoilText):
                self.valve_of_coil.setdefault(device.name.text, statement)

    def _declare(self, device: DeviceText) -> None:
        known = self.devices.get(device.name.text)
        if known is not None:
            self._twice(device.name, known.name.place)
        else:
            self.devices[device.name.text] = device
        address = device.marks.address
        if address is None:
            return
        plain = re.sub(r"^%([A-Z])X", r"%\1", address.text.upper())
        if plain in self._addresses:
            other = self._addresses[plain].place
            message = f"the address {short(address.text)} is used in line {other.line} already"
            self.problems.report(address.place, message, "every input and output has an address of its own")
        else:
            self._addresses[plain] = address

    def _twice(self, name: Word, first: Place) -> None:
        message = f"the name {short(name.text)} is used in line {first.line} already"
        self.problems.report(name.place, message, "give one of the two another name")

    def kind(self, name: str) -> str | None:
        """What a name stands for, None where it is unknown."""
        device = self.devices.get(name)
        return None if device is None else KINDS[type(device)][0]

    def is_forgiven(self, name: str) -> bool:
        return name in self._forgiven

    def is_a(self, name: Word, *kinds: str) -> bool:
        """Whether a name stands for one of these kinds; what is wrong with it is reported."""
        kind = self.kind(name.text)
        if kind in kinds:
            return True
        if kind is not None:
            self.problems.report(name.place, f"{short(name.text)} is {a(kind)}", f"{one_of(kinds)} stands here")
        else:
            self.unknown(name, kinds, (other for other in self.devices if self.kind(other) in kinds))
        return False

    def unknown(self, name: Word, kinds: tuple[str, ...], candidates: Iterable[str]) -> None:
        """Report a name that nothing of these kinds has."""
        if self.is_forgiven(name.text):
            return
        wanted = " or ".join(filter(None, (", ".join(kinds[:-1]), kinds[-1])))
        advice = self.problems.did_you_mean(name.text, candidates, "declare it, or write a name that is declared")
        self.problems.report(name.place, f"there is no {wanted} {short(name.text)}", advice)

    def missing(self, place: Place, device: str, key: str, example: str) -> None:
        """Report a time that nobody gives, once."""
        if not self.times_complete or (place, key) in self._missing:
            return
        message = f"nobody gives the time {key} of {short(device)}"
        advice = f"write `{key} {example}` here or `{key}: {example}` in a timing sheet"
        # Said with the first: for a first look nobody has to have them all.
        first = not self._missing and self.assumed.medium is None
        self._missing.add((place, key))
        later = ", or let ordinary times stand in: --assume air or --assume oil" if first else ""
        self.problems.report(place, message, advice + later)


def _devices_in(statement: StatementText) -> Iterator[DeviceText]:
    """A device and those in its braces."""
    if isinstance(statement, DeviceText):
        yield statement
    if isinstance(statement, ValveText):
        yield from statement.coils
    if isinstance(statement, CylinderText):
        yield from statement.sensors


def a(noun: str) -> str:
    return f"{'an' if noun[0] in 'aeio' else 'a'} {noun}"


def one_of(kinds: tuple[str, ...]) -> str:
    """``a coil, an output or a flag``"""
    words = [a(kind) for kind in kinds]
    return " or ".join(filter(None, (", ".join(words[:-1]), words[-1])))
