"""The parser of the grammar file, compiled once and kept for the next process.

Gives lark's LALR parser with a contextual lexer, for a whole text or for one value of a timing sheet. Refuses
braces and parentheses nested over 50 deep while it reads.
"""

from __future__ import annotations

import gc
from collections.abc import Iterator
from contextlib import contextmanager
from functools import cache
from pathlib import Path
from typing import Any

import lark.lexer
from lark import Lark, Token, UnexpectedInput

from seqcheck.language.grammar_cache import keep_parser, kept_parser
from seqcheck.language.words import LexerOfWords

MOST_NESTED = 50

_OPTIONS: dict[str, Any] = {
    "parser": "lalr",
    "lexer": "contextual",
    "start": ["text", "sheet_value"],
    # Where a tree begins and ends its tokens say (`harvest.start_of`): lark would work it out for every rule.
    "keep_all_tokens": True,
    "maybe_placeholders": False,
}
_PACKAGE = Path(__file__).resolve().parent.parent


class TooDeep(UnexpectedInput):
    """Nested deeper than anybody can read; ``offset`` tells where."""

    def __init__(self, offset: int) -> None:
        super().__init__(f"nested over {MOST_NESTED} deep")
        self.offset = offset


@contextmanager
def no_collecting() -> Iterator[None]:
    """A tree grows by thousands of parts of which none is garbage: looking for it each time takes more and more of the
    time, the longer the text is."""
    before = gc.isenabled()
    gc.disable()
    try:
        yield
    finally:
        if before:
            gc.enable()


@contextmanager
def _terminals_taken_as_they_are() -> Iterator[None]:
    """lark compares all terminals with one another where a package for that is installed, those of its own grammar
    too: it takes long, never changes, and is done once by the test of the grammar."""
    installed = lark.lexer.has_interegular
    lark.lexer.has_interegular = False
    try:
        yield
    finally:
        lark.lexer.has_interegular = installed


_OPENING = {"LBRACE", "LPAR"}
_CLOSING = {"RBRACE", "RPAR", "RPAR_NTH"}


class _DepthGuard:
    """Counts what is open while the tokens pass. ``not`` nests like a parenthesis until its operand comes."""

    always_accept: tuple[str, ...] = ()

    def process(self, stream: Iterator[Token]) -> Iterator[Token]:
        depth = 0
        negations = 0
        outside: list[int] = []
        for token in stream:
            kind = token.type
            if kind in _OPENING:
                outside.append(negations)
                negations = 0
                depth += 1
            elif kind in _CLOSING and outside:
                depth -= 1 + negations + outside.pop()
                negations = 0
            elif kind == "NOT":
                negations += 1
                depth += 1
            elif negations and kind == "NAME":
                depth -= negations
                negations = 0
            if depth > MOST_NESTED:
                raise TooDeep(token.start_pos or 0)
            yield token


def grammar_text() -> str:
    """The grammar, from the installed package or else from the checkout."""
    for folder in (_PACKAGE / "grammar", _PACKAGE.parent / "grammar"):
        file = folder / "steps.lark"
        if file.is_file():
            return file.read_text(encoding="utf-8")
    raise FileNotFoundError(f"steps.lark is missing from the installation in {_PACKAGE}")


@cache
def parser() -> Lark:
    """The parser; its starts are ``text`` and ``sheet_value``."""
    text = grammar_text()
    not_kept = {"postlex": _DepthGuard(), "_plugins": {"ContextualLexer": LexerOfWords}}
    with _terminals_taken_as_they_are():
        kept = kept_parser(text, not_kept)
        if kept is not None:
            return kept
        made = Lark(text, **_OPTIONS, **not_kept)
    keep_parser(text, made)
    return made
