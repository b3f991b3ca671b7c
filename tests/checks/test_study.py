"""What a study says of its play, on machines whose times are done by hand."""

from __future__ import annotations

from seqcheck.checks.narrate import narrate_typical
from seqcheck.checks.study import Study
from seqcheck.language.source import Source
from seqcheck.machine.time import Span
from seqcheck.pipeline import study_source


def study_of(text: str) -> Study:
    _, studied = study_source(Source("a.steps", text))
    assert studied is not None
    return studied.studies[0]


def test_a_time_that_is_over_is_noticed_by_a_read() -> None:
    """By any of those that are 8 to 12 apart: at once, or 12 later, or in the middle."""
    study = study_of("controller { scan 8..12 ms }\nsequence main { step a { dwell 1 s } }")
    assert study.noticed_after(50_000) == Span(50_000, 56_000, 62_000)


def test_the_played_run_is_told_to_the_very_event() -> None:
    """The two dwells are over 1 us apart; the first is told without the second."""
    study = study_of(
        "sequence main { together { step a { dwell 50 ms } } and { step b { dwell 50001 us } } }",
    )
    over = next(one for one in study.trace.happened if study.time(one) == 50_000)
    assert [moment.time_us for moment in narrate_typical(study, 0, over)][-1] == 50_000
