"""What a report says it was proved under: each line, on one machine that needs it and one that does not."""

from __future__ import annotations

from seqcheck.language.source import Source
from seqcheck.pipeline import examine_source

CONTROLLER = "controller { scan 8..12 ms  input 2..4 ms  output 0.5..1 ms }\n"
V1 = "valve V1 5/2 spring { coil Y1  on 18..28 ms  off 25..40 ms }\n"
V3 = "valve V3 5/2 bistable { coil Y4 to a  coil Y5 to b  on 20..30 ms%s }\n"
CLAMP = "cylinder clamp on V1 { extend 380..450 ms  retract 300 ms%s  sensor B1 at retracted  sensor B2 at extended }\n"
PUSHER = "cylinder pusher on V3 { extend 200 ms  retract 200 ms%s  sensor B5 at retracted  sensor B6 at extended }\n"


def proved_under(text: str) -> tuple[str, ...]:
    report = examine_source(Source("a.steps", CONTROLLER + text))
    assert not report.problems, report.problems
    assert report.cycles
    return report.assumptions


def test_the_plainest_machine() -> None:
    assert proved_under("output K1\nsequence main { step a { on K1  dwell 1 s } step b { dwell 1 s } }") == (
        "every time anywhere in its span, anew each time",
        "no faulty part",
        "start at rest, cylinders retracted",
    )


def test_even_speeds_are_an_assumption_where_there_are_cylinders() -> None:
    told = proved_under(V1 + CLAMP % "" + "sequence main { every step within 9 s  clamp+ clamp- }")
    assert told[1] == "speeds even along the stroke"


def test_uneven_speeds_are_told_by_cylinder() -> None:
    """Starts extended at ``a``, so that it goes in first."""
    text = V1 + CLAMP % "  uneven 12.5 %" + V3 % "  starts a" + PUSHER % "  starts extended"
    told = proved_under(text + "sequence main { every step within 9 s  clamp+ pusher- pusher+ clamp- }")
    assert "speeds uneven (clamp up to 12.5 %), others even" in told
    assert "start at rest, cylinders retracted, pusher extended, V3 at a" in told


def test_signals_from_outside_at_any_time_or_so_long_after() -> None:
    text = (
        "signal s1 from outside\nsignal s2 from outside after 20..30 ms\nsignal s3 from outside\noutput K1\n"
        "sequence main { step a { until s1 } step b { until s2 } step c { until s3 } step d { on K1 } "
        "step e { until not s1 and not s2 and not s3 } }"
    )
    assert [one for one in proved_under(text) if "outside" in one] == [
        "at any time from outside: s1, s3",
        "s2 from outside 20 ms to 30 ms after a step begins to wait",
    ]


def test_only_signals_from_outside_are_told() -> None:
    text = V1 + CLAMP % "" + "signal held follows clamp.extended on 80 ms off 20 ms\n"
    told = proved_under(text + "sequence main { every step within 9 s  clamp+ step a { until held } clamp- }")
    assert not [one for one in told if "outside" in one]
