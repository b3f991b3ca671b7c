"""Durations in writing: both ways, exact."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from seqcheck.language.durations import GREATEST_TIME, UNITS, format_duration, parse_duration, time_from
from tests.language.reading import DEVICES, WORK, machine


@given(st.integers(-GREATEST_TIME, GREATEST_TIME))
def test_formatting_and_parsing_are_inverse(time_us: int) -> None:
    assert parse_duration(format_duration(time_us)) == time_us


@given(st.integers(0, GREATEST_TIME))
def test_the_language_reads_what_is_formatted(time_us: int) -> None:
    step = machine(f"{DEVICES} sequence m {{ step a {{ dwell {format_duration(time_us)} }} }}").sequences[0].items[0]
    assert getattr(step, "dwell", None) == time_us


@given(st.integers(0, 10**9), st.sampled_from(sorted(UNITS)))
def test_whole_numbers_of_any_unit(number: int, unit: str) -> None:
    time = time_from(str(number), unit)
    assert time == (number * UNITS[unit] if number * UNITS[unit] <= GREATEST_TIME else "this is over 1000 hours")


@pytest.mark.parametrize(
    ("time_us", "written"),
    [
        (0, "0 ms"),
        (1, "1 us"),
        (-500, "-500 us"),
        (999, "999 us"),
        (1_000, "1 ms"),
        (55_500, "55.5 ms"),
        (-55_005, "-55.005 ms"),
        (999_999, "999.999 ms"),
        (1_200_000, "1.2 s"),
        (1_905_000, "1.905 s"),
        (59_999_999, "59.999999 s"),
        (60_000_000, "1 min"),
        (90_000_000, "90 s"),
        (120_000_000, "2 min"),
        (60_000_001, "60.000001 s"),
    ],
)
def test_written(time_us: int, written: str) -> None:
    assert format_duration(time_us) == written


@pytest.mark.parametrize(
    ("digits", "unit", "time"),
    [
        ("30", "ms", 30_000),
        ("1.2", "s", 1_200_000),
        ("0.001", "ms", 1),
        ("1.500", "us", "this is finer than one microsecond"),
        ("0.0001", "ms", "this is finer than one microsecond"),
        ("1.000", "us", 1),
        ("60000", "min", GREATEST_TIME),
        ("60000.1", "min", "this is over 1000 hours"),
        ("9" * 30, "us", "this number has too many digits"),
        ("0" * 5000 + "1", "us", 1),
        ("0." + "1" * 30, "s", "this number has too many digits"),
        ("0.00000005", "min", 3),
    ],
)
def test_time_from(digits: str, unit: str, time: int | str) -> None:
    assert time_from(digits, unit) == time


@pytest.mark.parametrize("text", ["", "ms", "5", "5 h", "5  ms", "--5 ms", "5 ms ", "1.5 us", "1. ms"])
def test_no_duration(text: str) -> None:
    assert parse_duration(text) is None


@pytest.mark.parametrize(
    ("span", "times"),
    [
        ("18..28 ms", (18_000, 23_000, 28_000)),
        ("18..22..28 ms", (18_000, 22_000, 28_000)),
        ("900 ms..1.2 s", (900_000, 1_050_000, 1_200_000)),
        ("900 us..2..3 ms", (900, 2_000, 3_000)),
        ("30 ± 5 ms", (25_000, 30_000, 35_000)),
        ("30+-5ms", (25_000, 30_000, 35_000)),
        ("1 s ± 5 ms", (995_000, 1_000_000, 1_005_000)),
        ("7 us", (7, 7, 7)),
        ("1..2 us", (1, 1, 2)),
    ],
)
def test_spans(span: str, times: tuple[int, int, int]) -> None:
    on = machine(f"output L {{ on {span} }}" + WORK + DEVICES).outputs["L"].on
    assert (on.least, on.typical, on.greatest) == times
