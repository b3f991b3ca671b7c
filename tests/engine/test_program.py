"""Where a thread may come to from a step, and how many rounds of a repeat are left after a jump."""

from __future__ import annotations

import pytest

from seqcheck.engine.program import Program, Select, compile_sequence
from seqcheck.language.read import read_machine
from seqcheck.language.source import Source
from seqcheck.machine.model import Machine

TEXT = """controller { scan 8..12 ms }
signal s from outside
sequence main once {
    step a { dwell 1 ms }
    repeat 2 {
        step b { dwell 1 ms }
        repeat 3 { step c { dwell 1 ms } }
        repeat 5 { step d { dwell 1 ms } }
    }
    choose {
        when s { step e { dwell 1 ms } jump h }
        when not s { step f { dwell 1 ms } }
    } within 1 s else i
    together { step g1 { dwell 1 ms } } and { step g2 { dwell 1 ms } }
    repeat 4 { step h { until s within 1 s else b } }
    choose {
        when s { step j { dwell 1 ms } }
        when not s { step k { dwell 1 ms } }
    }
    step i { dwell 1 ms }
}
"""


@pytest.fixture
def program() -> Program:
    machine = read_machine(Source("a.steps", TEXT))
    assert isinstance(machine, Machine), machine
    return compile_sequence(machine.sequences[0])


@pytest.mark.parametrize(
    ("step", "known", "behind"),
    [
        ("i", "", "i"),
        ("j", "", "j i"),
        # its watchdog leads to b, and from there everything but a comes
        ("h", "", "b c d e f g1 g2 h i j k"),
        # no further than what is known, itself included in what comes
        ("h", "b", "h b j k i"),
        ("e", "h", "e h"),
        ("f", "j k", "b c d e f g1 g2 h i j k"),
        # back to the beginning of both loops, and on behind them; the watchdog of the choice leads to i
        ("d", "e f", "b c d e f i"),
        ("a", "a", "a"),
    ],
)
def test_what_may_come_behind_a_step(program: Program, step: str, known: str, behind: str) -> None:
    found = program.steps_behind(f"main.{step}", {f"main.{name}" for name in known.split()})
    assert found == {f"main.{name}" for name in behind.split()}


def test_a_sequence_goes_round_unless_it_is_for_once() -> None:
    machine = read_machine(Source("a.steps", "sequence main { step a { dwell 1 s } step b { dwell 1 s } }"))
    assert isinstance(machine, Machine)
    assert compile_sequence(machine.sequences[0]).steps_behind("main.b", ()) == {"main.a", "main.b"}


@pytest.mark.parametrize(
    ("from_step", "counts", "to_step", "left"),
    [
        ("c", (1, 2), "c", (1, 2)),
        ("c", (1, 2), "b", (1,)),
        ("c", (1, 2), "a", ()),
        ("c", (1, 2), "i", ()),
        # out of one inner loop into the other, which begins its first round
        ("c", (1, 2), "d", (1, 5)),
        ("d", (1, 4), "c", (1, 3)),
        ("b", (1,), "c", (1, 3)),
        ("a", (), "c", (2, 3)),
        ("c", (1, 2), "h", (4,)),
        ("h", (3,), "c", (2, 3)),
        ("h", (3,), "h", (3,)),
    ],
)
def test_rounds_left_after_a_jump(
    program: Program, from_step: str, counts: tuple[int, ...], to_step: str, left: tuple[int, ...]
) -> None:
    at, to = program.steps[f"main.{from_step}"], program.steps[f"main.{to_step}"]
    assert program.counts_after_jump(at, counts, to) == left


def test_only_a_choice_without_an_otherwise_may_have_to_wait() -> None:
    text = """signal s from outside
    sequence main {
        choose { when s { step a { dwell 1 s } } when not s { step b { dwell 1 s } } }
        choose { when s { step c { dwell 1 s } } otherwise { step d { dwell 1 s } } }
    }"""
    machine = read_machine(Source("a.steps", text))
    assert isinstance(machine, Machine), machine
    first, second = (one for one in compile_sequence(machine.sequences[0]).code if isinstance(one, Select))
    assert first.waited == first.conditions and len(first.waited) == 2
    assert second.waited == () and len(second.conditions) == 2
