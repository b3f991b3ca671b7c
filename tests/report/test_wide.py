"""Bounds that are safe and maybe not exact are said to be so, and only they."""

from __future__ import annotations

import json
from dataclasses import replace
from pathlib import Path

import pytest

from seqcheck.compare.results import Bar, cycle_changes
from seqcheck.compare.stored import stored_reports
from seqcheck.language.source import Source
from seqcheck.machine.findings import ChoiceTime, Duration, Report
from seqcheck.pipeline import examine
from seqcheck.report.json import render_json
from seqcheck.report.layout import page
from seqcheck.report.states import state_lines
from seqcheck.report.tables import times_lines
from seqcheck.report.text import render_text
from tests.report.samples import healthy, place

WIDE = replace(healthy().cycles[0][1], exact=False)
LEGEND = "wide safe: added up over states with something under way"
CASES = Path(__file__).parents[1] / "cases"


def some_wide() -> Report:
    """One of the two cycles, one of the two ways, no step."""
    exact = healthy().cycles[0][1]
    ways = tuple(ChoiceTime("main", place(27, 9), f"way {one.exact}", one) for one in (exact, WIDE))
    return replace(healthy(), cycles=(("main", exact), ("other", WIDE)), choices=ways)


@pytest.mark.parametrize("lines", [times_lines, state_lines])
def test_the_pages_of_times_mark_them(lines) -> None:  # type: ignore[no-untyped-def]
    shown = page(lines(some_wide()))
    rows = {row.split()[0]: row for row in shown.splitlines() if row.strip()}
    assert rows["other"].endswith("2374.0  wide")
    assert [row.split()[-1] for row in shown.splitlines() if " way " in row and "False" in row] == ["wide"]
    assert shown.count("  wide") == 3 and LEGEND in " ".join(shown.split())
    assert shown.count("bounds") == 2


@pytest.mark.parametrize("lines", [times_lines, state_lines])
def test_where_all_are_exact_there_is_no_mark(lines) -> None:  # type: ignore[no-untyped-def]
    shown = page(lines(healthy()))
    assert "wide" not in shown and "bounds" not in shown


def test_the_summary_says_it_too() -> None:
    assert "other 1.905 s to 2.374 s, typically 2.1395 s (safe, maybe wide)" in " ".join(
        render_text([some_wide()]).split()
    )
    assert "wide" not in render_text([healthy()])


def test_stored_reports_keep_it_and_older_ones_do_not_know() -> None:
    text = render_json([some_wide()])
    whole = json.loads(text)["reports"][0]
    assert "exact" not in whole["cycles"]["main"] and whole["cycles"]["other"]["exact"] is False
    (back,) = stored_reports(Source("old.json", text))  # type: ignore[misc]
    assert back.cycles == some_wide().cycles
    assert [one.duration.exact for one in back.choices] == [True, False]
    (older,) = stored_reports(Source("old.json", text.replace(',\n          "exact": false', "")))  # type: ignore[misc]
    assert [one.exact for _, one in older.cycles] == [True, True]
    assert not cycle_changes(older, some_wide(), Bar(0, lambda finding: False))
    wider = replace(some_wide(), cycles=(("main", Duration(1, 2, 3)), ("other", replace(WIDE, least=1))))
    assert [one.name for one in cycle_changes(older, wider, Bar(0, lambda finding: False))] == ["main", "other"]


def test_an_exactness_that_is_none_is_damage() -> None:
    text = render_json([some_wide()]).replace('"exact": false', '"exact": 0')
    assert "damaged" in stored_reports(Source("old.json", text)).message  # type: ignore[union-attr]


def test_machines_say_it_of_themselves() -> None:
    """Behind a choice something is left of what began before it: hanging on what has gone by, or not."""
    wide = page(times_lines(examine(str(CASES / "choose_while_something_is_under_way.steps"))))
    assert LEGEND in " ".join(wide.split())
    exact = page(times_lines(examine(str(CASES / "choose_while_a_dwell_goes_on.steps"))))
    assert "wide" not in exact
