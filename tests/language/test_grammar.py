"""The grammar: free of conflicts, whole keywords, keywords that are names elsewhere."""

from __future__ import annotations

import re

import pytest
from lark import Lark

from seqcheck.language.grammar import grammar_text
from tests.language.reading import DEVICES, WORK, machine, problems

KEYWORDS = sorted(
    set(re.findall(r"^[A-Z]+\.2: /([a-z]+)\(\?!\\w\)/", grammar_text(), re.MULTILINE)) - {"and", "or", "not"}
)
BEGIN_ITEMS = {"step", "together", "choose", "repeat", "jump", "every"}
GO_ON = {"dwell", "within", "else"}


def test_grammar_is_free_of_conflicts() -> None:
    """lark's strict mode refuses shift/reduce conflicts and terminals that overlap."""
    Lark(grammar_text(), parser="lalr", lexer="contextual", start=["text", "sheet_value"], strict=True)


def test_keywords_are_found() -> None:
    assert len(KEYWORDS) > 60
    assert {"valve", "until", "extended", "a", "b"} <= set(KEYWORDS)


@pytest.mark.parametrize("word", KEYWORDS)
def test_keywords_are_names_where_a_name_is_expected(word: str) -> None:
    text = f"""
        valve {word}v 5/2 spring {{ coil {word} on 18..28 ms off 25..40 ms }}
        signal {word}s from outside
        sequence {word} {{
            step {word} {{ on {word} until {word}s }}
            step other {{ until {word}s and {word} and not {word}.{word} within 1 s else {word} }}
        }}
        never {word} and {word}.{word} for 5 ms
        limit from {word} to {word}s 2 s
        limit cycle {word} 9 s
    """
    steps = machine(text).sequences[0].items
    assert [getattr(step, "name", None) for step in steps] == [f"{word}.{word}", f"{word}.other"]


@pytest.mark.parametrize("word", sorted(set(KEYWORDS) - BEGIN_ITEMS - GO_ON))
def test_keywords_are_names_of_cylinders_that_move(word: str) -> None:
    text = f"""
        valve V1 5/2 spring {{ coil Y1 on 18..28 ms off 25..40 ms }}
        cylinder {word} on V1 {{ extend 1 s retract 1 s }}
        sequence main {{
            every step within 5 s {word}+ dwell 2 s within 3 s {word}- within 2 s else {word}+ dwell 2 s
            repeat 2 {{ choose {{ when K {{ {word}+ dwell 1 s }} }} }}
            {word}- dwell 1 s
        }}
        output K
    """
    steps = machine(text).sequences[0].items
    assert [getattr(step, "name", None) for step in steps] == [f"main.{word}{end}" for end in ("+", "-")] + [
        None,
        f"main.{word}-2",
    ]


@pytest.mark.parametrize("word", sorted(BEGIN_ITEMS))
def test_a_word_that_begins_a_step_moves_no_cylinder(word: str) -> None:
    assert problems(f"sequence main {{ {word}+ }}")[0].place.column == 17 + len(word)


@pytest.mark.parametrize("word", ["and", "or", "not"])
def test_and_or_not_are_never_names(word: str) -> None:
    assert problems(f"flag {word}\n" + WORK + DEVICES)[0].message == f"`{word}` cannot be a name"


@pytest.mark.parametrize(
    ("snippet", "column"),
    [
        ("never A.moving for200 ms", 16),
        ("sequence n { step x { untill a1 } }", 23),
        ("sequence n { step x { until a1 steady200 ms } }", 32),
        ("sequence n { step x { dwell 5 msx } }", 31),
        ("limit cyclemain 5 s", 7),
        ("valve V9 5/2 springy { coil Y9 }", 14),
        ("sequence n { A+ within1 s }", 17),
        ("signal s from outsideafter 5 s", 15),
    ],
)
def test_a_keyword_and_a_rest_is_a_slip_at_its_own_place(snippet: str, column: int) -> None:
    found = problems(snippet + "\n" + WORK + DEVICES)
    assert [(problem.place.line, problem.place.column) for problem in found] == [(1, column)]


@pytest.mark.parametrize(
    "name", ["straße", "клапан", "ventil_2", "_x", "シリンダ", "ज़्यादा", "ไทยเดี๋ยว", "Ünï", "K\u0308"]
)
def test_names_are_letters_of_any_script(name: str) -> None:
    assert len(machine(f"flag {name}\n" + WORK + DEVICES).flags) == 2


def test_one_name_in_two_encodings_is_one_name() -> None:
    text = "output K\u00fc sequence m { step a { on Ku\u0308 dwell 1 s } }"
    assert list(machine(text).outputs) == ["K\u00fc"]


@pytest.mark.parametrize("text", ["A+B+A-B-", "A+ B+ A- B-", "A +\tB\r\n+ # up\n A - B -"])
def test_spaces_only_separate(text: str) -> None:
    steps = machine("sequence main {" + text + "}" + DEVICES).sequences[0].items
    assert [getattr(step, "name", None) for step in steps] == ["main.A+", "main.B+", "main.A-", "main.B-"]


def test_byte_order_mark_and_crlf_are_fine() -> None:
    found = problems(
        "\ufeff" + (DEVICES + "sequence main {\r\n\tA+ A-\r\n\tX+ }").replace("\n", "\r\n").replace("\r\r", "\r")
    )
    assert found[0].source == "\tX+ }"
    assert (found[0].place.line, found[0].place.column) == (DEVICES.count("\n") + 3, 2)
