"""From a text and its timing sheets to a machine: the whole story of the language on one page.

Takes a source and the names of sheets; gives the machine, resolved and complete, or else every problem of the text
and its sheets in one go. PyYAML is loaded once there is a sheet.
"""

from __future__ import annotations

from collections.abc import Collection, Iterator, Sequence
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING, TypeVar

from seqcheck.language.accepts import accepts_of
from seqcheck.language.cylinders import resolve_cylinder, resolve_sensor
from seqcheck.language.devices import (
    refuse_circles,
    resolve_controller,
    resolve_flag,
    resolve_island,
    resolve_output,
    resolve_signal,
)
from seqcheck.language.ordinary import first_medium, medium_of
from seqcheck.language.parse import Parsed, parse_text
from seqcheck.language.problems import Problems, short
from seqcheck.language.registry import KINDS, Registry
from seqcheck.language.rules import resolve_rule
from seqcheck.language.sequences import Sequences, name_steps
from seqcheck.language.source import STANDARD, Source, read_source
from seqcheck.language.syntax import (
    CoilText,
    ControllerText,
    CycleLimitText,
    CylinderText,
    FlagText,
    IslandText,
    MachineText,
    NeverText,
    OutputText,
    PathLimitText,
    SignalText,
    StatementText,
    TimingText,
    ValveText,
)
from seqcheck.language.times import CONTROLLER, Times
from seqcheck.language.valves import resolve_coil, resolve_valve
from seqcheck.machine.accepts import Accept
from seqcheck.machine.findings import Problem
from seqcheck.machine.model import Machine
from seqcheck.machine.places import Place

if TYPE_CHECKING:
    from seqcheck.language.sheets import SheetEntry

_Single = TypeVar("_Single", MachineText, ControllerText)


def read_machine(
    source: Source, sheets: Sequence[str] = (), kinds: Collection[str] | None = None
) -> Machine | tuple[Problem, ...]:
    """The machine of a text. ``sheets`` are files of measured times; a later one wins, all win over the text;
    ``assume:air`` among them fills what nobody gives. ``kinds`` are those that a comment may accept (any, if None).
    Problems come by file in the order of reading, then by place, each with its line of text."""
    problems = Problems()
    problems.opened(source.name, source.text)
    parsed = parse_text(source, problems)
    accepts = accepts_of(source, kinds, problems)
    times = Times(problems)
    registry = Registry(parsed, times, problems, first_medium(sheets))
    _lay_text(parsed.statements, times)
    files = _sheet_files(source, parsed, sheets)
    for file, asked_at in files:
        _lay_sheet(registry, file, asked_at)
    machine = _resolve(source, parsed, registry, tuple(_sheet_names(parsed, sheets)), accepts)
    if len(problems):
        return problems.sorted()
    if registry.assumed.taken:
        return replace(machine, assumed=registry.assumed.taken)
    return replace(machine, sheets=tuple(sheet for sheet in machine.sheets if medium_of(sheet) is None))


# Times


def _sheet_names(parsed: Parsed, sheets: Sequence[str]) -> Iterator[str]:
    """As they are written: those of the text, then those of the command line."""
    yield from (text.file for text in parsed.statements if isinstance(text, TimingText))
    yield from sheets


def _sheet_files(source: Source, parsed: Parsed, sheets: Sequence[str]) -> list[tuple[str, Place | None]]:
    """The files to read, with the place that asks for each. Those of the text lie beside it."""
    folder = Path() if source.name == STANDARD else Path(source.name).parent
    named = [text for text in parsed.statements if isinstance(text, TimingText)]
    return [
        *((str(folder / text.file), text.place) for text in named),
        *((sheet, None) for sheet in sheets if medium_of(sheet) is None),
    ]


def _lay_text(statements: tuple[StatementText, ...], times: Times) -> None:
    for text in statements:
        if isinstance(text, ControllerText):
            times.lay(CONTROLLER, "", text.settings)
        elif isinstance(text, IslandText | ValveText | OutputText | CylinderText | SignalText):
            section = KINDS[type(text)][1]
            assert section is not None
            times.lay(section, text.name.text, text.settings)
        if isinstance(text, ValveText):
            for coil in text.coils:
                times.lay("coils", coil.name.text, coil.settings)
        if isinstance(text, CylinderText):
            for sensor in text.sensors:
                times.lay("sensors", sensor.name.text, sensor.settings)


def _lay_sheet(registry: Registry, file: str, asked_at: Place | None) -> None:
    if file == STANDARD:
        # It holds the sequence text, or is what somebody types: no sheet may take it away.
        registry.times_complete = False
        place = asked_at or Place(file, 1, 1, 1, 1)
        registry.problems.report(place, "a timing sheet is not read from standard input", "give it a file of its own")
        return
    read = read_source(file)
    if isinstance(read, Problem):
        registry.times_complete = False
        if asked_at is None:
            registry.problems.add(read)
        else:
            message = f"the timing sheet {short(file)}: {read.message}"
            registry.problems.report(asked_at, message, "its name is relative to this text's folder")
        return
    from seqcheck.language.sheets import read_sheet

    registry.problems.opened(read.name, read.text)
    before = len(registry.problems)
    entries = read_sheet(read, registry.problems)
    if len(registry.problems) > before:
        registry.times_complete = False
    for entry in entries:
        if entry.section == CONTROLLER or _is_known(registry, entry):
            registry.times.lay(entry.section, entry.name.text, entry.settings)


def _is_known(registry: Registry, entry: SheetEntry) -> bool:
    """Whether a sheet's name stands for a device of its section; what is wrong with it is reported."""
    kinds = [kind for kind, section in KINDS.values() if section == entry.section]
    return registry.is_a(entry.name, *kinds)


# Devices, sequences, rules


def _resolve(
    source: Source, parsed: Parsed, registry: Registry, sheets: tuple[str, ...], accepts: tuple[Accept, ...]
) -> Machine:
    devices = registry.devices
    named = name_steps(registry)
    valves = {name: resolve_valve(registry, text) for name, text in devices.items() if isinstance(text, ValveText)}
    coils = {
        name: resolve_coil(registry, registry.valve_of_coil[name], text)
        for name, text in devices.items()
        if isinstance(text, CoilText)
    }
    cylinders = {
        name: cylinder
        for name, text in devices.items()
        if isinstance(text, CylinderText) and (cylinder := resolve_cylinder(registry, text, valves)) is not None
    }
    sensors = {
        sensor.name.text: resolve_sensor(registry, text, sensor)
        for text in devices.values()
        if isinstance(text, CylinderText)
        for sensor in text.sensors
    }
    signals = {
        name: signal
        for name, text in devices.items()
        if isinstance(text, SignalText) and (signal := resolve_signal(registry, text)) is not None
    }
    refuse_circles(registry, signals)
    sequences = tuple(Sequences(registry, text, named, signals).resolve() for text in registry.sequences.values())
    rules = [
        resolve_rule(registry, text)
        for text in parsed.statements
        if isinstance(text, NeverText | CycleLimitText | PathLimitText)
    ]
    controllers = _single(registry, parsed, ControllerText, "controller")
    if not sequences and parsed.whole:
        place = Place(source.name, 1, 1, 1, 1)
        registry.problems.report(place, "there is no sequence in this text", "write `sequence main { .. }`")
    return Machine(
        _machine_name(source, registry, parsed),
        source.name,
        resolve_controller(registry, controllers),
        {name: resolve_island(registry, text) for name, text in devices.items() if isinstance(text, IslandText)},
        valves,
        coils,
        {name: resolve_output(registry, text) for name, text in devices.items() if isinstance(text, OutputText)},
        cylinders,
        sensors,
        signals,
        {name: resolve_flag(text) for name, text in devices.items() if isinstance(text, FlagText)},
        sequences,
        tuple(rule for rule in rules if rule is not None),
        sheets,
        accepts,
    )


def _machine_name(source: Source, registry: Registry, parsed: Parsed) -> str:
    machine = _single(registry, parsed, MachineText, "machine")
    if machine is not None:
        return machine.name
    return "machine" if source.name == STANDARD else Path(source.name).stem


def _single(registry: Registry, parsed: Parsed, kind: type[_Single], word: str) -> _Single | None:
    """The only statement of its kind; a second one is reported."""
    found = [text for text in parsed.statements if isinstance(text, kind)]
    for extra in found[1:]:
        message = f"a second `{word}`: the first stands in line {found[0].place.line}"
        registry.problems.report(extra.place, message, "leave one of them out")
    return found[0] if found else None
