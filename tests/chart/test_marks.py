"""Where on the chart a finding lies: at the tightest of all that the text states there."""

from __future__ import annotations

import random

import pytest

from seqcheck.chart import marks
from seqcheck.chart.asked import Part
from seqcheck.chart.window import Window, window_of
from seqcheck.checks.catalogue import CHECKS
from seqcheck.checks.check import Obligation
from seqcheck.language.source import Source
from seqcheck.pipeline import study_source
from tests.bench.stations import in_a_row
from tests.bench.texts import repeated
from tests.oracle.ruled import ruled_text


@pytest.mark.parametrize("text", [in_a_row(16, stations=4), repeated(8), *map(ruled_text, range(5000, 5004))])
def test_the_first_of_the_tightest_is_found_without_a_look_at_all(text: str, monkeypatch: pytest.MonkeyPatch) -> None:
    _, studied = study_source(Source("a.steps", text))
    assert studied is not None
    part = studied.parts[0]
    window = window_of(part.machine, part.studies, Part())
    stated = [one for check in CHECKS for one in check.obligations(window.study)]
    assert len(stated) > 10
    margins = [marks._margin(window, one) for one in stated]
    assert marks._tightest(window, stated) == margins.index(min(margins))
    draw = random.Random(1)
    for _ in range(20):
        some = draw.sample(range(len(stated)), 8)
        expected = min(range(8), key=lambda at: (margins[some[at]], at))
        assert marks._tightest(window, [stated[number] for number in some]) == expected
    looked_at: list[int] = []

    def margin(_: Window, one: Obligation) -> int:
        looked_at.append(stated.index(one))
        return margins[looked_at[-1]]

    monkeypatch.setattr(marks, "_margin", margin)
    marks._tightest(window, stated)
    assert 1 <= len(looked_at) < len(stated) / 2
