"""Facts of the trade, as the program sees them.

"Common practice, no source" marks what any practitioner would say; where there is a published source it is named.
"""

from __future__ import annotations

import re

import pytest

from seqcheck.language.read import read_machine
from seqcheck.language.source import Source
from seqcheck.machine.devices import Position, ValveReturn
from seqcheck.machine.findings import Report
from seqcheck.machine.model import Machine
from seqcheck.pipeline import examine_source

CONTROLLER = "controller { scan 8..12 ms   input 2..4 ms   output 0.5..1 ms }\n"
LIFT = """
valve V 5/3 closed centre { coil YOUT to a  coil YIN to b  on 20..30 ms  off 30..45 ms }
cylinder lift on V { extend 600..700 ms  retract 500..620 ms  sensor IN at retracted  sensor OUT at extended }
"""


def examined(text: str) -> Report:
    report = examine_source(Source("trade.steps", CONTROLLER + text))
    assert not report.problems, report.problems
    return report


def kinds(report: Report) -> set[str]:
    return {one.kind for one in report.findings} - {"unused", "no-watchdog"}


# Valves


def test_a_2_2_valve_has_two_ports_and_two_positions() -> None:
    """Common practice, no source: the first number of a valve counts its ports, the second its positions."""
    text = (
        "valve V 2/2 spring { coil Y on 1 ms off 1 ms } sequence main { step a { set Y dwell 1 s } step b { reset Y } }"
    )
    machine = read_machine(Source("trade.steps", text))
    assert isinstance(machine, Machine)
    valve = machine.valves["V"]
    assert (valve.ports, valve.positions, valve.kind, valve.rest) == (2, 2, ValveReturn.SPRING, Position.B)
    for other in ("2/3 closed centre", "1/2 spring", "2/1 spring"):
        assert not isinstance(read_machine(Source("trade.steps", text.replace("2/2 spring", other))), Machine)


def test_a_solenoid_valve_and_a_motor_valve_switched_together_overlap_by_about_a_second() -> None:
    """A solenoid valve acts in about 0.03 s, a motorised one in about 1 s (common practice, no source): a fill valve of
    the one kind and a drain valve of the other, switched at once, are both open for about a second."""
    report = examined("""
        valve fill  2/2 spring { coil YF  on 25..35 ms  off 25..35 ms }
        valve drain 2/2 motor  { coil YD to a  coil YC to b  travel 0.9..1.1 s }
        sequence main {
            step drained { on YD  dwell 5 s }
            step filled  { on YC  set YF  dwell 5 s }
            step full    { reset YF  dwell 5 s }
        }
        never fill.open and drain.open "it runs out again"
    """)
    broken = [one for one in report.findings if one.kind == "broken-never"]
    assert len(broken) == 1 and broken[0].certain
    assert broken[0].margin_us is not None
    assert 0.9e6 <= -broken[0].margin_us <= 1.2e6


# A 5/3 valve with spring centring, common practice, no source


def test_one_coil_extends_and_the_other_retracts() -> None:
    report = examined(LIFT + "sequence main { step a { on YOUT until OUT } step b { on YIN until IN } }")
    assert kinds(report) == set()
    steps = dict(report.steps)
    assert steps["main.a"].least >= 600_000 and steps["main.b"].least >= 500_000
    swapped = examined(LIFT + "sequence main once { step a { on YIN until OUT } }")
    assert "dead-end" in kinds(swapped)


def test_with_neither_coil_it_stands_in_its_centre_and_the_cylinder_stops() -> None:
    """Started for 300 of 600 ms and let go, it never gets to its end."""
    report = examined(LIFT + "sequence main once { step a { on YOUT dwell 300 ms } step b { until OUT } }")
    assert "dead-end" in kinds(report)
    assert "cut-stroke" in kinds(report) or "early-dwell" in kinds(report)
    held = examined(LIFT + "sequence main once { step a { set YOUT dwell 300 ms } step b { until OUT } }")
    assert "dead-end" not in kinds(held)


def test_both_coils_at_once_are_a_fault() -> None:
    report = examined(LIFT + "sequence main { step a { on YOUT  set YIN  dwell 2 s } step b { reset YIN  dwell 2 s } }")
    found = [one for one in report.findings if one.kind == "opposed-coils"]
    assert [(one.subject, one.certain, one.severity.value) for one in found] == [("V", True, "error")]


@pytest.mark.parametrize("valve", ["5/2 bistable", "5/3 closed centre", "4/3 tandem centre"])
def test_opposed_coils_held_on_together_are_an_error_even_for_a_moment(valve: str) -> None:
    """Published data sheet 18 of a hydraulics dealer (womackmachine.com, recurrent solenoid burn-out): even a short
    overlap of a fraction of a second, repeated each cycle, may burn a coil of a direct-acting double-solenoid valve."""
    off = "" if "bistable" in valve else "off 30..45 ms"
    text = f"""
        valve V {valve} {{ coil YA to a  coil YB to b  on 20..30 ms  {off} }}
        cylinder C on V {{ extend 200..260 ms  retract 200..260 ms  sensor IN at retracted  sensor OUT at extended }}
    """
    overlap = "step out { pulse YA 400 ms  until OUT }  step back { on YB  until IN }"
    apart = "step out { on YA  until OUT }  step rest { dwell 60 ms }  step back { on YB  until IN }"
    more = "  step idle { dwell 500 ms }"
    assert "opposed-coils" in kinds(examined(f"{text} sequence main {{ {overlap}{more} }}"))
    assert "opposed-coils" not in kinds(examined(f"{text} sequence main {{ {apart}{more} }}"))


# Plain end-switch control: each sensor drives the coil of the next move for as long as it is on


#: Published lecture on opposed signals (scribd.com 646357867, lecture 13): repeat-pattern sequences need no opposed
#: commands with plain end-switch control.
REPEATED = ["A+B+A-B-", "A+B+C+A-B-C-", "A+B+C+D+A-B-C-D-", "A-B+C-A+B-C+", "C+A+B-C-A-B+"]
#: Any other sequence does, for example this one (same source).
OPPOSED = ["A+B+B-A-", "A+B+C+C-B-A-"]


def end_switch_control(pattern: str) -> str:
    """Each move is commanded by the sensor that the move before it brings on, the first by that of the last."""
    moves = re.findall(r"([A-Z])([+-])", pattern)
    first = dict(reversed(moves))
    devices = [_cylinder(name, first[name] == "-") for name in sorted(first)]
    coils = []
    for (name, way), (before, its_way) in zip(moves, [moves[-1], *moves[:-1]], strict=True):
        coil = f"Y{name}{'out' if way == '+' else 'in'}"
        sensor = f"{before}{'out' if its_way == '+' else 'in'}"
        steps = f"step idle {{ until {sensor} }}  step driving {{ on {coil}  until not {sensor} }}"
        coils.append(f"sequence drive_{coil} {{ {steps} }}")
    return "\n".join([*devices, *coils])


def _cylinder(name: str, extended: bool) -> str:
    return f"""
        valve V{name} 5/2 bistable {"starts a" if extended else ""} {{
            coil Y{name}out to a  coil Y{name}in to b  on 15..25 ms
        }}
        cylinder {name} on V{name} {{
            extend 300..400 ms  retract 300..400 ms  {"starts extended" if extended else ""}
            sensor {name}in at retracted  sensor {name}out at extended
        }}
    """


@pytest.mark.parametrize("pattern", REPEATED)
def test_repeat_patterns_need_no_opposed_commands(pattern: str) -> None:
    assert "opposed-coils" not in kinds(examined(end_switch_control(pattern)))


@pytest.mark.parametrize("pattern", OPPOSED)
def test_other_patterns_command_opposed_coils(pattern: str) -> None:
    assert "opposed-coils" in kinds(examined(end_switch_control(pattern)))


@pytest.mark.parametrize("pattern", [*REPEATED, *OPPOSED])
def test_the_texts_of_end_switch_control_can_be_read(pattern: str) -> None:
    assert isinstance(read_machine(Source("trade.steps", CONTROLLER + end_switch_control(pattern))), Machine)


def test_a_step_sequence_has_no_opposed_commands_in_either_order() -> None:
    """The same courses step after step, each coil on in its own step only (common practice, no source)."""
    for pattern in ("A+B+A-B-", "A+B+B-A-"):
        devices = "\n".join(_cylinder(name, False) for name in "AB")
        report = examined(f"{devices} sequence main {{ {' '.join(re.findall('..', pattern))} }}")
        assert kinds(report) == set()
