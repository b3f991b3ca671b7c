"""A limit that a way round and round exceeds is shown by a run that goes round until it is over."""

from __future__ import annotations

from pathlib import Path

from seqcheck.language.source import Source
from seqcheck.pipeline import examine, examine_source

CASE = Path(__file__).parents[1] / "cases" / "limit_way_that_repeats.steps"


def test_the_run_goes_round_until_the_limit_is_over() -> None:
    found = [one for one in examine(str(CASE)).findings if one.subject == "limit from main.b to main.a 1 s"]
    assert len(found) == 1
    run = found[0].run
    assert run[0].event == "step main.b entered"
    assert run[-1].event == "step main.a entered"
    assert run[-1].time_us - run[0].time_us > 1_000_000
    assert sum(moment.event == "step main.b entered" for moment in run) > 10


def test_what_never_comes_while_the_machine_goes_round_is_certain() -> None:
    main = "sequence main { step a { dwell 10 ms }  step b { dwell 20 ms } }"
    text = f"flag done\n{main}\nlimit from main.b to done 1 s\n"
    (found,) = [one for one in examine_source(Source("a.steps", text)).findings if one.kind == "over-limit"]
    assert found.certain
    assert found.message.endswith("the other may never come")
