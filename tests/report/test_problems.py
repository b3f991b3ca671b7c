from __future__ import annotations

import time

import pytest
from hypothesis import given
from hypothesis import strategies as st
from rich.cells import cell_len

from seqcheck.machine.findings import Problem
from seqcheck.report.layout import WIDTH, page
from seqcheck.report.problems import problem_lines
from tests.report.samples import place, unknown_valve


def test_a_problem_shows_place_line_caret_and_advice() -> None:
    assert page(problem_lines(unknown_valve())) == (
        "stapler.steps:3:18: error: there is no valve V9\n"
        "    cylinder lift on V9 { }\n"
        "                     ^\n"
        "    did you mean V1?\n"
    )


@pytest.mark.parametrize(
    ("source", "column", "shown", "caret"),
    [
        ("\tvalve V9", 8, "    valve V9", "          ^"),
        ("昇降 V9", 4, "昇降 V9", "     ^"),
        ("a\x1b[0m V9", 7, r"a\x1b[0m V9", "         ^"),
        ("[bold]V9", 7, "[bold]V9", "      ^"),
        ("valve V1\r\n", 9, "valve V1", "        ^"),
        ("", 1, "", "^"),
        ("short", 99, "short", "     ^"),
    ],
)
def test_the_caret_stands_under_its_column(source: str, column: int, shown: str, caret: str) -> None:
    lines = problem_lines(Problem(place(3, column), "wrong", source))
    assert lines[1].text == f"    {shown}".rstrip()
    assert lines[2].text == f"    {caret}"


def test_a_long_line_is_cut_around_the_caret() -> None:
    source = f"{'a' * 500_000}X{'b' * 500_000}"
    started = time.perf_counter()
    _, shown, caret = problem_lines(Problem(place(1, 500_001), "wrong", source))
    assert time.perf_counter() - started < 1
    assert shown.text[caret.text.index("^")] == "X"
    assert shown.text.strip().startswith("...a")
    assert shown.text.endswith("b...")
    assert cell_len(shown.text) == WIDTH


@given(st.text(), st.integers(1, 300), st.sampled_from(["utf-8", "ascii"]))
def test_any_source_line_fits(source: str, column: int, encoding: str) -> None:
    lines = problem_lines(Problem(place(1, column), "wrong", source), encoding)
    assert all(cell_len(line.text) <= WIDTH and line.text.isprintable() for line in lines)
    page(lines).encode(encoding)


def test_a_file_that_cannot_be_read_has_no_line() -> None:
    lines = problem_lines(Problem(place(1), "no such file", None, None))
    assert page(lines) == "stapler.steps: error: no such file\n"


def test_a_place_without_its_line_still_names_the_place() -> None:
    assert page(problem_lines(Problem(place(7, 2), "wrong"))) == "stapler.steps:7:2: error: wrong\n"
