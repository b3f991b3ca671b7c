"""Slips of syntax: one table of message, broken text and place; and that one slip hides no other."""

from __future__ import annotations

import pytest

from tests.language.reading import DEVICES, WORK, problems, told

#: Message, advice (a part of it), text, line, column.
SLIPS = [
    ("`valv` begins no statement", "did you mean `valve`?", "valv V1 5/2 spring { coil Y1 }", 1, 1),
    ("`step` stands outside of a sequence", "is there a `}` too many", "step a { until start }", 1, 1),
    ("`sprng` cannot stand here", "did you mean `spring`?", "valve V1 5/2 sprng { coil Y1 }", 1, 14),
    ("`stepp` begins no step", "did you mean `step`?", "sequence m {\n  stepp a { until start } }", 2, 3),
    ("`within1` begins no step", "leave a space: `within 1`", "sequence m { A+ within1 s }", 1, 17),
    ("`B` begins no step", "B+ or B-", "sequence m { A+ B # ?\n A- }", 1, 17),
    ("`untill` cannot stand here", "did you mean `until`?", "sequence m {\n  step a { untill x } }", 2, 12),
    ("`for200` is one word", "leave a space: `for 200`", "never K for200 ms", 1, 9),
    ("`sec` is no unit", "write s", "output K { on 5 sec }", 1, 17),
    ("`µs` is no unit", "write us", "output K { on 5 µs }", 1, 17),
    ("the unit is left out", "write 8..12 ms", "controller { scan 8..12 }", 1, 19),
    ("the unit is left out", "write 5 ms (or", "never K for 5", 1, 13),
    ("a comma in a number", "write a decimal point", "controller { scan 8,5 ms }", 1, 20),
    ("a number begins with a digit", "write 0.5", "controller { scan .5 ms }", 1, 19),
    ("a span has two points", "write 18..28 ms", "controller { scan 8...12 ms }", 1, 22),
    ("a span is not written with `-`", "write 8..12 ms", "controller { scan 8-12 ms }", 1, 20),
    ("a span is not written with `–`", "write 8..12 ms", "controller { scan 8 – 12 ms }", 1, 21),
    ("a name has no hyphen", "write lift_up", "sequence m { step lift-up { until start } }", 1, 23),
    ("`,` is no part of the language", "leave it out", "sequence m { step x { set Y1, Y2 } }", 1, 29),
    ("`&` is no part of the language", "write `and`", "never A.moving && B.moving", 1, 16),
    ("`coil` stands outside of a valve", "is there a `}` too many", "coil Y9 to a", 1, 1),
    ("`retracted` cannot stand here", "write `at` before it", "cylinder c on V1 { sensor B1 retracted }", 1, 30),
    ("a number cannot be negative", "leave the `-` out", "controller { scan -5 ms }", 1, 19),
    ("`;` is no part of the language", "leave it out", "flag n; flag b", 1, 7),
    ("`=` is no part of the language", "leave it out", "controller { scan = 5 ms }", 1, 19),
    ("a name cannot begin with a digit", "begin it with a letter", "flag 2x", 1, 6),
    ("`not` cannot be a name", "a name goes here", "flag not", 1, 6),
    ("these quotes are not closed", 'write `"`', 'machine "press\nflag a', 1, 9),
    ('a text in "quotes" cannot stand here', None, 'controller "main" { scan 5 ms }', 1, 12),
    ("there is no open `{` for this `}`", "leave it out", "flag a }", 1, 8),
    ("the `{` of line 2 is not closed before `flag`", "write `}`", "sequence m {\n step a {\nflag b", 3, 1),
    ("the text ends before the `{` of line 1 is closed", "write `}`", "sequence m { step a { until start }\n\n", 1, 36),
    ("the statement ends too early", "here may stand: )", "never (a and (b)", 1, 17),
    ("the statement ends too early", "a number", "limit cycle", 1, 12),
    ("`}` cannot stand here", "a name, not", "sequence m { step a { until } }", 1, 29),
    ("a sensor covers a range of the stroke", "45..50 %", "cylinder c on V { sensor B at 50 % }", 1, 36),
    ("a `together` has two branches or more", "and { .. }", "sequence m { together { A+ } }", 1, 30),
    ("the character U+0007 cannot stand here", None, "flag a \x07", 1, 8),
    ("nested over 50 deep", "close some", "sequence m {" + "repeat 2 {" * 60, 1, 512),
    ("nested over 50 deep", "close some", "never " + "(" * 60, 1, 57),
    ("nested over 50 deep", "close some", "never " + "not " * 60, 1, 207),
]


@pytest.mark.parametrize(("message", "advice", "text", "line", "column"), SLIPS)
def test_slip(message: str, advice: str | None, text: str, line: int, column: int) -> None:
    whole = text if "early" in message or "ends" in message or "nested" in message else text + "\n" + WORK + DEVICES
    found = problems(whole)
    assert len(found) == 1, told(found)
    assert (found[0].message, found[0].place.line, found[0].place.column) == (message, line, column)
    assert found[0].source == text.split("\n")[line - 1]
    if advice is not None:
        assert found[0].advice is not None
        assert advice in found[0].advice


def test_slips_and_unknown_names_are_told_in_one_go() -> None:
    text = """valve V1 5/2 sprng { coil Y1 }
output K { on 5 sec }
flag there
sequence main {
    step k { on K  set their  until start }
}
signal start from outsid
limit cycle amin 5 s
"""
    assert [(problem.place.line, problem.advice) for problem in problems(text)] == [
        (1, "did you mean `spring`?"),
        (2, "write s"),
        (5, "did you mean there?"),
        (7, "did you mean `outside`?"),
        (8, "did you mean main?"),
    ]


def test_names_of_broken_statements_are_forgiven() -> None:
    """V1, K, start and the sequence `other` are declared by broken statements: no unknown name follows."""
    text = """valve V1 5/2 sprng { coil Y1 }
cylinder A on V1 { extend 1 s retract 1 s sensor a0 at retracted sensor a1 at extended }
output K { on 5 sec }
signal start from outsid
sequence other { step a { untill x } }
sequence main { A+  step k { on K set Y1 until start and other.a } }
limit cycle other 5 s
"""
    assert [problem.place.line for problem in problems(text)] == [1, 3, 4, 5]


def test_a_broken_timing_forgives_missing_times() -> None:
    text = 'timing "press.yaml\nvalve V1 5/2 spring { coil Y1 }\nsequence m { step a { on Y1 dwell 1 s } }'
    assert told(problems(text)) == [
        '1:8 these quotes are not closed | write `"` at the end of the text, on the same line'
    ]


def test_times_of_the_controller_begin_no_statement() -> None:
    """`output` begins a line in a broken controller; the text goes on behind it."""
    text = "controller {\n  skan 5 ms\n  output 1 ms\n  output on 1 ms\n}\nflag 2\n" + WORK + DEVICES
    assert [problem.place.line for problem in problems(text)] == [2, 6]


def test_a_whole_statement_before_a_slip_counts() -> None:
    """Nothing follows from the stray brace: V1 and its coil are known."""
    text = DEVICES.strip() + " }\n" + WORK
    assert [problem.message for problem in problems(text)] == ["there is no open `{` for this `}`"]
    found = problems("output L { on 5..3 ms } }\n" + WORK + DEVICES)
    assert [problem.message for problem in found] == ["this span runs backwards", "there is no open `{` for this `}`"]


def test_at_most_twenty_slips() -> None:
    assert len(problems("flag 1\n" * 100 + "sequence m { step a { set x } }\nflag x")) == 20


def test_long_names_are_shortened() -> None:
    found = problems("sequence m { step a { on " + "x" * 100_000 + " } }")
    assert len(found) == 1
    assert len(found[0].message) < 100
    assert found[0].place.end_column == 26 + 100_000
