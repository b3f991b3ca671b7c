"""The lexer that looks keywords up gives what lark's own contextual lexer gives."""

from __future__ import annotations

import re
from functools import cache
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st
from lark import Lark, Token, UnexpectedCharacters, UnexpectedInput, UnexpectedToken
from lark.lexer import PatternStr

from seqcheck.language import grammar
from seqcheck.language.grammar import grammar_text, parser
from seqcheck.language.words import LexerOfWords
from tests.language.test_newcomers import MARK, NEWCOMERS

ROOT = Path(__file__).resolve().parents[2]
FILES = sorted([*ROOT.glob("examples/**/*.steps"), *ROOT.glob("tests/**/*.steps")])
SLIPS = [text.replace(MARK, "") for advice in NEWCOMERS.values() for texts in advice.values() for text in texts]
VALUES = ["12 ms", "12..14ms", "on 1 ms off 2 ms", "3 s ± 5 ms", "5%", "1 s from coil", "5 msx", "on1 ms", "5 ms # x"]


@cache
def without_table() -> Lark:
    options = {name: value for name, value in grammar._OPTIONS.items() if name != "_plugins"}
    return Lark(grammar_text(), postlex=grammar._DepthGuard(), **options)


def tokens(parser: Lark, text: str, start: str) -> list[object]:
    """Each token with its kind and its place; at the end, where it stops and what it would have taken."""
    found: list[object] = []
    interactive = parser.parse_interactive(text, start=start)
    try:
        for token in interactive.iter_parse():
            found.append((token.type, str(token), token.start_pos, token.end_pos, token.line, token.end_column))
    except UnexpectedInput as error:
        found.append((type(error).__name__, error.pos_in_stream, interactive.accepts()))
        if isinstance(error, UnexpectedCharacters):
            found.append(error.allowed)
        if isinstance(error, UnexpectedToken):
            assert isinstance(error.token, Token)
            found.append((error.token.type, error.expected))
    return found


def both(text: str, start: str = "text") -> tuple[list[object], list[object]]:
    return tokens(parser(), text, start), tokens(without_table(), text, start)


def test_the_lexer_in_use_is_this_one() -> None:
    assert isinstance(parser().parser.lexer.lexer, LexerOfWords)
    assert not isinstance(without_table().parser.lexer.lexer, LexerOfWords)


def test_no_sign_is_taken_by_an_expression_as_well() -> None:
    """lark tells such signs apart by themselves; as there are none, the table need not."""
    terminals = parser().terminals
    signs = [one for one in terminals if isinstance(one.pattern, PatternStr)]
    assert signs
    for sign in signs:
        like = [one for one in terminals if one.priority == sign.priority and one not in signs]
        assert not [one.name for one in like if re.fullmatch(one.pattern.to_regexp(), sign.pattern.value)]


@pytest.mark.parametrize("file", FILES, ids=lambda file: str(file.relative_to(ROOT)))
def test_files_have_the_same_tokens(file: Path) -> None:
    ours, larks = both(file.read_text(encoding="utf-8"))
    assert ours == larks


@pytest.mark.parametrize("text", SLIPS)
def test_slips_stop_at_the_same_place(text: str) -> None:
    ours, larks = both(text)
    assert ours == larks


@pytest.mark.parametrize("text", VALUES)
def test_values_of_sheets_have_the_same_tokens(text: str) -> None:
    ours, larks = both(text, "sheet_value")
    assert ours == larks


WORDS = ["valve", "V1", "5/2", "spring", "on", "off", "1", "0.5", "ms", "s", "sequence", "step", "until", "not", "and"]
SIGNS = ["{", "}", "..", "±", "+", "-", "#", '"', "(", ")", " ", "\n", "\u0301", "\ufeff", "é", "_", "%IX0.1"]


@given(st.lists(st.sampled_from(WORDS + SIGNS), max_size=30), st.sampled_from(FILES), st.data())
def test_texts_put_together_at_random_have_the_same_tokens(pieces: list[str], file: Path, data: st.DataObject) -> None:
    whole = file.read_text(encoding="utf-8")
    cut = data.draw(st.integers(0, len(whole)))
    ours, larks = both(whole[:cut] + "".join(pieces) + whole[cut : cut + 200])
    assert ours == larks
