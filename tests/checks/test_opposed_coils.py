"""What mends two coils commanded at once: a shorter pulse where the valve keeps its position, if it is long enough."""

from __future__ import annotations

from seqcheck.language.source import Source
from seqcheck.machine.findings import Finding
from seqcheck.pipeline import examine_source

MACHINE = """controller {{ scan 8..12 ms  input 2..4 ms  output 0.5..1 ms }}
valve V3 5/2 bistable {{ coil Y4 to a  coil Y5 to b  on 20..30 ms }}
output K1
sequence main {{
    step out {{ pulse Y4 {pulse} ms {exit} }}
    step back {{ pulse Y5 60 ms  dwell 300 ms }}
}}
"""


def at_once(pulse: int, exit: str) -> list[Finding]:
    report = examine_source(Source("a.steps", MACHINE.format(pulse=pulse, exit=exit)))
    assert not report.problems, report.problems
    return [one for one in report.findings if one.kind == "opposed-coils"]


def test_a_pulse_of_a_valve_that_keeps_its_position_may_be_shorter() -> None:
    """Y5 is commanded 100 after Y4 at least, the pulse ends 150 + 12 after it at most: 62 too late. 88 end in time."""
    (found,) = at_once(150, "dwell 100 ms")
    assert found.margin_us == -62_000
    assert found.mend == "a pulse of Y4 of at most 88 ms ends in time"
    assert at_once(89, "dwell 100 ms")
    assert not at_once(88, "dwell 100 ms")


def test_no_pulse_is_as_short_as_a_round() -> None:
    """Y5 is commanded a round after Y4, 8 at least: the pulse would have to end 4 before it begins."""
    (found,) = at_once(70, "")
    assert found.margin_us == 8_000 - (70_000 + 12_000)
    assert found.mend == "end the command of Y4 first"


def test_a_pulse_as_long_as_the_longest_round_is_none_that_helps() -> None:
    """Y5 comes 24 or 25 after Y4 at least, and the end of the pulse is noticed up to 12 late: 12 or 13 are left."""
    (found,) = at_once(60, "dwell 24 ms")
    assert found.mend == "end the command of Y4 first"
    (found,) = at_once(60, "dwell 25 ms")
    assert found.mend == "a pulse of Y4 of at most 13 ms ends in time"
