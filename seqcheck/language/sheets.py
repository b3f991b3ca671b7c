"""Timing sheets: YAML read as events, so that every entry keeps its place.

Takes the text of a sheet; gives its entries; reports what is no sheet: wrong structure, unknown sections and keys,
entries that stand twice, anchors, aliases and tags, values that are no times. Never expands an alias.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from typing import Any

import yaml

from seqcheck.language.parse import parse_value
from seqcheck.language.problems import Problems, Ruler, short
from seqcheck.language.source import Source
from seqcheck.language.syntax import Edges, Setting, Settings, SettingValue, Word
from seqcheck.language.times import CONTROLLER
from seqcheck.machine.devices import Stroke
from seqcheck.machine.places import Place
from seqcheck.machine.records import record
from seqcheck.machine.time import Span

GREATEST_SHEET = 512 * 1024
MOST_NESTED = 50
MOST_PROBLEMS = 20

_SPAN, _GAP, _EDGES, _STROKE, _SHARE = "a span", "one duration", "a span, or on SPAN off SPAN", "a stroke", "a share"

#: The keys of each section, and what each of them holds.
SECTIONS: dict[str, dict[str, str]] = {
    CONTROLLER: {"scan": _SPAN, "task": _SPAN, "run": _SPAN, "input": _EDGES, "output": _EDGES},
    "io": {"update": _SPAN, "input": _EDGES, "output": _EDGES},
    "valves": {"on": _SPAN, "off": _SPAN, "decay": _SPAN, "gap": _GAP, "travel": _SPAN},
    "coils": {"on": _SPAN, "off": _SPAN, "decay": _SPAN, "travel": _SPAN},
    "outputs": {"on": _SPAN, "off": _SPAN},
    "cylinders": {"extend": _STROKE, "retract": _STROKE, "lag": _SPAN, "uneven": _SHARE, "overrun": _SPAN},
    "sensors": {"delay": _SPAN},
    "signals": {"on": _SPAN, "off": _SPAN, "after": _SPAN},
}
_EXAMPLES = {_SPAN: "18..28 ms", _GAP: "20 ms", _EDGES: "2..4 ms", _STROKE: "380..450 ms", _SHARE: "10 %"}

Event = Any


class _EnoughSeen(Exception):
    """What follows is not worth reading."""


@record
class SheetEntry:
    """The settings of one device; the controller's ``name`` is empty."""

    section: str
    name: Word
    settings: Settings


def read_sheet(source: Source, problems: Problems) -> tuple[SheetEntry, ...]:
    """The entries of a sheet, as far as it could be read."""
    if len(source.text) > GREATEST_SHEET:
        problems.report(Place(source.name, 1, 1, 1, 1), "the sheet is over 512 KB", "is this the right file?")
        return ()
    reader = _SheetReader(source, problems)
    entries: list[SheetEntry] = []
    try:
        # one by one, so that what stands before a fault counts
        for entry in reader.entries():
            entries.append(entry)
    except _EnoughSeen:
        pass
    except yaml.MarkedYAMLError as error:
        mark = error.problem_mark or error.context_mark
        place = _mark_place(source.name, mark, mark) if mark else Place(source.name, 1, 1, 1, 1)
        problems.report(
            place, f"this is no YAML: {error.problem or error.context}", "check the indentation and the colons"
        )
    except yaml.reader.ReaderError as error:
        place = Ruler(source.name, source.text).place(error.position, error.position + 1)
        problems.report(place, f"the character U+{_code(error.character):04X} cannot stand in YAML", "take it out")
    return tuple(entries)


def _code(character: Any) -> int:
    return character if isinstance(character, int) else ord(character)


def _mark_place(file: str, start: Any, end: Any) -> Place:
    return Place(file, start.line + 1, start.column + 1, end.line + 1, end.column + 1)


class _SheetReader:
    """Walks along the events of one sheet; a part that is wrong is reported and passed over."""

    def __init__(self, source: Source, problems: Problems) -> None:
        self._file = source.name
        self._problems = problems
        self._most = len(problems) + MOST_PROBLEMS
        self._events: Iterator[Event] = iter(yaml.parse(source.text, Loader=yaml.SafeLoader))

    def entries(self) -> Iterator[SheetEntry]:
        documents = 0
        for event in self._events:
            if isinstance(event, yaml.DocumentStartEvent):
                documents += 1
                if documents > 1:
                    self._report(event, "a second document in one sheet", "leave the line --- out")
                    return
                yield from self._sections(next(self._events))

    def _sections(self, root: Event) -> Iterator[SheetEntry]:
        for section, value in self._pairs(root, "the sections of a sheet"):
            if section.text == CONTROLLER:
                yield SheetEntry(CONTROLLER, Word("", section.place), self._settings(CONTROLLER, value))
            elif section.text in SECTIONS:
                for name, settings in self._pairs(value, f"the names of {section.text}"):
                    yield SheetEntry(section.text, name, self._settings(section.text, settings))
            else:
                advice = self._problems.did_you_mean(section.text, SECTIONS, "sections: " + ", ".join(SECTIONS))
                self._problems.report(section.place, f"there is no section {short(section.text)}", advice)
                self._pass_over(value)

    def _settings(self, section: str, event: Event) -> Settings:
        keys = SECTIONS[section]
        settings: list[Setting] = []
        for key, value in self._pairs(event, "times"):
            if re.match(r"[0-9]", key.text):
                self._problems.report(key.place, "a comma in a number", "write a decimal point: 1.5 ms, say")
                self._pass_over(value)
            elif key.text not in keys:
                advice = self._problems.did_you_mean(key.text, keys, f"here may stand: {', '.join(keys)}")
                self._problems.report(key.place, f"{section} have no time {short(key.text)}", advice)
                self._pass_over(value)
            elif not isinstance(value, yaml.ScalarEvent):
                if self._is_plain(value):
                    self._report(value, f"{key.text} is {keys[key.text]}", f"write {_EXAMPLES[keys[key.text]]}, say")
                self._pass_over(value)
            elif self._is_plain(value):
                found = self._value(keys[key.text], key, value)
                settings += [] if found is None else [Setting(key.text, found, key.place)]
        return tuple(settings)

    def _value(self, kind: str, key: Word, event: Event) -> SettingValue | None:
        example = f"write {_EXAMPLES[kind]}, say"
        text = event.value.strip()
        if not text:
            self._report(event, f"{key.text} has no value", example)
            return None
        if re.fullmatch(r"[0-9.]+", text):
            self._report(event, "the unit is left out", f"write {short(text)} {'%' if kind == _SHARE else 'ms'}, say")
            return None
        column = event.start_mark.column + (2 if event.style in ("'", '"') else 1)
        value = parse_value(Ruler(self._file, event.value, event.start_mark.line + 1, column), self._problems)
        fitted = None if value is None else _fit(value, kind)
        if value is not None and fitted is None:
            self._report(event, f"{key.text} is {kind}", example)
        return fitted

    def _pairs(self, event: Event, what: str) -> Iterator[tuple[Word, Event]]:
        """Keys and the first events of their values, which the caller takes further."""
        if isinstance(event, yaml.ScalarEvent) and not event.value and event.style is None:
            return
        if not isinstance(event, yaml.MappingStartEvent) or not self._is_plain(event):
            if self._is_plain(event):
                self._report(event, f"{what} are a mapping", "write NAME: and indent what belongs to it")
            self._pass_over(event)
            return
        seen: set[str] = set()
        while not isinstance(key := next(self._events), yaml.MappingEndEvent):
            if not isinstance(key, yaml.ScalarEvent) or not self._is_plain(key):
                if self._is_plain(key):
                    self._report(key, "a key is a plain word")
                self._pass_over(key)
                self._pass_over(next(self._events))
                continue
            if len(self._problems) >= self._most:
                raise _EnoughSeen
            word = Word(key.value, _mark_place(self._file, key.start_mark, key.end_mark))
            if word.text in seen:
                self._problems.report(word.place, f"{short(word.text)} stands here twice", "leave one of them out")
                self._pass_over(next(self._events))
                continue
            seen.add(word.text)
            yield word, next(self._events)

    def _is_plain(self, event: Event) -> bool:
        """Reports anchors, aliases and tags, once each."""
        if isinstance(event, yaml.AliasEvent):
            self._report(event, "an alias cannot stand in a sheet", "write the value itself")
        elif event.anchor is not None:
            self._report(event, "an anchor cannot stand in a sheet", "leave it out")
        elif event.tag is not None and event.tag != "!":
            self._report(event, "a tag cannot stand in a sheet", "leave it out")
        else:
            return True
        return False

    def _pass_over(self, event: Event) -> None:
        depth = 0
        while True:
            depth += isinstance(event, yaml.CollectionStartEvent)
            depth -= isinstance(event, yaml.CollectionEndEvent)
            if depth > MOST_NESTED:
                self._report(event, f"nested over {MOST_NESTED} deep", "a sheet has sections, names and times")
                raise _EnoughSeen
            if depth == 0:
                return
            event = next(self._events)

    def _report(self, event: Event, message: str, advice: str | None = None) -> None:
        start, end = event.start_mark, event.end_mark
        self._problems.report(_mark_place(self._file, start, start if end.line > start.line else end), message, advice)


def _fit(value: SettingValue, kind: str) -> SettingValue | None:
    """A value as its key holds it; None where it is of another kind."""
    match value:
        case Span():
            if kind == _SHARE or (kind == _GAP and value.least != value.greatest):
                return None
            return Edges(value, value) if kind == _EDGES else Stroke(value, False) if kind == _STROKE else value
        case Edges():
            return value if kind == _EDGES else None
        case Stroke():
            return value if kind == _STROKE else None
        case _:
            return value if kind == _SHARE else None
