"""Which sequence ought to wait for which, where they never meet: one that asks nothing of the others yet."""

from __future__ import annotations

import pytest

from seqcheck.language.source import Source
from seqcheck.pipeline import examine_source

#: A rule over all of them, else they would be proved apart.
OVER_ALL = "never main.a and free.e for 100 s\n"
MAIN = "controller { scan 8..12 ms }\nsequence main { step a { dwell 100 ms }  step b { dwell 50 ms } }\n"
TIED = "sequence tied { step c { until main.a }  step d { until main.b } }\n"
FREE = "sequence free { step e { dwell 130 ms }  step f { dwell 70 ms } }\n"


@pytest.mark.parametrize("text", [MAIN + FREE, MAIN + TIED + FREE, MAIN + FREE + TIED])
def test_the_free_one_is_to_wait_for_the_first(text: str) -> None:
    report = examine_source(Source("a.steps", text + OVER_ALL))
    (found,) = [one for one in report.findings if one.kind == "not-settled"]
    begins = "say `until not main.a` and then `until main.a`"
    assert found.mend == f"let free wait once a round for a step of main to begin, {begins}"
