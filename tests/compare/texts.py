"""What the tests of comparisons share: a text with every construct of the language, and what becomes of its changes."""

from __future__ import annotations

from seqcheck.compare.differences import Change
from seqcheck.compare.meaning import machine_changes
from seqcheck.language.read import read_machine
from seqcheck.language.source import Source
from seqcheck.machine.model import Machine

#: An invented press with everything that the language has.
EVERYTHING = """
machine "Press"
controller { task 10 ms run 1..3 ms input on 2..4 ms off 1..2 ms output 0.5..1 ms }
io island "beside the press" { update 2..4 ms input 1 ms output 0.5..1 ms }
valve V1 "clamp valve" 5/2 spring { coil Y1 %Q0.0 "clamp" via island on 18..28 ms off 25..40 ms }
valve V2 5/3 closed centre { coil Y2 to a coil Y3 to b { decay 5..9 ms } on 20..30 ms off 30..45 ms gap 20 ms }
valve V3 5/2 bistable starts a { coil Y4 to a coil Y5 to b on 15..20..25 ms }
valve V7 2/2 spring normally open { coil Y7 on 12..18 ms off 15..22 ms }
output horn %Q1.0 "horn" { on 15..30 ms off 8..20 ms }
cylinder A on V1 { extend 380..450 ms retract 300..360 ms sensor a0 at retracted sensor a1 at extended delay 1..2 ms }
cylinder B on V2 reversed { extend 900 ms..1.1 s retract 800..950 ms lag 20..40 ms uneven 10 % overrun 5..15 ms
    sensor b0 at 0..3 % sensor b5 %I0.4 "middle" at 48..60 % via island sensor b1 at 97..100 % }
cylinder C on V3 { extend 200..250 ms from coil retract 180..220 ms starts extended
    sensor c0 at retracted sensor c1 at extended }
cylinder D out when V3.a and V7.open in when V3.b { extend 200..250 ms retract 180..220 ms
    starts extended }
signal start %I1.0 "start" from outside
signal part from outside after 200..1500 ms
signal pressed follows A.extended on 80..150 ms off 20..60 ms
flag second "the second one"
sequence main "the press" {
    every step within 6 s
    step ready "wait" { until start and not second }
    (A+ B+) within 2 s else fault
    together { C- } and { step hold { on horn pulse Y7 40 ms until pressed steady 30 ms dwell 300 ms } }
    choose {
        when part { repeat 2 { C+ C- } }
        otherwise { step skip { set second dwell 10 ms } }
    } within 10 s else fault
    A-
    step clear { reset second until not second }
    jump ready
    step fault { on horn until start }
}
sequence lamp once { step dark { until main.hold } }
never A.moving and B.between for 5 ms "they share the rail"
limit cycle main 20 s
limit from Y1 to a1 0.1..1.2 s
"""


def machine(text: str, name: str = "press.steps") -> Machine:
    found = read_machine(Source(name, text))
    assert isinstance(found, Machine), found
    return found


def changes(old: str, new: str) -> tuple[Change, ...]:
    return machine_changes(machine(old), machine(new))[0]


def told(found: tuple[Change, ...]) -> set[tuple[str, ...]]:
    """Changes as they read best in a failed test."""
    return {
        (one.name, one.difference.value, *(part for part in (one.aspect, one.old, one.new) if part)) for one in found
    }
