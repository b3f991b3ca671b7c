"""Values, names and conditions of a parse tree as records.

Takes lark's trees; gives syntax records; reports times, shares and names that cannot be.
"""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Iterator, Sequence

from lark import Token, Tree

from seqcheck.language.durations import time_from, whole_times
from seqcheck.language.problems import Problems, Ruler, short
from seqcheck.language.syntax import (
    AllText,
    AnyText,
    ConditionText,
    Edges,
    Marks,
    NotText,
    Setting,
    SettingValue,
    TermText,
    Word,
)
from seqcheck.machine.devices import Stroke
from seqcheck.machine.places import Place
from seqcheck.machine.time import NO_TIME, WHOLE_SHARE, Span

Node = Tree[Token] | Token


def trees(node: Tree[Token], *names: str) -> list[Tree[Token]]:
    """The parts of a tree that have one of these names."""
    return [child for child in node.children if isinstance(child, Tree) and child.data in names]


def tokens(node: Tree[Token], *kinds: str) -> list[Token]:
    return [child for child in node.children if isinstance(child, Token) and child.type in kinds]


def start_of(node: Node) -> int | None:
    """Where a tree or token begins in its text; None for an empty rule."""
    if isinstance(node, Token):
        return node.start_pos
    for child in node.children:
        start = child.start_pos if isinstance(child, Token) else start_of(child)
        if start is not None:
            return start
    return None


def end_of(node: Node) -> int | None:
    """Where it ends."""
    if isinstance(node, Token):
        return node.end_pos
    for child in reversed(node.children):
        end = child.end_pos if isinstance(child, Token) else end_of(child)
        if end is not None:
            return end
    return None


class Harvest:
    """Makes records of one text."""

    def __init__(self, ruler: Ruler, problems: Problems) -> None:
        self.ruler = ruler
        self.problems = problems

    def place(self, node: Node) -> Place:
        """The place of a tree or token. An empty rule has none; nothing here asks for one."""
        return self.ruler.place(start_of(node) or 0, end_of(node) or 0)

    def written(self, node: Tree[Token], end: int | None = None) -> str:
        """A part of the text as it stands there, up to its own end or to another one."""
        return self.ruler.text[start_of(node) : end_of(node) if end is None else end]

    def word(self, token: Token) -> Word:
        text = token[1:-1] if token.type == "STRING" else unicodedata.normalize("NFC", token)
        return Word(str(text), self.place(token))

    def first_word(self, node: Tree[Token], kind: str = "NAME") -> Word | None:
        found = tokens(node, kind)
        return self.word(found[0]) if found else None

    def name(self, node: Tree[Token]) -> Word:
        return self.word(tokens(node, "NAME")[0])

    def marks(self, node: Tree[Token], address: str | None) -> Marks:
        """Label and address behind a name. ``address`` is the letter that fits (I or Q), None where none does."""
        found: dict[str, Word] = {}
        for token in tokens(trees(node, "marks")[0], "STRING", "ADDRESS"):
            what = "label" if token.type == "STRING" else "address"
            if token.type in found:
                self.problems.report(self.place(token), f"a second {what}", "leave one of them out")
            elif token.type == "ADDRESS" and not self._address_fits(token, address):
                continue
            else:
                found[token.type] = self.word(token)
        return Marks(found.get("STRING"), found.get("ADDRESS"))

    def _address_fits(self, token: Token, letter: str | None) -> bool:
        if letter is None:
            self.problems.report(
                self.place(token), "an address cannot stand here", "coils, outputs and inputs have one"
            )
            return False
        if re.fullmatch(rf"%[{letter}M]X?[0-9]+(\.[0-9]+)*", token, re.IGNORECASE):
            return True
        kind = "an input" if letter == "I" else "an output"
        self.problems.report(self.place(token), f"{token} is no address of {kind} bit", f"write %{letter}0.1, say")
        return False

    # Times

    def quantity(self, node: Tree[Token], unit: str | None) -> int:
        """Microseconds; ``unit`` is the one that stands further right in the same span."""
        number = tokens(node, "NUMBER")[0]
        own = tokens(node, "UNIT")
        unit = str(own[0]) if own else unit
        if unit is None:
            self.problems.report(self.place(node), "the unit is left out", f"write {short(number)} ms (or us, s, min)")
            return 0
        time = time_from(number, unit)
        if isinstance(time, str):
            self.problems.report(self.place(node), time)
            return 0
        return time

    def span(self, node: Tree[Token]) -> Span:
        """``18..22..28 ms``, ``30 ± 5 ms``, ``30 ms``: a unit counts for the numbers left of it that have none."""
        if not any(tokens(part, "UNIT") for part in trees(node, "quantity")):
            written = short(self.written(node))
            self.problems.report(self.place(node), "the unit is left out", f"write {written} ms (or us, s, min)")
            return NO_TIME
        bare = [part for part in trees(node, "quantity") if not tokens(part, "UNIT")]
        if bare and bare[-1] is trees(node, "quantity")[-1]:
            self.quantity(bare[-1], None)
            return NO_TIME
        unit = None
        times: list[int] = []
        for part in reversed(trees(node, "quantity")):
            own = tokens(part, "UNIT")
            times.insert(0, self.quantity(part, unit))
            unit = str(own[0]) if own else unit
        if tokens(node, "PLUS_MINUS"):
            return self._around(node, *times)
        if times != sorted(times):
            self.problems.report(self.place(node), "this span runs backwards", "write the least time first")
            return NO_TIME
        return Span(times[0], times[1], times[2]) if len(times) == 3 else Span.between(times[0], times[-1])

    def _around(self, node: Tree[Token], middle: int, deviation: int) -> Span:
        if deviation > middle:
            self.problems.report(self.place(node), "the least time of this span is negative")
            return NO_TIME
        return Span(middle - deviation, middle, middle + deviation)

    def duration(self, node: Tree[Token]) -> int:
        """The ``duration`` in a tree."""
        return self.quantity(trees(node, "duration")[0], None)

    def edges(self, node: Tree[Token]) -> Edges:
        both = trees(node, "span")
        if both:
            span = self.span(both[0])
            return Edges(span, span)
        found = {setting.key: setting.value for setting in self.settings(trees(node, "edge"))}
        on, off = found.get("on"), found.get("off")
        return Edges(on if isinstance(on, Span) else None, off if isinstance(off, Span) else None)

    def share(self, node: Tree[Token]) -> int:
        """Millionths of a percentage (``percent`` or ``number``)."""
        number = next(node.scan_values(lambda token: isinstance(token, Token) and token.type == "NUMBER"))
        millionths = whole_times(number, WHOLE_SHARE // 100)
        if millionths is None or millionths > (WHOLE_SHARE, 0):
            message = "this number has too many digits" if millionths is None else "this is over 100 %"
            self.problems.report(self.place(node), message)
            return WHOLE_SHARE
        share, left = millionths
        if left:
            self.problems.report(self.place(node), "a share finer than 0.0001 %", "round it")
            return 0
        return share

    # Settings

    def settings(self, nodes: Sequence[Tree[Token]]) -> tuple[Setting, ...]:
        """The times in braces; each key once."""
        found: dict[str, Setting] = {}
        for node in nodes:
            setting = self.setting(node)
            if setting.key in found:
                self.problems.report(setting.place, f"{setting.key} is given twice", "leave one of them out")
            else:
                found[setting.key] = setting
        return tuple(found.values())

    def setting(self, node: Tree[Token]) -> Setting:
        key = next(child for child in node.children if isinstance(child, Token))
        return Setting(str(key), self.value(node), self.place(node))

    def value(self, node: Tree[Token]) -> SettingValue:
        """The value in a setting or in a sheet."""
        inner = next(child for child in node.children if isinstance(child, Tree))
        match inner.data:
            case "edges" if node.data == "sheet_value" and trees(inner, "span"):
                return self.span(trees(inner, "span")[0])
            case "edges":
                return self.edges(inner)
            case "percent":
                return self.share(inner)
            case "stroke_value":
                return Stroke(self.span(trees(inner, "span")[0]), True)
            case _ if node.data == "stroke":
                return Stroke(self.span(inner), bool(tokens(node, "FROM")))
            case _ if str(node.children[0]) == "gap" and len(trees(inner, "quantity")) > 1:
                self.problems.report(self.place(inner), "a gap is one duration, not a span", "write the least time")
                return NO_TIME
            case _:
                return self.span(inner)

    # Conditions

    def condition(self, node: Node) -> ConditionText:
        assert isinstance(node, Tree)
        match node.data:
            case "any_of":
                return AnyText(self._parts(node), self.place(node))
            case "all_of":
                return AllText(self._parts(node), self.place(node))
            case "negation":
                return NotText(self._parts(node)[0], self.place(node))
            case _:
                return self.term(node)

    def conditions(self, node: Tree[Token]) -> list[ConditionText]:
        """The conditions directly in a tree, from left to right."""
        return [self.condition(part) for part in trees(node, "any_of", "all_of", "negation", "term")]

    def _parts(self, node: Tree[Token]) -> tuple[ConditionText, ...]:
        return tuple(self.conditions(node))

    def term(self, node: Tree[Token]) -> TermText:
        """A term or the name of a step, in its plain spelling."""
        names = [self.word(token) for token in tokens(node, "NAME")]
        ends = tokens(node, "PLUS", "MINUS", "NTH", "RPAR_NTH")
        end = str(ends[0]).removeprefix(")") if ends else ""
        moves = trees(node, "move")
        place = self.place(node)
        if moves:
            owner = names[0] if names else None
            return TermText(owner, Word(pair_spelling(moves) + end, place), True, place)
        owner = names[0] if len(names) == 2 else None
        return TermText(owner, Word(names[-1].text + end, names[-1].place), bool(end), place)


def pair_spelling(moves: Sequence[Tree[Token]]) -> str:
    """``(clamp+ pusher-)``, whatever spaces the text has."""
    return "(" + " ".join(_move_spelling(move) for move in moves) + ")"


def _move_spelling(move: Tree[Token]) -> str:
    return "".join(unicodedata.normalize("NFC", token) for token in _tokens_of(move))


def _tokens_of(move: Tree[Token]) -> Iterator[Token]:
    return (child for child in move.children if isinstance(child, Token))
