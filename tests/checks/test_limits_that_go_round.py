"""A limit that a way round and round exceeds is shown by a run that goes round until it is over."""

from __future__ import annotations

from pathlib import Path

from seqcheck.pipeline import examine

CASE = Path(__file__).parents[1] / "cases" / "limit_way_that_repeats.steps"


def test_the_run_goes_round_until_the_limit_is_over() -> None:
    found = [one for one in examine(str(CASE)).findings if one.subject == "limit from main.b to main.a 1 s"]
    assert len(found) == 1
    run = found[0].run
    assert run[0].event == "step main.b entered"
    assert run[-1].event == "step main.a entered"
    assert run[-1].time_us - run[0].time_us > 1_000_000
    assert sum(moment.event == "step main.b entered" for moment in run) > 10
