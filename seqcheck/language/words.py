"""lark's contextual lexer, which looks a keyword up where lark's own tries all that may stand at a place.

A whole word is one of the keywords of its place or none of them, so that a table answers; what is no keyword has an
expression that all places share. lark's own would compile one of all that may stand there for each place, which costs
more than reading a small text. The tokens are the same.
"""

from __future__ import annotations

import re
from collections.abc import Iterable
from typing import Any

from lark.common import LexerConf
from lark.lexer import BasicLexer, ContextualLexer, TerminalDef
from lark.utils import TextSlice

#: How the grammar writes that a keyword is a whole word.
_KEYWORD = re.compile(r"(\w+)\(\?!\\w\)")
_WORD = re.compile(r"\w+")


class _Place:
    """What may stand at one place of the grammar; stands for lark's ``Scanner``."""

    def __init__(self, terminals: Iterable[TerminalDef], flags: int) -> None:
        self.allowed_types = {terminal.name for terminal in terminals}
        self._keywords: dict[str, str] = {}
        self._others = []
        for terminal in terminals:
            keyword = _KEYWORD.fullmatch(terminal.pattern.value)
            if keyword is None:
                # The same expression is compiled only once: `re` keeps it.
                self._others.append((re.compile(terminal.pattern.to_regexp(), flags).match, terminal.name))
            else:
                self._keywords[keyword[1]] = terminal.name

    def match(self, text: TextSlice[Any], position: int) -> tuple[str, str] | None:
        """What stands there, and of which kind it is. Keywords come first, as the grammar has it."""
        whole, end = text.text, text.end
        if self._keywords:
            word = _WORD.match(whole, position, end)
            if word is not None and word[0] in self._keywords:
                return word[0], self._keywords[word[0]]
        for match, kind in self._others:
            found = match(whole, position, end)
            if found is not None:
                return found[0], kind
        return None


class _LexerOfPlace(BasicLexer):
    """Made ready when the first token is asked for: a text comes to few of the places. The test of the grammar has
    lark look whether its expressions are sound."""

    def __init__(self, conf: LexerConf, comparator: object = None) -> None:
        self._conf = conf
        self._conf.skip_validation = True
        self._scanner = None

    def _build_scanner(self) -> Any:
        super().__init__(self._conf)
        self.callback = {}
        return _Place(self.terminals, self.g_regex_flags)


class LexerOfWords(ContextualLexer):
    BasicLexer = _LexerOfPlace
