"""Texts on which an examination once came to no end, or to a wrong one: they are examined, and say what they must."""

from __future__ import annotations

import pytest

from seqcheck.language.source import Source
from seqcheck.pipeline import examine_source

BEHIND_A_TURNED_ORDER = """
machine "Crate scale"
controller { scan 8..12 ms   input 2..4 ms   output 0.5..1 ms }
valve VP 5/2 spring { coil YP1   on 18..28 ms   off 25..40 ms }
cylinder pan on VP { extend 380..440..450 ms  retract 300..360 ms
    sensor BP1 at retracted  sensor BP2 "pan down" at extended }
signal good from outside
signal bad from outside
sequence main {
    every step within 3 s
    step lower { set YP1 }
    step calm  { dwell 460 ms }
    choose {
        when BP2  {
            step pass { dwell 300 ms }
            choose { when good { step one { dwell 1 s } } otherwise { step two { dwell 2 s } } }
            step mid { dwell 100 ms }
            choose { when bad { step three { dwell 1 s } } otherwise { step four { dwell 2 s } } }
            step end { dwell 100 ms }
        }
        otherwise { step reject { dwell 500 ms } }
    }
    step raise { reset YP1   until BP1 }
}
limit from main.mid to main.end 1500 ms
limit from main.one to main.end 1500 ms
limit from main.pass to main.end 1500 ms
"""

ENDS_BEFORE_IT_PARTS = """
controller {scan 8..12 ms input 2..8 ms  output 0.5..1 ms }
valve V1 5/2 spring { coil Y1 on 18..28 ms off 25..40 ms }
cylinder clamp on V1 { extend 0..520 ms retract 300..360 ms
    sensor B1 at retracted sensor B2 at extended }
sequence main {
    step out {pulse Y1 500 ms until B2 }
    step back {reset Y1 }}
"""

NO_STEP_AT_ALL = """
controller { scan 5 ms } output K
sequence main { repeat 0 { step a { on K dwell 5 ms } } }
"""


@pytest.mark.parametrize(
    ("text", "kinds"),
    [
        (BEHIND_A_TURNED_ORDER, {"choice-race", "over-limit"}),
        (ENDS_BEFORE_IT_PARTS, {"short-pulse", "cut-stroke", "dead-end"}),
        (NO_STEP_AT_ALL, {"endless-loop", "unreachable"}),
    ],
)
def test_a_text_that_once_crashed_is_examined(text: str, kinds: set[str]) -> None:
    report = examine_source(Source("a.steps", text))
    assert not report.problems
    assert kinds <= {finding.kind for finding in report.findings}
