"""A round that only repeats the one before is not proved again: nothing in the report hangs on that."""

from __future__ import annotations

from collections.abc import Iterable

import pytest

from seqcheck.checks import prove
from seqcheck.checks.check import Obligation
from seqcheck.checks.study import Study
from seqcheck.engine.bounds import Rows
from seqcheck.language.source import Source
from seqcheck.pipeline import examine_source
from seqcheck.report.json import render_json
from tests.bench.stations import in_a_row
from tests.oracle.ruled import ruled_text

FAULTY = in_a_row(64, stations=4).replace("within 20 s", "within 690 ms")
TEXTS = [in_a_row(64, stations=4), FAULTY, *map(ruled_text, range(5000, 5012))]


def report_of(text: str) -> str:
    return render_json([examine_source(Source("a.steps", text))])


@pytest.mark.parametrize("text", TEXTS)
def test_the_report_is_the_same_with_everything_proved_again(text: str, monkeypatch: pytest.MonkeyPatch) -> None:
    once = report_of(text)
    monkeypatch.setattr(Study, "before_repeating", lambda study, one, other: None)
    assert report_of(text) == once


@pytest.fixture
def bounded(monkeypatch: pytest.MonkeyPatch) -> list[tuple[int, int]]:
    """The pairs of events that are bounded for obligations."""
    pairs: list[tuple[int, int]] = []
    rows_of = prove._rows

    def rows(study: Study, stated: Iterable[Obligation]) -> Rows:
        stated = list(stated)
        pairs.extend(pair for one in stated for pair in one.pairs)
        return rows_of(study, stated)

    monkeypatch.setattr(prove, "_rows", rows)
    return pairs


def test_nearly_half_of_a_play_that_comes_round_is_left_out(
    bounded: list[tuple[int, int]], monkeypatch: pytest.MonkeyPatch
) -> None:
    text = in_a_row(256, stations=4)
    report_of(text)
    once = len(bounded)
    bounded.clear()
    monkeypatch.setattr(Study, "before_repeating", lambda study, one, other: None)
    report_of(text)
    assert 0.5 * len(bounded) < once < 0.65 * len(bounded)


def test_what_is_broken_is_counted_each_time(bounded: list[tuple[int, int]]) -> None:
    """Certain is only what every round shows, the second one, too."""
    report_of(FAULTY)
    broken = len(bounded)
    bounded.clear()
    report_of(TEXTS[0])
    assert broken > len(bounded)
