"""What a text may not say: one table of message, text and place, after the devices of ``reading``."""

from __future__ import annotations

import pytest

from tests.language.reading import DEVICES, WORK, problems, told

#: Message, text, line, column. The text stands before the devices; WORK is added where it has no sequence.
REFUSALS = [
    # names and addresses
    ("the name K is used in line 1 already", "flag K", 10, 8),
    ("the name Y1 is used in line 1 already", "signal Y1 from outside", 2, 28),
    ("the address %QX0.1 is used in line 1 already", "output L %q0.1 output M %QX0.1", 1, 25),
    ("%I0.1 is no address of an output bit", "output L %I0.1", 1, 10),
    ("%QW3 is no address of an output bit", "output L %QW3", 1, 10),
    ("%Q0.1 is no address of an input bit", "signal s %Q0.1 from outside", 1, 10),
    ("an address cannot stand here", "flag f %M0.1", 1, 8),
    ("a second label", 'flag f "one" "two"', 1, 14),
    ("the sequence main has no step", "sequence main { }", 1, 10),
    ("a second `machine`: the first stands in line 1", 'machine "a" machine "b"', 1, 13),
    ("there is no valve V9", "cylinder Z on V9 { extend 1 s retract 1 s }", 1, 15),
    ("A is a cylinder", "cylinder Z on A { extend 1 s retract 1 s }", 1, 15),
    ("there is no io bus", "output L via bus", 1, 14),
    # times
    ("this span runs backwards", "output L { on 28..18 ms }", 1, 15),
    ("this span runs backwards", "output L { on 18..30..28 ms }", 1, 15),
    ("the least time of this span is negative", "output L { on 5 ± 6 ms }", 1, 15),
    ("this is finer than one microsecond", "output L { on 0.5 us }", 1, 15),
    ("this is over 1000 hours", "output L { on 70000 min }", 1, 15),
    ("on is given twice", "output L { on 5 ms off 1 ms on 6 ms }", 1, 29),
    ("on is given twice", "controller { scan 5 ms input on 2 ms on 3 ms }", 1, 38),
    (
        "a gap is one duration, not a span",
        "valve V 5/2 bistable { coil Q1 to a coil Q2 to b on 5 ms gap 1..2 ms }",
        1,
        62,
    ),
    # controller and io
    ("a controller runs by scan or by task, not both", "controller { scan 5 ms task 5 ms run 1 ms }", 1, 24),
    ("nobody gives the time run of the controller's task", "controller { task 5 ms }", 1, 14),
    ("the controller has no round", "controller { input 5 ms }", 1, 1),
    ("the longest run of the task is over its shortest interval", "controller { task 5..9 ms run 1..6 ms }", 1, 27),
    ("nobody gives the time update of bus", "io bus { input 1 ms }", 1, 4),
    # valves
    ("there is no 6/2 valve", "valve V 6/2 spring { coil Q on 5 ms off 5 ms }", 1, 9),
    ("there is no 2/3 valve", "valve V 2/3 closed centre { coil Q1 to a coil Q2 to b on 1 s off 1 s }", 1, 9),
    ("a 5/3 valve has 3 positions, spring needs 2", "valve V 5/3 spring { coil Q on 5 ms off 5 ms }", 1, 9),
    (
        "a 5/2 valve has 2 positions, closed centre needs 3",
        "valve V 5/2 closed center { coil Q1 to a coil Q2 to b on 1 s off 1 s }",
        1,
        9,
    ),
    ("a spring valve has one coil, V has two", "valve V 5/2 spring { coil Q on 5 ms off 5 ms coil R }", 1, 7),
    ("a bistable valve has two coils, V has none", "valve V 5/2 detent", 1, 7),
    ("the spring moves the valve to b", "valve V 5/2 spring { coil Q to b on 5 ms off 5 ms }", 1, 32),
    ("nobody says where the coil Q2 moves the valve", "valve V 5/2 motor { coil Q1 to a coil Q2 travel 1 s }", 1, 39),
    ("both coils of V move it to a", "valve V 5/2 motor { coil Q1 to a coil Q2 to a travel 1 s }", 1, 45),
    ("V: a bistable valve has no time off", "valve V 5/2 bistable { coil Q to a coil R to b on 1 s off 2 s }", 1, 55),
    ("V: a spring valve has no time gap", "valve V 5/2 spring { coil Q on 5 ms off 5 ms gap 9 ms }", 1, 46),
    (
        "Q: gap belongs to the valve, not to a coil",
        "valve V 5/2 motor { coil Q to a {gap 1 s} coil R to b travel 1 s }",
        1,
        34,
    ),
    ("nobody gives the time on of the valve V", "valve V 5/2 bistable { coil Q to a { on 1 s } coil R to b }", 1, 7),
    ("nobody gives the time off of the valve V", "valve V 5/2 spring { coil Q on 5 ms }", 1, 7),
    ("nobody gives the time travel of the valve V", "valve V 5/2 motor { coil Q to a coil R to b }", 1, 7),
    ("a spring valve starts at b", "valve V 5/2 spring starts a { coil Q on 1 s off 1 s }", 1, 27),
    ("only a 2/2 valve is normally open", "valve V 3/2 spring normally open { coil Q on 1 s off 1 s }", 1, 29),
    ("starts stands here twice", "valve V 5/2 motor starts a starts a { coil Q to a coil R to b travel 1 s }", 1, 28),
    # cylinders and sensors
    ("nobody gives the time extend of the cylinder Z", "cylinder Z on V2 { retract 1 s }", 1, 10),
    ("the lag of Z is over its stroke", "cylinder Z on V2 { extend 1 s retract 1 s lag 1..1.1 s }", 1, 43),
    ("this is over 100 %", "cylinder Z on V2 { extend 1 s retract 1 s uneven 101 % }", 1, 50),
    ("a share finer than 0.0001 %", "cylinder Z on V2 { extend 1 s retract 1 s uneven 0.00001 % }", 1, 50),
    ("this range runs backwards", "cylinder Z on V2 { extend 1 s retract 1 s sensor z at 8..4 % }", 1, 55),
    ("this range is empty", "cylinder Z on V2 { extend 1 s retract 1 s sensor z at 4..4 % }", 1, 55),
    ("this sensor would be on all the time", "cylinder Z on V2 { extend 1 s retract 1 s sensor z at 0..100 % }", 1, 55),
    (
        "Z cannot start retracted: its valve at rest holds it extended",
        "cylinder Z on V1 reversed { extend 1 s retract 1 s }",
        1,
        10,
    ),
    (
        "Z cannot start extended: its valve at rest holds it retracted",
        "cylinder Z on V1 { extend 1 s retract 1 s starts extended }",
        1,
        50,
    ),
    (
        "Z cannot start retracted: its valve at rest holds it extended",
        "valve V 5/2 bistable starts a { coil Q to a coil R to b on 1 s }\ncylinder Z on V { extend 1 s retract 1 s }",
        2,
        10,
    ),
    (
        "Z cannot start retracted: its valve at rest holds it extended",
        "cylinder Z out when V2.centre and not V1.a in when V1.a { extend 1 s retract 1 s }",
        1,
        10,
    ),
    (
        "with all valves at rest Z would move out and in at once",
        "cylinder Z out when V1.b in when V3.b { extend 1 s retract 1 s }",
        1,
        10,
    ),
    (
        "`from coil` needs a cylinder on one valve",
        "cylinder Z out when V1.a in when V2.b { extend 1 s from coil retract 1 s }",
        1,
        41,
    ),
    (
        "the drive of a cylinder does not see A.extended",
        "cylinder Z out when A.extended in when V2.b { extend 1 s retract 1 s }",
        1,
        21,
    ),
    ("Y1 is a coil", "cylinder Z out when Y1 in when V2.b { extend 1 s retract 1 s }", 1, 21),
    # signals
    ("this signal follows itself: s follows t follows s", "signal s follows t signal t follows not s", 1, 1),
    ("this signal follows itself: s follows s", "signal s follows s or K", 1, 1),
    # steps
    ("B is a cylinder", "sequence n { step x { on B } }", 1, 26),
    ("a1 is a sensor", "sequence n { step x { set a1 } }", 1, 27),
    ("second is a flag", "sequence n { step x { pulse second 5 ms } }", 1, 29),
    ("there is no coil, output or flag Y9", "sequence n { step x { reset Y9 } }", 1, 29),
    ("the step x stands in line 1 already", "sequence n { step x { dwell 1 s } step x { dwell 1 s } }", 1, 40),
    ("a second dwell in one step", "sequence n { step x { dwell 1 s dwell 2 s } }", 1, 33),
    ("a second within in one step", "sequence n { A+ within 1 s dwell 1 s within 2 s }", 1, 38),
    ("a second until in one step", "sequence n { step x { until a0 until a1 } }", 1, 32),
    ("a step does not see A.extended", "sequence n { step x { until A.extended } }", 1, 29),
    ("a step does not see V1.a", "sequence n { step x { until V1.a } }", 1, 29),
    ("A is a cylinder", "sequence n { step x { until A } }", 1, 29),
    ("there is no name a9", "sequence n { step x { until not a9 or a1 } }", 1, 33),
    ("the sequence main has no step raise", "sequence n { step x { until main.raise } }\n" + WORK, 1, 29),
    ("main is a sequence", "sequence n { step x { until main } }\n" + WORK, 1, 29),
    ("A+ is a step", "sequence n { step x { until A+ } }\n" + WORK, 1, 29),
    ("a1 is a sensor: nothing stands behind a point", "sequence n { step x { until a1.on } }", 1, 29),
    ("`every step within` stands only first in a sequence", "sequence n { A+ every step within 1 s A- }", 1, 17),
    (
        "`every step within` stands only first in a sequence",
        "sequence n { repeat 2 { every step within 1 s A+ A- } }",
        1,
        25,
    ),
    # motion steps
    ("there is no cylinder X", "sequence n { X+ }", 1, 14),
    ("Y1 is a coil", "sequence n { Y1+ }", 1, 14),
    ("C2 has no sensor at extended that could end this step", "sequence n { C2+ }", 1, 14),
    ("C2 has no sensor at retracted that could end this step", "sequence n { (A+ C2-) }", 1, 18),
    ("C and C2 are on one valve, V3, and need opposite positions", "sequence n { (C+ C2-) dwell 1 s }", 1, 18),
    ("A stands here twice", "sequence n { (A+ A-) }", 1, 18),
    (
        "Z is not on one valve: this says not what to switch",
        "cylinder Z out when V1.a in when V2.b { extend 1 s retract 1 s }\nsequence n { Z+ dwell 1 s }",
        2,
        14,
    ),
    # structure
    ("over 1000 times round", "sequence n { repeat 1001 { A+ A- } }", 1, 21),
    ("2.5 is no whole number", "sequence n { repeat 2.5 { A+ A- } }", 1, 21),
    ("there is nothing to repeat", "sequence n { A+ repeat 2 { } }", 1, 17),
    ("branch 2 of this `together` is empty", "sequence n { together { A+ } and { } }", 1, 14),
    ("the sequence n has no step there", "sequence n { A+ jump there }", 1, 22),
    ("the sequence n has no step there", "sequence n { A+ within 1 s else there }", 1, 33),
    ("main is not this sequence", "sequence n { A+ jump main.A+ }\n" + WORK, 1, 22),
    ("the step A- is outside of this `together`", "sequence n { together { A+ jump A- } and { B+ } A- }", 1, 33),
    (
        "the step x is inside a branch of a `together`",
        "sequence n { together { A+ } and { step x { dwell 1 s } } A- jump x }",
        1,
        67,
    ),
    (
        "the step x is inside a branch of a `together`",
        "sequence n { together { A+ within 1 s else x } and { step x { dwell 1 s } } }",
        1,
        44,
    ),
    # rules
    ("A has no `extendd`", "never A.extendd", 1, 7),
    ("V1 has no `centre`", "never V1.centre", 1, 7),
    ("V1 has no `open`", "never V1.open", 1, 7),
    ("V1 is a valve", "never V1", 1, 7),
    ("there is no name X", "never A.moving and X.moving", 1, 20),
    ("the sequence main has no step B+", "never main.B+", 1, 7),
    ("A+ is a step", "limit from A+ to a1 1 s", 1, 12),
    ("there is no sequence man", "limit cycle man 1 s", 1, 13),
    ("nobody says which sequence this limits", "sequence n { A+ A- }\nlimit cycle 1 s\n" + WORK, 2, 1),
    ("the sequence n runs once and has no cycle", "sequence n once { A+ A- }\nlimit cycle n 1 s", 2, 13),
    ("no sequence goes round", "sequence n once { A+ A- }\nlimit cycle 1 s", 2, 1),
]


@pytest.mark.parametrize(("message", "text", "line", "column"), REFUSALS)
def test_refusal(message: str, text: str, line: int, column: int) -> None:
    whole = text + DEVICES + ("" if "sequence" in text else WORK)
    found = problems(whole)
    assert len(found) == 1, told(found)
    assert (found[0].message, found[0].place.line, found[0].place.column) == (message, line, column)
    assert found[0].place.file == "press.steps"
    assert found[0].source == whole.split("\n")[line - 1]


def test_a_text_without_a_sequence() -> None:
    assert [problem.message for problem in problems("")] == ["there is no sequence in this text"]


@pytest.mark.parametrize(
    ("text", "advice"),
    [
        ("sequence n { step x { on Y11 } }", "did you mean Y1?"),
        ("sequence n { step x { until A.extended } }", "it sees sensors and signals: write a1"),
        ("sequence n { step redy { until a1 } jump ready }", "did you mean redy?"),
        ("never A.extendd", "did you mean extended?"),
        ("never a.moving", "did you mean A?"),
        ("cylinder Z on v1 { extend 1 s retract 1 s }", "did you mean V1?"),
        ("valve V 5/2 closed centre { coil Q to a coil R to b on 1 s off 1 s }", "write 5/3"),
        ("limit from A+ to a1 1 s", "write main.A+"),
    ],
)
def test_advice(text: str, advice: str) -> None:
    found = problems(text + DEVICES + ("" if "sequence" in text else WORK))
    assert [problem.advice for problem in found] == [advice]
