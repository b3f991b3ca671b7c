"""Timing sheets: what they say, which wins, and a table of what they may not say."""

from __future__ import annotations

from pathlib import Path

import pytest

from seqcheck.machine.devices import ControllerKind, OutsideSignal, Stroke
from seqcheck.machine.findings import Problem
from seqcheck.machine.model import Machine
from seqcheck.machine.time import Span
from tests.language.reading import machine, problems, read, told, with_sheet

BARE = """
controller { task 10 ms run 1 ms }
io bus { input 3 ms }
valve V1 5/2 spring { coil Y1 on 5 ms }
valve V2 5/2 bistable { coil Y2 to a coil Y3 to b on 7 ms gap 9 ms }
cylinder A on V1 { sensor a0 at retracted sensor a1 at extended }
output K
signal start from outside
signal full follows K
sequence main { A+ A- }
"""
SHEET = """
# measured
controller: {scan: 8..12 ms, input: on 2..4 ms off 1 ms, output: 1 ms}
io:
  bus: {update: 2 ms, input: on 1 ms}
valves:
  V1: {on: 18..28 ms, off: 30 ± 5 ms}
coils: {Y3: {on: 6 ms, decay: 5 ms}}
outputs:
  K: {on: '1 ms'}
cylinders:
  A:
    extend: "380..450 ms from coil"
    retract: 300..360 ms
    lag: 9 ms
    uneven: 12.5 %
    overrun: 1..2 ms
sensors: {a1: {delay: 3 ms}}
signals: {start: {after: 1..2 s}, full: {on: 4 ms}}
"""


def test_every_section(tmp_path: Path) -> None:
    found = with_sheet(tmp_path, BARE, SHEET)
    assert isinstance(found, Machine), told(found)
    assert found.controller.kind is ControllerKind.SCAN
    assert (found.controller.round, found.controller.run) == (Span(8_000, 10_000, 12_000), Span.exactly(0))
    assert (found.controller.input_on, found.controller.input_off) == (Span(2_000, 3_000, 4_000), Span.exactly(1_000))
    assert found.controller.output_off == Span.exactly(1_000)
    bus = found.islands["bus"]
    assert (bus.update, bus.input_on, bus.input_off) == tuple(Span.exactly(time) for time in (2_000, 1_000, 3_000))
    assert (found.coils["Y1"].on, found.coils["Y1"].off) == (Span(18_000, 23_000, 28_000), Span(25_000, 30_000, 35_000))
    assert (found.coils["Y2"].on, found.coils["Y3"].on) == (Span.exactly(7_000), Span.exactly(6_000))
    assert (found.coils["Y2"].decay, found.coils["Y3"].decay) == (Span.exactly(0), Span.exactly(5_000))
    assert (found.outputs["K"].on, found.outputs["K"].off) == (Span.exactly(1_000), Span.exactly(0))
    cylinder = found.cylinders["A"]
    assert cylinder.extend == Stroke(Span(380_000, 415_000, 450_000), True)
    assert cylinder.retract == Stroke(Span(300_000, 330_000, 360_000), False)
    assert (cylinder.lag, cylinder.uneven, cylinder.overrun) == (
        Span.exactly(9_000),
        125_000,
        Span(1_000, 1_500, 2_000),
    )
    assert found.sensors["a1"].delay == Span.exactly(3_000)
    start = found.signals["start"]
    assert isinstance(start, OutsideSignal)
    assert start.after == Span(1_000_000, 1_500_000, 2_000_000)


def test_a_sheet_changes_the_kind_of_the_controller(tmp_path: Path) -> None:
    found = with_sheet(
        tmp_path,
        "controller { scan 5 ms input 1 ms } sequence m { step x { dwell 1 s } }",
        "controller: {task: 9 ms, run: 1 ms}",
    )
    assert isinstance(found, Machine)
    assert (found.controller.kind, found.controller.round) == (ControllerKind.TASK, Span.exactly(9_000))
    assert found.controller.input_on == Span.exactly(1_000)


def test_later_sheets_win_and_sheets_win_over_the_text(tmp_path: Path) -> None:
    text = (
        'timing "own.yaml"\ntiming "own2.yaml"\nvalve V 5/2 spring { coil Y on 1 ms off 1 ms decay 1 ms }\n'
        "sequence m { step x { on Y dwell 1 s } }"
    )
    (tmp_path / "own.yaml").write_text("valves: {V: {on: 2 ms, off: 2 ms}}")
    (tmp_path / "own2.yaml").write_text("valves: {V: {on: 3 ms}}")
    measured = tmp_path / "elsewhere"
    measured.mkdir()
    (measured / "a.yaml").write_text("valves: {V: {on: 4 ms}}")
    (measured / "b.yaml").write_text("valves: {V: {on: 5 ms}}")
    sheets = (str(measured / "a.yaml"), str(measured / "b.yaml"))
    found = machine(text, *sheets, name=str(tmp_path / "x.steps"))
    coil = found.coils["Y"]
    assert (coil.on, coil.off, coil.decay) == tuple(Span.exactly(time) for time in (5_000, 2_000, 1_000))
    assert found.sheets == ("own.yaml", "own2.yaml", *sheets)


def test_a_sheet_of_standard_input_lies_in_the_current_folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    (tmp_path / "own.yaml").write_text("valves: {V: {on: 2 ms, off: 2 ms}}")
    text = 'timing "own.yaml" valve V 5/2 spring { coil Y } sequence m { step x { on Y dwell 1 s } }'
    assert machine(text, name="-").coils["Y"].on == Span.exactly(2_000)


@pytest.mark.parametrize("written", ["-", "./-"])
def test_a_sheet_is_not_read_from_standard_input(written: str, monkeypatch: pytest.MonkeyPatch) -> None:
    """Standard input may hold the text itself, or nothing at all: reading it would wait for ever."""
    monkeypatch.setattr("sys.stdin", None)
    text = f'machine "x"\n  timing "{written}" valve V 5/2 spring {{ coil Y }} sequence m {{ step x {{ }} }}'
    advice = "a timing sheet is not read from standard input | give it a file of its own"
    assert told(problems(text)) == [f"2:10 {advice}"]
    (problem,) = problems(text.replace(f'timing "{written}"', ""), "-")
    assert (problem.place.file, *told([problem])) == ("-", f"1:1 {advice}")


def test_a_sheet_may_be_called_as_standard_input_is(tmp_path: Path) -> None:
    (tmp_path / "-").write_text("valves:\n  V: {on: 1 ms, off: 1 ms}\n", encoding="utf-8")
    text = 'timing "-" valve V 5/2 spring { coil Y } sequence m { step x { on Y dwell 1 s } }'
    assert machine(text, name=str(tmp_path / "a.steps")).coils["Y"].on.least == 1_000


def test_a_missing_sheet_is_told_where_it_is_named(tmp_path: Path) -> None:
    name = str(tmp_path / "x.steps")
    found = problems(
        'machine "x"\n  timing "none.yaml" valve V 5/2 spring { coil Y } sequence m { step x { } }', name=name
    )
    assert len(found) == 1, told(found)
    assert (found[0].place.file, found[0].place.line, found[0].place.column) == (name, 2, 10)
    assert "there is no such file" in found[0].message


def test_a_missing_sheet_of_the_command_line() -> None:
    found = read("sequence m { step x { dwell 1 s } }", "none.yaml")
    assert isinstance(found, tuple)
    assert [(problem.place.file, problem.message) for problem in found] == [("none.yaml", "there is no such file")]


def test_problems_come_by_file_in_the_order_of_reading(tmp_path: Path) -> None:
    (tmp_path / "z.yaml").write_text("valvs: {}\n")
    (tmp_path / "a.yaml").write_text("cols: {}\n")
    found = read("sequence m { step x { on Y } }\nflag 5", str(tmp_path / "z.yaml"), str(tmp_path / "a.yaml"))
    assert isinstance(found, tuple)
    assert [(Path(problem.place.file).name, problem.place.line) for problem in found] == [
        ("press.steps", 1),
        ("press.steps", 2),
        ("z.yaml", 1),
        ("a.yaml", 1),
    ]
    assert [problem.source for problem in found[2:]] == ["valvs: {}", "cols: {}"]


#: Message, advice (a part of it), sheet, line, column.
REFUSALS = [
    ("there is no section valvs", "did you mean valves?", "valvs: {V1: {on: 5 ms}}", 1, 1),
    ("there is no valve V9", "declare it", "valves:\n  V9: {on: 5 ms}", 2, 3),
    ("Y1 is a coil", "a valve stands here", "valves:\n  Y1: {on: 5 ms}", 2, 3),
    ("valves have no time onn", "did you mean on?", "valves: {V1: {onn: 5 ms}}", 1, 15),
    ("cylinders have no time starts", "here may stand: extend", "cylinders: {A: {starts: extended}}", 1, 17),
    ("the unit is left out", "write 5 ms", "valves: {V1: {on: 5}}", 1, 19),
    ("the unit is left out", "write 5.5 ms", "valves: {V1: {on: 5.5}}", 1, 19),
    ("the unit is left out", "write 18..28 ms", "valves: {V1: {on: 18..28}}", 1, 19),
    ("the unit is left out", "write 10 %", "cylinders: {A: {uneven: 10}}", 1, 25),
    ("a span is not written with `-`", "write 18..28 ms", "valves: {V1: {on: 18-28 ms}}", 1, 21),
    ("a span is not written with `to`", "write 18..28 ms", "valves: {V1: {on: 18 to 28 ms}}", 1, 22),
    ("a tolerance is not written with `+/-`", "±", "valves: {V1: {on: 20 ms +/- 2 ms}}", 1, 25),
    ("a tolerance of a time is a time", "± 5 ms", "valves: {V1: {on: 20 ms ± 10 %}}", 1, 30),
    ("the typical time stands in the middle of a span", "18..22..28", "valves: {V1: {on: 18..28 ms typ 22}}", 1, 29),
    ("`<` cannot stand before a number", "the time alone", "valves: {V1: {on: <20 ms}}", 1, 19),
    ("a comma in a number", "a decimal point", "valves: {V1: {on: 18 ms, 5 ms}}", 1, 26),
    ("`sec` is no unit", "write s", 'valves: {V1: {on: "5 sec"}}', 1, 22),
    ("this span runs backwards", None, "valves:\n  V1:\n    on: 28..18 ms # oops", 3, 9),
    ("gap is one duration", "write 20 ms", "valves: {V2: {gap: 1..2 ms}}", 1, 20),
    ("lag is a span", "write 18..28 ms", "cylinders: {A: {lag: 5 %}}", 1, 22),
    ("uneven is a share", "write 10 %", "cylinders: {A: {uneven: 5 ms}}", 1, 25),
    ("this is over 100 %", None, "cylinders: {A: {uneven: 101 %}}", 1, 25),
    ("on is a span", "write 18..28 ms", "valves: {V1: {on: 5 ms from coil}}", 1, 19),
    ("scan is a span", "write 18..28 ms", "controller: {scan: on 5 ms}", 1, 20),
    ("on has no value", "write 18..28 ms", "valves: {V1: {on: }}", 1, 18),
    ("on has no value", "write 18..28 ms", "valves:\n  V1:\n    on:\n", 3, 8),
    ("on is a span", "write 18..28 ms", "valves: {V1: {on: [5 ms, 6 ms]}}", 1, 19),
    ("times are a mapping", "indent", "valves: {V1: 5 ms}", 1, 14),
    ("the names of valves are a mapping", "indent", "valves: [V1]", 1, 9),
    ("the sections of a sheet are a mapping", "indent", "- valves", 1, 1),
    ("V1 stands here twice", "leave one", "valves:\n  V1: {on: 5 ms}\n  V1: {on: 6 ms}", 3, 3),
    ("on stands here twice", "leave one", "valves: {V1: {on: 5 ms, on: 6 ms}}", 1, 25),
    ("valves stands here twice", "leave one", "valves: {}\nvalves: {}", 2, 1),
    ("an anchor cannot stand in a sheet", "leave it out", "valves: {V1: &v {on: 5 ms}}", 1, 14),
    ("an alias cannot stand in a sheet", "write the value", "valves: {V1: *v}", 1, 14),
    ("a tag cannot stand in a sheet", "leave it out", "valves: {V1: {on: !!str 5 ms}}", 1, 19),
    ("a tag cannot stand in a sheet", "leave it out", "!!python/object:os.system {valves: {}}", 1, 1),
    ("valves have no time <<", "here may stand", "valves: {V1: {<<: {on: 5 ms}}}", 1, 15),
    ("a key is a plain word", None, "valves: {[V1]: {on: 5 ms}}", 1, 10),
    ("a second document in one sheet", "leave the line", "valves: {}\n---\nvalves: {}", 2, 1),
    ("the character U+0007 cannot stand in YAML", "take it out", "valves: {} # \x07", 1, 14),
    ("nested over 50 deep", "sections, names and times", "valves: {V1: {onn: " + "[" * 60, 1, 70),
    ("V2: a bistable valve has no time off", "it has on", "valves: {V2: {off: 5 ms}}", 1, 15),
    ("V1: a spring valve has no time travel", "it has on", "valves: {V1: {travel: 5 ms}}", 1, 15),
    ("start: a signal from outside has no time on", "leave it out", "signals: {start: {on: 5 ms}}", 1, 19),
    ("full: a signal that follows a condition has no time after", "leave", "signals: {full: {after: 5 ms}}", 1, 18),
    ("the longest run of the task is over its shortest interval", None, "controller: {run: 11 ms}", 1, 14),
]
COMPLETE = BARE.replace("on 5 ms", "on 5 ms off 6 ms").replace("A on V1 {", "A on V1 { extend 1 s retract 1 s")


@pytest.mark.parametrize(("message", "advice", "sheet", "line", "column"), REFUSALS)
def test_refusal(message: str, advice: str | None, sheet: str, line: int, column: int, tmp_path: Path) -> None:
    text = COMPLETE.replace("io bus { input 3 ms }", "")
    found = with_sheet(tmp_path, text, sheet)
    assert isinstance(found, tuple)
    told_here = [problem for problem in found if problem.message == message]
    assert len(told_here) == 1, told(found)
    problem = told_here[0]
    assert (problem.place.line, problem.place.column) == (line, column)
    assert Path(problem.place.file).name == "measured.yaml"
    assert problem.source == sheet.split("\n")[line - 1]
    if advice is not None:
        assert advice in (problem.advice or "")
    assert len(found) == (2 if message == "nested over 50 deep" else 1), told(found)


def test_what_is_no_yaml(tmp_path: Path) -> None:
    found = with_sheet(tmp_path, COMPLETE, "valves: {V1: [}")
    assert isinstance(found, tuple)
    assert [problem.place.line for problem in found if problem.message.startswith("this is no YAML")] == [1]


@pytest.mark.parametrize(
    "sheet", ["", "# nothing yet\n", "valves:\n", "valves:\n  V1:\n", "---\nvalves: {}\n", "\ufeffvalves: {}\n"]
)
def test_sheets_that_say_nothing(sheet: str, tmp_path: Path) -> None:
    text = COMPLETE.replace("io bus { input 3 ms }", "")
    assert with_sheet(tmp_path, text, sheet) == read(text, str(tmp_path / "measured.yaml"))
    assert isinstance(with_sheet(tmp_path, text, sheet), Machine)


def test_every_time_that_nobody_gives_is_told_with_its_device() -> None:
    found = problems(BARE)
    assert [(problem.message, problem.place.line) for problem in found] == [
        ("nobody gives the time update of bus", 3),
        ("nobody gives the time off of the valve V1", 4),
        ("nobody gives the time extend of the cylinder A", 6),
        ("nobody gives the time retract of the cylinder A", 6),
    ]


def test_a_broken_sheet_forgives_missing_times(tmp_path: Path) -> None:
    found = with_sheet(tmp_path, BARE, "valves: {V1: {of: 5 ms}}")
    assert isinstance(found, tuple)
    assert [problem.message for problem in found] == ["valves have no time of"]


@pytest.mark.parametrize(
    "sheet", ["[" * 100_000, "{" * 100_000, "a: " * 50_000, "? " * 50_000, "- " * 50_000, "&a " * 50_000]
)
def test_hostile_sheets_end_soon(sheet: str, tmp_path: Path) -> None:
    found = with_sheet(tmp_path, COMPLETE, sheet)
    assert isinstance(found, tuple)
    assert all(isinstance(problem, Problem) for problem in found)


def test_many_faults_of_a_sheet_are_cut(tmp_path: Path) -> None:
    found = with_sheet(tmp_path, COMPLETE, "".join(f"x{number}: 1\n" for number in range(5_000)))
    assert isinstance(found, tuple)
    assert len(found) <= 21


def test_a_large_sheet_is_refused(tmp_path: Path) -> None:
    found = with_sheet(tmp_path, COMPLETE, "#" * 600_000)
    assert isinstance(found, tuple)
    assert "the sheet is over 512 KB" in [problem.message for problem in found]
