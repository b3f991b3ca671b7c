"""What a readable text comes to."""

from __future__ import annotations

from pathlib import Path

import pytest

from seqcheck.language.layout import laid_out
from seqcheck.language.problems import Problems
from seqcheck.language.source import Source
from seqcheck.machine.conditions import AllOf, AnyOf, Not, Term, TermKind
from seqcheck.machine.devices import ControllerKind, OnConditions, OnValve, Position, Stroke, ValveReturn
from seqcheck.machine.model import steps_of
from seqcheck.machine.places import Place
from seqcheck.machine.rules import CycleLimit, Never, PathLimit
from seqcheck.machine.steps import Choose, Command, CommandKind, Jump, Repeat, Step, Together
from seqcheck.machine.time import NO_TIME, Span
from tests.language.reading import DEVICES, WORK, machine

STAPLER = """# Crate stapling station. Air 6 bar, coils 24 V DC.
machine "Crate stapler"
timing "crate_stapler.times.yaml"

controller { scan 8..12 ms   input 2..4 ms   output 0.5..1 ms }

valve V1  5/2 spring         { coil Y1 }
valve V2  5/3 closed centre  { coil Y2 to a   coil Y3 to b   gap 20 ms }
valve V3  5/2 bistable       { coil Y4 to a   coil Y5 to b }
output K1 "infeed belt"      { on 15..30 ms   off 8..20 ms }

cylinder clamp  on V1 { extend 380..450 ms  retract 300..360 ms  sensor B1 at retracted  sensor B2 at extended }
cylinder lift   on V2 { sensor B3 at 0..4 %   sensor B9 at 45..50 %   sensor B4 at 96..100 % }
cylinder pusher on V3 { sensor B5 at retracted   sensor B6 at extended }

signal start    from outside
signal glue_ok  follows lift.extended on 80..150 ms off 20..60 ms

sequence main {
    every step within 10 s
    step ready { until start }
    clamp+  within 1 s
    step raise "lift the crate" { on Y2  until B4  within 2 s }
    together { pusher+ pusher- }
         and { step dry { on K1  dwell 250 ms } }
    repeat 2 { step tap { pulse Y4 60 ms  until B6 }   step back { pulse Y5 60 ms  until B5 } }
    choose {
        when glue_ok { lift- }
        otherwise    { step alarm { dwell 1 s }  lift- }
    }
    clamp-
}

never lift.moving and not clamp.extended   "the crate can slip"
limit cycle 16 s
limit from Y2 to B4 1.2 s
"""
SHEET = """
valves:
  V1: {on: 18..28 ms, off: 25..40 ms}
  V2: {on: 20..30 ms, off: 30..45 ms}
  V3: {on: 15..25 ms}
cylinders:
  lift: {extend: 600..700 ms, retract: 500..620 ms, uneven: 10 %}
  pusher: {extend: 200..250 ms, retract: 180..220 ms from coil}
"""


def test_the_stapler(tmp_path: Path) -> None:
    """The design's own example with a sheet of our own."""
    (tmp_path / "crate_stapler.times.yaml").write_text(SHEET, encoding="utf-8")
    stapler = machine(STAPLER, name=str(tmp_path / "a.steps"))
    assert (stapler.name, stapler.sheets) == ("Crate stapler", ("crate_stapler.times.yaml",))
    assert stapler.controller.kind is ControllerKind.SCAN
    assert stapler.controller.output_off == Span(500, 750, 1_000)
    assert stapler.valves["V2"].kind is ValveReturn.CLOSED_CENTRE
    assert (stapler.valves["V2"].gap, stapler.valves["V2"].starts) == (20_000, Position.CENTRE)
    assert stapler.coils["Y3"].off == Span(30_000, 37_500, 45_000)
    assert stapler.coils["Y4"].off == NO_TIME
    assert stapler.cylinders["lift"].uneven == 100_000
    assert stapler.cylinders["pusher"].retract == Stroke(Span(180_000, 200_000, 220_000), True)
    assert (stapler.sensors["B4"].low, stapler.sensors["B4"].high) == (960_000, 1_000_000)
    main = stapler.sequences[0]
    assert [step.name.removeprefix("main.") for step in steps_of(main)] == [
        *("ready", "clamp+", "raise", "pusher+", "pusher-", "dry", "tap", "back", "lift-", "alarm", "lift-2", "clamp-")
    ]
    assert [type(item) for item in main.items] == [Step, Step, Step, Together, Repeat, Choose, Step]
    watched = {step.name: step.watchdog.within for step in steps_of(main) if step.watchdog}
    assert watched["main.clamp+"] == 1_000_000
    assert watched["main.lift-2"] == 10_000_000
    assert "main.ready" not in watched
    assert "main.dry" not in watched
    assert [type(rule) for rule in stapler.rules] == [Never, CycleLimit, PathLimit]
    assert [rule.text for rule in stapler.rules] == [
        "never lift.moving and not clamp.extended",
        "limit cycle 16 s",
        "limit from Y2 to B4 1.2 s",
    ]


def step(text: str, devices: str = DEVICES) -> Step:
    """The only step of a sequence."""
    only = machine(f"sequence main {{ {text} }}" + devices).sequences[0].items[0]
    assert isinstance(only, Step)
    return only


def test_places_count_from_one_and_end_behind() -> None:
    text = "sequence main {\n  step ready { on K  until start } }"
    ready = machine(text + DEVICES).sequences[0].items[0]
    assert isinstance(ready, Step)
    assert ready.place == Place("press.steps", 2, 3, 2, 35)
    assert ready.commands[0].place == Place("press.steps", 2, 16, 2, 20)
    assert isinstance(ready.until, Term)
    assert ready.until.place == Place("press.steps", 2, 28, 2, 33)


@pytest.mark.parametrize(
    ("motion", "command", "sensors"),
    [
        ("A+", (CommandKind.SET, "Y1"), ["a1"]),
        ("A-", (CommandKind.RESET, "Y1"), ["a0"]),
        ("B+", (CommandKind.ON, "Y2"), ["b1"]),
        ("B-", (CommandKind.ON, "Y3"), ["b0"]),
        ("C+", (CommandKind.ON, "Y4"), ["c1"]),
        ("(C- C2-) dwell 5 ms", (CommandKind.ON, "Y5"), ["c0"]),
    ],
)
def test_motion_steps(motion: str, command: tuple[CommandKind, str], sensors: list[str]) -> None:
    moved = step(motion)
    assert [(part.kind, part.target) for part in moved.commands] == [command]
    assert isinstance(moved.until, Term)
    assert [moved.until.subject] == sensors


def test_a_pair_waits_for_both() -> None:
    pair = step("( A+\n B- ) within 2 s")
    assert pair.name == "main.(A+ B-)"
    assert [(part.kind, part.target) for part in pair.commands] == [(CommandKind.SET, "Y1"), (CommandKind.ON, "Y3")]
    assert isinstance(pair.until, AllOf)
    assert [getattr(part, "subject", None) for part in pair.until.parts] == ["a1", "b0"]
    assert [(move.cylinder, move.out) for move in pair.moves] == [("A", True), ("B", False)]
    assert pair.watchdog is not None


def test_blanks_stand_between_ports_and_positions_however_many() -> None:
    read = machine(
        "valve V1 5/\t \t \t \t2 spring { coil Y1 on 1 ms off 1 ms }\nsequence main { step s { dwell 1 s } }"
    )
    assert (read.valves["V1"].ports, read.valves["V1"].positions) == (5, 2)


def test_reversed_swaps_the_coils() -> None:
    devices = """
    valve V1 5/2 spring { coil Y1 on 1 ms off 1 ms }
    valve V2 5/2 bistable { coil Y2 to a coil Y3 to b on 1 ms }
    cylinder A on V1 reversed { extend 1 s retract 1 s starts extended }
    cylinder B on V2 { reversed extend 1 s retract 1 s starts extended }
    """
    assert step("A+ dwell 2 s", devices).commands[0].kind is CommandKind.RESET
    assert step("A- dwell 2 s", devices).commands[0].kind is CommandKind.SET
    assert step("B+ dwell 2 s", devices).commands[0].target == "Y3"
    assert machine(WORK + DEVICES).cylinders["A"].drive == OnValve("V1", False)


def test_second_steps_of_one_name() -> None:
    text = "sequence main { (A+ B+) A- A+ A- jump A-2 (A+ B+) B- within 1 s else main.(A+ B+)2 B- }"
    items = machine(text + DEVICES).sequences[0].items
    assert [item.name for item in items if isinstance(item, Step)] == [
        *("main.(A+ B+)", "main.A-", "main.A+", "main.A-2", "main.(A+ B+)2", "main.B-", "main.B-2")
    ]
    jump, guarded = items[4], items[6]
    assert isinstance(jump, Jump)
    assert isinstance(guarded, Step)
    assert guarded.watchdog is not None
    assert (jump.target, guarded.watchdog.target) == ("main.A-2", "main.(A+ B+)2")


def test_parts_of_a_step_stand_in_any_order() -> None:
    parts = [
        "on K",
        "set Y1",
        "until a1 steady 20 ms",
        "dwell 1 s",
        "within 2 s else x",
        "pulse Y4 60 ms",
        "reset second",
    ]
    forward, backward = step(f"step x {{ {' '.join(parts)} }}"), step(f"step x {{ {' '.join(parts[::-1])} }}")
    for found in (forward, backward):
        assert (found.steady, found.dwell) == (20_000, 1_000_000)
        assert found.watchdog is not None
        assert (found.watchdog.within, found.watchdog.target) == (2_000_000, "main.x")
        assert {(part.kind, part.target, part.duration) for part in found.commands} == {
            (CommandKind.ON, "K", None),
            (CommandKind.SET, "Y1", None),
            (CommandKind.PULSE, "Y4", 60_000),
            (CommandKind.RESET, "second", None),
        }
    assert isinstance(forward.commands[0], Command)


@pytest.mark.parametrize(
    ("until", "watched"),
    [
        ("a1", True),
        ("start", False),
        ("start and not b5", True),
        ("pressed", True),
        ("second", False),
        ("K or Y1", False),
    ],
)
def test_every_step_that_waits_for_a_sensor_is_watched(until: str, watched: bool) -> None:
    text = f"sequence main {{ every step within 5 s step x {{ until {until} }} step y {{ dwell 1 s }} }}"
    first, second = machine(text + DEVICES).sequences[0].items
    assert isinstance(first, Step)
    assert isinstance(second, Step)
    assert (first.watchdog is not None) is watched
    assert second.watchdog is None


def test_and_binds_closer_than_or() -> None:
    condition = step("step x { until a0 and not a1 or b0 and (b1 or start) }").until
    assert isinstance(condition, AnyOf)
    left, right = condition.parts
    assert isinstance(left, AllOf)
    assert isinstance(left.parts[1], Not)
    assert isinstance(right, AllOf)
    assert isinstance(right.parts[1], AnyOf)


def test_what_names_in_a_condition_are() -> None:
    text = "sequence main { step x { until a0 and start and Y1 and K and second and main.A+ and x and other.y } A+ }"
    read = machine(text + " sequence other { step y { dwell 1 s } }" + DEVICES)
    first = read.sequences[0].items[0]
    assert isinstance(first, Step)
    assert isinstance(first.until, AllOf)
    assert [(part.kind.name, part.subject) for part in first.until.parts if isinstance(part, Term)] == [
        ("SENSOR", "a0"),
        ("SIGNAL", "start"),
        ("COIL", "Y1"),
        ("OUTPUT", "K"),
        ("FLAG", "second"),
        ("STEP", "main.A+"),
        ("STEP", "main.x"),
        ("STEP", "other.y"),
    ]


def test_what_rules_see() -> None:
    valve = "valve W 2/2 spring normally open { coil Z on 1 ms off 1 ms }\n"
    text = "never A.between # a note\n   and V2.center and W.closed for 5 ms\n"
    rule = machine(valve + text + WORK + DEVICES).rules[0]
    assert isinstance(rule, Never)
    assert isinstance(rule.condition, AllOf)
    assert [(part.kind, part.aspect) for part in rule.condition.parts if isinstance(part, Term)] == [
        (TermKind.CYLINDER, "between"),
        (TermKind.VALVE, "centre"),
        (TermKind.VALVE, "closed"),
    ]
    assert (rule.tolerated, rule.why) == (5_000, None)
    assert rule.text == "never A.between and V2.center and W.closed for 5 ms"


def test_the_text_of_a_rule_is_the_rule_as_it_would_be_laid_out() -> None:
    rules = (
        "never  ( A . extended\n and not\tV2.a ) or main . A+2   for  0.5\n ms",
        "limit    from main . A+\n  to not( V2 .a)   0.1\n ..\n 1.2   s",
        "limit\n cycle   main 20s",
        "limit from Y1 to a1 900 ms .. 1.2 s",
    )
    text = "\n".join((*rules, DEVICES, "sequence main { A+ A- A+ A- }"))
    laid = laid_out(Source("press.steps", text), Problems())
    assert laid is not None
    assert [rule.text for rule in machine(text).rules] == laid.splitlines()[: len(rules)]
    assert machine(f'{rules[0]} # why\n "they  meet" {DEVICES} sequence main {{ A+ A- A+ A- }}').rules[0].text == (
        "never (A.extended and not V2.a) or main.A+2 for 0.5 ms"
    )


def test_limits() -> None:
    text = "limit from A.extended to main.A- 5..8 s\nlimit from Y1 to a1 1 s\nlimit cycle 9 s\n"
    between, at_most, cycle = machine(text + WORK + DEVICES).rules
    assert isinstance(between, PathLimit)
    assert isinstance(at_most, PathLimit)
    assert (between.least, between.greatest) == (5_000_000, 8_000_000)
    assert (at_most.least, at_most.greatest) == (None, 1_000_000)
    assert isinstance(cycle, CycleLimit)
    assert (cycle.sequence, cycle.greatest) == ("main", 9_000_000)


def test_times_of_a_coil_win_over_its_valve() -> None:
    coils = machine(
        "valve V 5/2 motor { travel 4 s coil P to b decay 1 ms coil Q to a { decay 2 ms } }" + WORK + DEVICES
    ).coils
    assert (coils["P"].to, coils["Q"].to) == (Position.B, Position.A)
    assert (coils["P"].on, coils["P"].off, coils["P"].decay) == (Span.exactly(4_000_000), NO_TIME, Span.exactly(1_000))
    assert coils["Q"].decay == Span.exactly(2_000)


def test_addresses_labels_and_islands() -> None:
    text = """
    io bus "front" { update 2..4 ms output 1 ms }
    valve V "main valve" 5/2 spring { coil P %QX1.2 "front coil" via bus on 1 ms off 1 ms }
    cylinder Z "the gate" on V { extend 1 s retract 1 s sensor z "shut" %I0.3 at extended via bus delay 2 ms }
    output L via bus signal ready "from the robot" %I1.0 from outside after 1..2 s flag f "half done"
    sequence s "the gate's" once { step x "look" { dwell 1 s } }
    """
    read = machine(text)
    assert (read.coils["P"].address, read.coils["P"].label, read.coils["P"].via) == ("%QX1.2", "front coil", "bus")
    assert (read.sensors["z"].address, read.sensors["z"].label, read.sensors["z"].via) == ("%I0.3", "shut", "bus")
    assert read.sensors["z"].delay == Span.exactly(2_000)
    assert read.islands["bus"].output_off == Span.exactly(1_000)
    assert read.islands["bus"].label == "front"
    assert (read.valves["V"].label, read.cylinders["Z"].label, read.outputs["L"].via) == (
        "main valve",
        "the gate",
        "bus",
    )
    assert (read.signals["ready"].address, read.signals["ready"].label) == ("%I1.0", "from the robot")
    assert (read.flags["f"].label, read.sequences[0].label, read.sequences[0].once) == ("half done", "the gate's", True)
    assert (read.name, read.file) == ("press", "press.steps")


def test_a_drive_by_conditions() -> None:
    valve = "valve W 2/2 spring { coil Z on 1 ms off 1 ms }"
    text = valve + " cylinder D out when V2.a and W.open in when V2.b { extend 1 s retract 1 s }"
    assert isinstance(machine(text + WORK + DEVICES).cylinders["D"].drive, OnConditions)


@pytest.mark.parametrize(
    ("controller", "kind"),
    [("", ControllerKind.IDEAL), ("controller { task 9 ms run 1 ms }", ControllerKind.TASK)],
)
def test_controllers(controller: str, kind: ControllerKind) -> None:
    read = machine(controller + WORK + DEVICES).controller
    assert read.kind is kind
    assert read.run == (Span.exactly(1_000) if controller else NO_TIME)


def test_repeat_nought_and_empty_choices_are_fine() -> None:
    read = machine(
        "sequence main { repeat 0 { A+ } choose { when K { } otherwise { A- } } within 1 s else A- }" + DEVICES
    )
    repeat, choose = read.sequences[0].items
    assert isinstance(repeat, Repeat)
    assert isinstance(choose, Choose)
    assert repeat.times == 0
    assert choose.choices[0].items == ()
    assert choose.watchdog is not None
    assert choose.watchdog.target == "main.A-"
