"""How words stand beside each other in one line: with a blank between them, or none.

Takes tokens, or the text of one statement; gives the text in its canonical spelling.
"""

from __future__ import annotations

import re

from lark import Token

from seqcheck.language.grammar import parser

_CLOSE_BEFORE = frozenset(("PLUS", "MINUS", "NTH", "RPAR", "RPAR_NTH", "DOT", "__ANON_0"))
_CLOSE_AFTER = frozenset(("LPAR", "DOT", "__ANON_0"))


def spelling_of(token: Token) -> str:
    """A token as it is written; ``5 / 2`` is the only one with blanks in it."""
    return re.sub(r"\s", "", token) if token.type == "PORTS" else str(token)


def blank_between(before: Token, token: Token) -> str:
    return "" if token.type in _CLOSE_BEFORE or before.type in _CLOSE_AFTER else " "


def spelled(statement: str) -> str:
    """One statement that can be parsed, in one line and without its comments."""
    written = ""
    before: Token | None = None
    for token in parser().parse_interactive(statement, start="text").iter_parse():
        written += (blank_between(before, token) if before is not None else "") + spelling_of(token)
        before = token
    return written
