"""What is certain where the typical run breaks what other runs keep: only what shows before they go otherwise."""

from __future__ import annotations

from seqcheck.language.source import Source
from seqcheck.pipeline import examine_source

#: The valve takes 20..30, typically 25: where Y1 is off again after 22, that is too soon typically, and not always.
MACHINE = """
valve V1 5/2 spring {{ coil Y1  on 20..30 ms  off 10 ms }}
cylinder ram on V1 {{ extend {extend}  retract 100 ms }}
output H1 "lamp"
sequence main {{
    {first}
    step rest {{ dwell 500 ms }}
    {second}
    step calm {{ dwell 500 ms }}
}}
"""
TOO_SHORT = "step short { on Y1  dwell 22 ms }"
IDLE = "step idle { on H1  dwell 5 ms }"
#: Opposed, in every run: V2 has both coils on for 50 ms.
BOTH = "together { step one { on Y2  dwell 60 ms } } and { step wait { dwell 10 ms } step two { on Y3  dwell 50 ms } }"


def sure(first: str, second: str, extend: str = "100 ms") -> dict[str, bool]:
    text = MACHINE.format(first=first, second=second, extend=extend)
    valve = "valve V2 5/3 closed centre { coil Y2 to a  coil Y3 to b  on 1 ms  off 1 ms }\n"
    report = examine_source(Source("turn.steps", valve + text))
    assert not report.problems
    return {one.kind: one.certain for one in report.findings}


def test_a_dwell_is_too_short_whether_or_not_the_valve_gets_there() -> None:
    """Left at 22, when the valve may be there since 20; the stroke takes 100 more."""
    found = sure(TOO_SHORT, IDLE)
    assert found["early-dwell"] is True and found["short-pulse"] is False


def test_a_dwell_that_may_be_long_enough_is_not_certain_to_be_too_short() -> None:
    """The stroke as short as 2: done at 22 at least, at 132 at most."""
    found = sure(TOO_SHORT, IDLE, "2..102 ms")
    assert found["early-dwell"] is False and found["short-pulse"] is False


def test_what_comes_before_is_certain_and_what_comes_after_is_not() -> None:
    assert sure(BOTH, TOO_SHORT)["opposed-coils"] is True
    assert sure(TOO_SHORT, BOTH)["opposed-coils"] is False
    assert sure(IDLE, BOTH)["opposed-coils"] is True
