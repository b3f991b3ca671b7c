"""Comments that accept a finding: which ones are read, for which line, and how a slip in one is told."""

from __future__ import annotations

import pytest

from seqcheck.language.accepts import MOST_SLIPS
from seqcheck.language.read import read_machine
from seqcheck.language.source import Source, decode
from seqcheck.machine.accepts import Accept
from seqcheck.machine.findings import Problem
from seqcheck.machine.model import Machine
from seqcheck.machine.places import Place
from tests.language.reading import DEVICES, WORK

KINDS = ("short-pulse", "stale-signal", "overshoot")


def read(lines: str) -> Machine | tuple[Problem, ...]:
    """The lines stand first in their text, so that they begin with line 1."""
    return read_machine(Source("press.steps", f"{lines}\n{DEVICES}\n{WORK}"), (), KINDS)


def accepts(lines: str) -> list[tuple[str, str, int]]:
    machine = read(lines)
    assert isinstance(machine, Machine), machine
    return [(one.kind, one.reason, one.line) for one in machine.accepts]


def slips(lines: str) -> list[tuple[int, int, int, str, str | None]]:
    problems = read(lines)
    assert isinstance(problems, tuple)
    return [(one.place.line, one.place.column, one.place.end_column, one.message, one.advice) for one in problems]


def test_the_whole_record() -> None:
    machine = read("flag ready   # accept short-pulse: fast spools, all measured  ")
    assert isinstance(machine, Machine)
    place = Place("press.steps", 1, 14, 1, 61)
    assert machine.accepts == (Accept("short-pulse", "fast spools, all measured", 1, place),)


@pytest.mark.parametrize(
    ("lines", "line"),
    [
        ("flag x # accept overshoot: why", 1),
        ("# accept overshoot: why\nflag x", 2),
        ("\t #accept overshoot:why\nflag x", 2),
        ("# accept overshoot: why\n# what follows is a flag\n  # and that\nflag x", 4),
        ("# accept overshoot: why\n\nflag x", 2),
        ("flag x\n# accept overshoot: why\nflag y", 3),
        ("flag x # accept overshoot: why\n# another\nflag y", 1),
        ("# accept overshoot: why\r\nflag x\r", 2),
    ],
)
def test_the_line_that_a_comment_speaks_of(lines: str, line: int) -> None:
    assert accepts(lines) == [("overshoot", "why", line)]


def test_several_comments_above_one_line_speak_of_it_all() -> None:
    lines = "# accept overshoot: one\n# accept stale-signal: two\nflag x # accept short-pulse: three"
    assert accepts(lines) == [("overshoot", "one", 3), ("stale-signal", "two", 3), ("short-pulse", "three", 3)]


def test_a_comment_in_the_last_line_speaks_of_the_line_behind_it() -> None:
    machine = read_machine(Source("a.steps", f"{DEVICES}\n{WORK}\n# accept overshoot: why"), (), KINDS)
    assert isinstance(machine, Machine)
    assert [one.line - one.place.line for one in machine.accepts] == [1]


def test_a_byte_order_mark_is_no_statement() -> None:
    text = "\ufeff# accept overshoot: why\nflag x\n" + DEVICES + WORK
    source = decode("a.steps", text.encode())
    assert isinstance(source, Source)
    for read_as in (source, Source("a.steps", text)):
        machine = read_machine(read_as, (), KINDS)
        assert isinstance(machine, Machine)
        assert [one.line for one in machine.accepts] == [2]


@pytest.mark.parametrize(
    "lines",
    [
        'flag x "# accept overshoot: why"',
        'machine "the # accept nonsense: x" # the rest',
        "# accept the part: only then go on",
        "# accept parts from the infeed",
        "# accepted: overshoot",
        "# to accept overshoot: write a comment",
        "# acceptance: see the drawing",
        "# accept/reject lamp: green and red",
    ],
)
def test_other_comments_and_texts_in_quotes_are_left_alone(lines: str) -> None:
    assert accepts(lines) == []


FORM = "write `# accept KIND: why it does no harm here`"
SLIPS: tuple[tuple[str, int, int, str, str | None], ...] = (
    ("# accept", 1, 9, "this comment does not say which kind of finding it accepts", FORM),
    ("flag x # accept: reason", 8, 24, "this comment does not say which kind of finding it accepts", FORM),
    ("# accept overshot: why", 10, 18, "no kind of finding `overshot` can be accepted", "did you mean overshoot?"),
    (
        "# accept short_pulse: why",
        10,
        21,
        "no kind of finding `short_pulse` can be accepted",
        "did you mean short-pulse?",
    ),
    ("# accept Overshoot: why", 10, 19, "no kind of finding `Overshoot` can be accepted", "did you mean overshoot?"),
    (
        "# accept part: why",
        10,
        14,
        "no kind of finding `part` can be accepted",
        "the report names the kind of every finding",
    ),
    ("# accept overshoot:", 10, 19, "accepting overshoot needs a reason", FORM),
    ("# accept overshoot: ...", 10, 19, "accepting overshoot needs a reason", FORM),
    ("# accept overshoot", 10, 19, "accepting overshoot needs a colon and a reason", FORM),
    ("# accept overshoot, short-pulse: why", 10, 19, "accepting overshoot needs a colon and a reason", FORM),
    (
        "# accept short pulse: why",
        10,
        15,
        "a kind of finding is written as the report names it: short-pulse",
        FORM,
    ),
    (
        "# accept overshoot: why # accept short-pulse: why",
        10,
        19,
        "a comment accepts one kind only",
        "write a comment for each, one a line",
    ),
)


@pytest.mark.parametrize(("line", "column", "end", "message", "advice"), SLIPS, ids=[slip[0] for slip in SLIPS])
def test_every_slip_at_its_place(line: str, column: int, end: int, message: str, advice: str | None) -> None:
    assert slips(line) == [(1, column, end, message, advice)]


def test_the_same_kind_twice_for_one_line() -> None:
    lines = "# accept overshoot: one\nflag x # accept overshoot: two"
    told = "overshoot is accepted twice for line 2, first in line 1"
    assert slips(lines) == [(2, 17, 26, told, "leave one out")]


def test_slips_of_comments_and_of_statements_come_in_one_go() -> None:
    told = [(line, message) for line, _, _, message, _ in slips("# accept overshot: why\nflga x")]
    assert [line for line, _ in told] == [1, 2]


def test_quotes_that_are_not_closed_end_with_their_line() -> None:
    told = slips('flag x "# accept nonsense: why\n# accept overshot: why')
    assert [(line, "overshot" in message) for line, _, _, message, _ in told] == [(1, False), (2, True)]


def test_many_slips_are_cut_short() -> None:
    assert len(slips("# accept\n" * (3 * MOST_SLIPS))) == MOST_SLIPS


def test_without_a_list_of_kinds_any_may_stand_there() -> None:
    machine = read_machine(Source("a.steps", f"# accept what-ever: why\n{DEVICES}\n{WORK}"))
    assert isinstance(machine, Machine)
    assert [one.kind for one in machine.accepts] == ["what-ever"]
