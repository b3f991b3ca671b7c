"""Stored reports: read back as they were written, and refused in words where they are none."""

from __future__ import annotations

import json
from dataclasses import replace
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from seqcheck.compare.names import matched
from seqcheck.compare.stored import FORMAT, is_stored, stored_reports
from seqcheck.language.source import Source
from seqcheck.machine.findings import ChoiceTime, Duration, Problem, Report
from seqcheck.report import json as written
from seqcheck.report.json import render_json
from tests.report.samples import healthy, no_watchdog, place, short_pulse, unreadable


def stored(text: str) -> tuple[Report, ...] | Problem:
    return stored_reports(Source("base.json", text))


def refused(text: str) -> str:
    found = stored(text)
    assert isinstance(found, Problem)
    return found.message


def test_what_is_written_is_read_back() -> None:
    report = healthy(short_pulse(accepted="known"), short_pulse(step=None, margin_us=None), no_watchdog())
    found = stored(render_json([report, unreadable()]))
    assert not isinstance(found, Problem)
    back, broken = found
    for name in ("file", "machine", "cycles", "steps", "verdict"):
        assert getattr(back, name) == getattr(report, name)
    assert [(one.kind, one.severity, one.certain, one.subject, one.step, one.message) for one in back.findings] == [
        (one.kind, one.severity, one.certain, one.subject, one.step, one.message) for one in report.findings
    ]
    assert [(one.margin_us, one.accepted, one.place.line) for one in back.findings] == [
        (one.margin_us, one.accepted, one.place.line) for one in report.findings
    ]
    assert [(one.kind, one.subject, one.step, one.margin_us) for one in back.margins] == [
        (one.kind, one.subject, one.step, one.margin_us) for one in report.margins
    ]
    assert broken.verdict == "unreadable"
    assert broken.problems[0].message == "there is no valve V9; did you mean V1?"


def with_choices() -> Report:
    durations = (Duration(1_905_000, 1_905_000, 2_374_000), Duration(2_000_000, 2_000_000, None))
    choices = [ChoiceTime("main", place(27 + n, 9), f"when in line {27 + n}", one) for n, one in enumerate(durations)]
    return replace(healthy(), choices=tuple(choices))


def test_cycles_by_choice_are_read_back_and_may_be_missing() -> None:
    """Reports that were stored before there were any have no such key."""
    text = render_json([with_choices()])
    back = stored(text)
    assert not isinstance(back, Problem)
    assert [(one.sequence, one.place.line, one.way, one.duration) for one in back[0].choices] == [
        (one.sequence, one.place.line, one.way, one.duration) for one in with_choices().choices
    ]
    older = json.loads(text)
    del older["reports"][0]["choices"]
    before = stored(json.dumps(older))
    assert not isinstance(before, Problem)
    assert before[0].choices == () and before[0].cycles == with_choices().cycles


def test_the_version_that_is_written_can_be_read() -> None:
    assert FORMAT == written.FORMAT
    assert not isinstance(stored(render_json([])), Problem)


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("{", "this is no JSON"),
        ('{"format": "other"}', "no report of seqcheck"),
        ("{}", "damaged: the key 'format' is missing"),
        ('{"format": "seqcheck-report", "version": 2, "reports": []}', "version 2"),
        ('{"format": "seqcheck-report", "version": true, "reports": []}', "the value of 'version'"),
        ('{"format": "seqcheck-report", "version": 1, "reports": {}}', "the value of 'reports'"),
        ('{"format": "seqcheck-report", "version": 1, "reports": [3]}', "something in it is no object"),
        ('{"format": ' + "[" * 100_000, "cannot be read"),
        ('{"format": "seqcheck-report", "version": ' + "9" * 4000 + "}", "the value of 'version'"),
        ('{"version": ' + "9" * 5000 + "}", "cannot be read"),
    ],
)
def test_what_is_no_report_is_refused(text: str, words: str) -> None:
    assert words in refused(text)


def test_json_that_breaks_off_is_told_with_its_place() -> None:
    found = stored('{\n  "format": oops}')
    assert isinstance(found, Problem)
    assert (found.place.file, found.place.line, found.place.column) == ("base.json", 2, 13)


def damaged(value: Any) -> list[Any]:
    """The value with one thing in it replaced by something of another kind, or one key left out, each way once."""
    if isinstance(value, dict):
        shorter = [{key: part for key, part in value.items() if key != name} for name in value]
        return shorter + [value | {name: other} for name, part in value.items() for other in damaged(part)]
    if isinstance(value, list):
        numbered = [(number, other) for number, part in enumerate(value) for other in damaged(part)]
        return [[*value[:number], other, *value[number + 1 :]] for number, other in numbered]
    return [[]]


def test_damage_anywhere_is_refused_or_in_what_a_comparison_does_not_ask() -> None:
    whole = json.loads(render_json([replace(with_choices(), findings=(short_pulse(),))]))
    texts = [json.dumps(one) for one in damaged(whole)]
    found = [stored(text) for text in texts]
    assert len([one for one in found if isinstance(one, Problem)]) > 50
    # The rest: verdict, proved_under, handovers, runs, all choices, and steps and cycles that are gone altogether.
    kept = [one for one in found if not isinstance(one, Problem)]
    assert all(report[0].file == "stapler.steps" for report in kept)


ANYTHING = st.recursive(
    st.none() | st.booleans() | st.integers() | st.floats() | st.text(max_size=5),
    lambda inner: (
        st.lists(inner, max_size=3)
        | st.dictionaries(
            st.sampled_from(["file", "machine", "findings", "errors", "cycles", "steps", "choices", "x"]), inner
        )
    ),
    max_leaves=10,
)


@given(st.lists(ANYTHING, max_size=3) | ANYTHING)
def test_nothing_in_a_report_brings_down_the_reader(reports: Any) -> None:
    found = stored(json.dumps({"format": FORMAT, "version": 1, "reports": reports}))
    assert isinstance(found, Problem) or found == ()


@pytest.mark.parametrize(("text", "expected"), [("{}", True), (" \n{", True), ("machine", False), ("# {", False)])
def test_a_stored_report_begins_with_a_brace(text: str, expected: bool) -> None:
    assert is_stored(Source("a", text)) is expected


@pytest.mark.parametrize(
    ("given", "relative", "stored_names", "expected"),
    [
        (["m/a.steps"], ["a.steps"], ["m/a.steps", "a.steps"], [0]),
        (["n/a.steps"], ["a.steps"], ["m/k/a.steps", "m/a.steps"], [1]),
        (["n/k/a.steps", "n/a.steps"], ["k/a.steps", "a.steps"], ["m/k/a.steps"], [0, None]),
        (["n/a.steps"], ["a.steps"], ["m/aa.steps"], [None]),
        (["n/k/a.steps"], ["k/a.steps"], ["m\\k\\a.steps"], [0]),
        (["./a.steps"], ["a.steps"], ["a.steps"], [0]),
        (["a.steps", "b.steps"], ["a.steps", "b.steps"], ["x/b.steps", "x/a.steps"], [1, 0]),
    ],
)
def test_stored_names_are_matched(
    given: list[str], relative: list[str], stored_names: list[str], expected: list[int | None]
) -> None:
    assert matched(given, relative, stored_names) == expected
