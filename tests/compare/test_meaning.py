"""Differences by meaning: none where only the writing differs, and one for whatever else differs."""

from __future__ import annotations

import dataclasses
import re
from collections.abc import Iterator
from enum import Enum
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from seqcheck.compare.meaning import machine_changes
from seqcheck.language.read import read_machine
from seqcheck.language.source import Source
from seqcheck.machine.conditions import AllOf, AnyOf, Not, Term
from seqcheck.machine.model import Machine
from seqcheck.machine.places import Place
from seqcheck.machine.time import Span
from tests.compare.texts import EVERYTHING, changes, machine, told

EXAMPLES = sorted((Path(__file__).parents[2] / "examples").rglob("*.steps"))

# Nothing where only the writing differs

WORDS = re.compile(r'"[^"\n]*"|\S+')


@given(st.data())
def test_white_space_line_ends_and_comments_make_no_difference(data: st.DataObject) -> None:
    between = st.sampled_from((" ", "\n", "   ", "\t", "\n\n  # a remark\n", "\r\n"))
    words = WORDS.findall(EVERYTHING)
    gaps = data.draw(st.lists(between, min_size=len(words), max_size=len(words)))
    written = "".join(gap + word for gap, word in zip(gaps, words, strict=True))
    assert changes(EVERYTHING, written + "\n") == ()


@given(st.permutations(re.split(r"\n(?=[a-z])", EVERYTHING.strip())))
def test_the_order_of_statements_makes_no_difference(statements: list[str]) -> None:
    assert changes(EVERYTHING, "\n".join(statements)) == ()


@pytest.mark.parametrize(
    ("old", "new"),
    [
        ("on 18..28 ms", "on 18 ms..28 ms"),
        ("on 18..28 ms", "on 23 ± 5 ms"),
        ("on 18..28 ms", "on 18..23..28 ms"),
        ("900 ms..1.1 s", "0.9..1.1 s"),
        ("within 6 s", "within 6000 ms"),
        ("gap 20 ms", "gap 20000 us"),
        ("start and not second", "not second and start"),
        ("start and not second", "(start and (not (second)))"),
        ("start and not second", "start and not second and start"),
        ("until not second", "until not not not second"),
        ("A.moving and B.between", "B.between and A.moving"),
        ("coil Y2 to a coil Y3 to b { decay 5..9 ms }", "coil Y3 to b { decay 5..9 ms } coil Y2 to a"),
        ("sensor a0 at retracted", "sensor a0 at 0..0 %"),
        ("on horn pulse Y7 40 ms", "pulse Y7 40 ms on horn"),
        ("until pressed steady 30 ms dwell 300 ms", "dwell 300 ms until pressed steady 30 ms"),
        (
            "{ C- } and { step hold { on horn pulse Y7 40 ms until pressed steady 30 ms dwell 300 ms } }",
            "{ step hold { on horn pulse Y7 40 ms until pressed steady 30 ms dwell 300 ms } } and { C- }",
        ),
        ("C+ C-", "C+C-"),
        ("    A-\n", "    A- within 6 s\n"),
    ],
)
def test_another_spelling_makes_no_difference(old: str, new: str) -> None:
    assert EVERYTHING.count(old) == 1
    assert told(changes(EVERYTHING, EVERYTHING.replace(old, new))) == set()


def test_a_time_in_a_sheet_is_the_same_time(tmp_path: Path) -> None:
    sheet = tmp_path / "press.times.yaml"
    sheet.write_text("valves:\n  V1: {on: 18..28 ms}\n", encoding="utf-8")
    bare = EVERYTHING.replace("via island on 18..28 ms", "via island")
    found = read_machine(Source("press.steps", bare), [str(sheet)])
    assert isinstance(found, Machine)
    assert machine_changes(machine(EVERYTHING), found)[0] == ()


@pytest.mark.parametrize("file", EXAMPLES, ids=lambda file: file.stem)
def test_an_example_does_not_differ_from_itself_under_another_name(file: Path) -> None:
    text = file.read_text(encoding="utf-8")
    old = read_machine(Source(str(file), text))
    new = read_machine(Source(str(file.with_name("other.steps")), "\n\n" + text))
    assert isinstance(old, Machine) and isinstance(new, Machine)
    assert machine_changes(old, new) == ((), {})


def test_a_machine_without_a_name_is_the_same_in_another_file() -> None:
    text = EVERYTHING.replace('machine "Press"', "")
    assert machine_changes(machine(text, "old.steps"), machine(text, "k/new.steps"))[0] == ()


# Everything else is told


@pytest.mark.parametrize(
    ("old", "new", "expected"),
    [
        ("on 18..28 ms off", "on 18..30 ms off", {("coil Y1", "changed", "on", "18..28 ms", "18..30 ms")}),
        ("15..20..25 ms", "15..25 ms", set()),
        (
            "15..20..25 ms",
            "15..21..25 ms",
            {
                ("coil Y4", "changed", "on", "15..25 ms", "15..21..25 ms"),
                ("coil Y5", "changed", "on", "15..25 ms", "15..21..25 ms"),
            },
        ),
        (" gap 20 ms", "", {("valve V2", "changed", "gap", "20 ms", "none")}),
        ("at 48..60 %", "at 48.5..60 %", {("sensor b5", "changed", "on from", "48 %", "48.5 %")}),
        ("900 ms..1.1 s", "950 ms..1.1 s", {("cylinder B", "changed", "extend", "900 ms..1.1 s", "950 ms..1.1 s")}),
        (
            "extend 200..250 ms from coil",
            "extend 200..250 ms",
            {("cylinder C", "changed", "extend", "200..250 ms from coil", "200..250 ms")},
        ),
        ("on V2 reversed", "on V2", {
            ("cylinder B", "changed", "drive", "V2 reversed", "V2"),
            ("step main.(A+ B+)", "changed", "commands", "on Y3, set Y1", "on Y2, set Y1"),
        }),
        ("task 10 ms", "task 20 ms", {("controller", "changed", "round", "10 ms", "20 ms")}),
        (
            "flag second",
            "flag spare flag second",
            {("flag spare", "new")},
        ),
        ('machine "Press"', 'machine "Big press"', {("machine", "changed", "name", "Press", "Big press")}),
        (
            "start and not second",
            "start",
            {("step main.ready", "changed", "until", "not second and start", "start")},
        ),
        ("40 ms until", "45 ms until", {("step main.hold", "changed", "commands", "on horn, pulse Y7 40 ms", "on horn, pulse Y7 45 ms")}),  # noqa: E501
        (" steady 30 ms", "", {("step main.hold", "changed", "steady", "30 ms", "none")}),
        (
            "within 2 s else fault",
            "within 2 s",
            {("step main.(A+ B+)", "changed", "within", "2 s else main.fault", "2 s")},
        ),
        (
            "    A-\n",
            "    A-\n    step wait { dwell 1 s }\n",
            {("step main.wait", "new", "after main.A-")},
        ),
        ("step skip { set second dwell 10 ms }", "step past { set second dwell 10 ms }", {("step main.skip", "changed", "name", "main.skip", "main.past")}),  # noqa: E501
        ("repeat 2", "repeat 3", {("sequence main", "changed", "after main.hold", "repeat 2", "repeat 3")}),
        ("when part {", "when not part {", {("sequence main", "changed", "after main.hold", "when part", "when not part")}),  # noqa: E501
        ("jump ready", "jump clear", {("sequence main", "changed", "after main.clear", "jump main.ready", "jump main.clear")}),  # noqa: E501
        ("} within 10 s else", "} within 9 s else", {("sequence main", "changed", "after main.skip", "} within 10 s else main.fault", "} within 9 s else main.fault")}),  # noqa: E501
        ("lamp once", "lamp", {("sequence lamp", "changed", "runs", "once", "round")}),
        ("for 5 ms", "for 6 ms", {("never A.moving and B.between", "changed", "for", "5 ms", "6 ms")}),
        ("cycle main 20 s", "cycle main 21 s", {("limit cycle main", "changed", "greatest", "20 s", "21 s")}),
        ("0.1..1.2 s", "1.2 s", {("limit from Y1 to a1", "changed", "least", "100 ms", "none")}),
        ("never A.moving and", "never A.moving or", {
            ("never A.moving and B.between", "gone"), ("never A.moving or B.between", "new")
        }),
    ],
)  # fmt: skip
def test_a_change_is_told_by_name(old: str, new: str, expected: set[tuple[str, ...]]) -> None:
    assert EVERYTHING.count(old) == 1
    assert told(changes(EVERYTHING, EVERYTHING.replace(old, new))) == expected


def test_steps_that_change_places_are_told() -> None:
    text = "output K sequence main { step a { on K dwell 1 s } step b { dwell 2 s } step c { dwell 3 s } }"
    moved = "output K sequence main { step b { dwell 2 s } step a { on K dwell 1 s } step c { dwell 3 s } }"
    found = told(changes(text, moved))
    assert {one[:2] for one in found} == {("sequence main", "changed")}
    assert len(found) == 2


def test_a_step_that_goes_into_a_repeat_is_told() -> None:
    text = "sequence main { step a { dwell 1 s } repeat 2 { step b { dwell 2 s } } }"
    assert changes(text, "sequence main { repeat 2 { step a { dwell 1 s } step b { dwell 2 s } } }")


def test_a_renamed_step_that_is_otherwise_changed_is_gone_and_new() -> None:
    text = "sequence main { step a { dwell 1 s } step b { dwell 2 s } }"
    found = told(changes(text, text.replace("step b { dwell 2 s }", "step c { dwell 3 s }")))
    assert found == {("step main.c", "new", "after main.a"), ("step main.b", "gone")}


#: Fields that say nothing about the machine, or what another field says.
SILENT = {
    ("Machine", "file"), ("Machine", "sheets"), ("Machine", "accepts"),
    ("Valve", "coils"), ("Cylinder", "sensors"), ("Term", "kind"),
    ("Never", "text"), ("CycleLimit", "text"), ("PathLimit", "text"),
}  # fmt: skip
#: Keys of the mappings already, and found again in them.
NAMES = {"Island", "Valve", "Coil", "Output", "Cylinder", "Sensor", "OutsideSignal", "FollowingSignal", "Flag"}


def mutants(value: Any) -> Iterator[Any]:
    """The value with one thing in it changed, once for each thing in it."""
    if isinstance(value, Place):
        return
    if isinstance(value, Span):
        yield Span(value.least, value.typical, value.greatest + 1)
        if value.typical < value.greatest:
            yield Span(value.least, value.typical + 1, value.greatest)
    elif isinstance(value, Term | Not | AllOf | AnyOf):
        yield Not(value, value.place)
        yield from record_mutants(value)
    elif isinstance(value, Enum):
        yield next(other for other in type(value) if other is not value)
    elif isinstance(value, bool):
        yield not value
    elif isinstance(value, int):
        yield value + 10_000
    elif isinstance(value, str):
        yield f"{value}x"
    elif isinstance(value, tuple):
        for number, part in enumerate(value):
            yield value[:number] + value[number + 1 :]
            yield from ((*value[:number], mutant, *value[number + 1 :]) for mutant in mutants(part))
    elif dataclasses.is_dataclass(value):
        yield from record_mutants(value)
    elif hasattr(value, "items"):
        for name, part in value.items():
            yield {key: other for key, other in value.items() if key != name}
            yield from (dict(value) | {name: mutant} for mutant in mutants(part))


def record_mutants(record: Any) -> Iterator[Any]:
    kind = type(record).__name__
    for field in dataclasses.fields(record):
        silent = (kind, field.name) in SILENT or (kind in NAMES and field.name == "name")
        if not silent and not (kind == "Sequence" and field.name == "name"):
            value = getattr(record, field.name)
            yield from (dataclasses.replace(record, **{field.name: mutant}) for mutant in mutants(value))


def test_whatever_is_changed_in_a_machine_is_told() -> None:
    old = machine(EVERYTHING)
    count = 0
    for new in mutants(old):
        assert machine_changes(old, new)[0], new
        count += 1
    assert count > 300


def test_the_text_has_every_kind_of_record() -> None:
    """So that a kind that is new in the model cannot be forgotten here."""
    from seqcheck.machine import conditions, devices, rules, steps

    kinds = {
        kind
        for module in (conditions, devices, rules, steps)
        for kind in vars(module).values()
        if dataclasses.is_dataclass(kind) and isinstance(kind, type)
    }
    assert {kind.__name__ for kind in kinds - set(map(type, records(machine(EVERYTHING))))} <= {"AnyOf", "Place"}


def records(value: Any) -> Iterator[Any]:
    if isinstance(value, tuple):
        for part in value:
            yield from records(part)
    elif dataclasses.is_dataclass(value):
        yield value
        for field in dataclasses.fields(value):
            yield from records(getattr(value, field.name))
    elif hasattr(value, "values"):
        yield from records(tuple(value.values()))
