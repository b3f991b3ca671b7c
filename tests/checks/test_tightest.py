"""Only what may be the tightest or broken is bounded exactly: nothing in the report hangs on that."""

from __future__ import annotations

import random
from collections.abc import Iterable, Sequence

import pytest

from seqcheck.checks import opposed_coils, prove
from seqcheck.checks.check import Obligation
from seqcheck.checks.study import Study
from seqcheck.checks.tightest import those_that_count
from seqcheck.engine.bounds import Rows
from seqcheck.language.source import Source
from seqcheck.pipeline import examine_source
from seqcheck.report.json import render_json
from tests.bench.stations import in_a_row
from tests.bench.texts import choices, repeated
from tests.oracle.ruled import ruled_text

FAULTY = in_a_row(64, stations=4).replace("within 20 s", "within 690 ms")
TEXTS = [in_a_row(64, stations=4), FAULTY, repeated(20), choices(4), *map(ruled_text, range(5000, 5012))]


def counted(asked: list[tuple[str, int]], exact: list[int]) -> tuple[list[int], set[int]]:
    """Those that count, and those that were worked out."""
    worked_out: set[int] = set()

    def margins_of(numbers: Sequence[int]) -> list[int]:
        worked_out.update(numbers)
        return [exact[number] for number in numbers]

    return those_that_count(asked, margins_of), worked_out


def test_of_each_key_what_may_be_tightest_is_worked_out() -> None:
    asked = [("a", 5), ("b", 1), ("a", 9), ("a", 6), ("b", 8)]
    assert counted(asked, [7, 4, 9, 6, 8]) == ([0, 1, 3], {0, 1, 3})


def test_what_may_be_broken_is_worked_out() -> None:
    assert counted([("a", -3), ("a", -1), ("a", 0)], [-2, 4, 5]) == ([0, 1], {0, 1})


def test_of_two_that_are_as_tight_the_first_counts() -> None:
    """The later one has less by plain intervals and is worked out first; the earlier one may have as little."""
    assert counted([("a", 7), ("a", 3), ("a", 7)], [7, 7, 7]) == ([0, 1], {0, 1})


def test_nothing_that_counts_is_left_out() -> None:
    draw = random.Random(7)
    for _ in range(300):
        exact = [draw.randint(-5, 30) for _ in range(12)]
        asked = [(draw.choice("abc"), margin - draw.choice((0, 0, 3, 20))) for margin in exact]
        count, worked_out = counted(asked, exact)
        assert set(count) == worked_out
        assert worked_out >= {number for number, margin in enumerate(exact) if margin < 0}
        for key in {key for key, _ in asked}:
            assert min((exact[number], number) for number in range(12) if asked[number][0] == key)[1] in count


def report_of(text: str) -> str:
    return render_json([examine_source(Source("a.steps", text), (), 5_000)])


def bound_everything(monkeypatch: pytest.MonkeyPatch) -> None:
    def all_of_them(asked: Sequence[object], margins_of: object) -> list[int]:
        numbers = list(range(len(asked)))
        assert callable(margins_of)
        margins_of(numbers)
        return numbers

    monkeypatch.setattr(Obligation, "least_margin", lambda one, graph: -1)
    monkeypatch.setattr(prove, "those_that_count", all_of_them)
    monkeypatch.setattr(opposed_coils, "those_that_count", all_of_them)


@pytest.mark.parametrize("text", TEXTS)
def test_the_report_is_the_same_with_everything_bounded(text: str, monkeypatch: pytest.MonkeyPatch) -> None:
    tightest = report_of(text)
    bound_everything(monkeypatch)
    assert report_of(text) == tightest


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


def test_repetitions_are_not_bounded_again(bounded: list[tuple[int, int]]) -> None:
    report_of(repeated(5))
    few = len(bounded)
    bounded.clear()
    report_of(repeated(50))
    assert len(bounded) <= few + 5


def test_most_of_a_play_that_comes_round_is_left_out(
    bounded: list[tuple[int, int]], monkeypatch: pytest.MonkeyPatch
) -> None:
    text = in_a_row(256, stations=4)
    report_of(text)
    tightest = len(bounded)
    bounded.clear()
    bound_everything(monkeypatch)
    report_of(text)
    assert tightest < 0.5 * len(bounded)


def test_what_is_broken_is_counted_each_time(bounded: list[tuple[int, int]]) -> None:
    """Certain is only what every round shows, the second one, too."""
    report_of(FAULTY)
    broken = len(bounded)
    bounded.clear()
    report_of(TEXTS[0])
    assert broken > len(bounded)
