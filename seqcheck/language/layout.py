"""Lays a text out in one canonical way.

Takes a text; gives it with one statement, step or branch a line, four blanks for each open brace, short braces on one
line, and at most one empty line in a row. No word and no comment is changed, and none changes its place among the
others: a comment behind something stays behind it, one on a line of its own stays before what followed. A line that
a comment accepts a finding of keeps exactly what stood in it. Refuses, with problems, what cannot be parsed.
"""

from __future__ import annotations

import re
from bisect import bisect_left
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field

from lark import Token, Tree, UnexpectedInput

from seqcheck.language.accepts import accepts_of
from seqcheck.language.grammar import no_collecting, parser
from seqcheck.language.harvest import start_of
from seqcheck.language.parse import parse_text
from seqcheck.language.problems import Problems
from seqcheck.language.source import Source
from seqcheck.language.spelling import blank_between, spelling_of
from seqcheck.machine.records import record

WIDTH = 120
INDENT = 4
#: For what goes on from the line before.
HANGING = 8
BETWEEN_PARTS = "   "

#: What has braces with parts in them, and which of these never stand on one line.
_OWNERS = frozenset(
    ("controller", "io", "valve", "coil", "output", "cylinder", "sequence", "step", "branch", "choose", "when")
) | {"otherwise", "repeat"}
_ALWAYS_OPEN = ("SEQUENCE", "CHOOSE")
#: Where a line that is too long may go on in the next one.
_WRAPS = frozenset(("AND", "OR", "UNTIL", "WITHIN", "TO", "FOR", "STRING", "IN"))
_COMMENT = re.compile(r'"[^"\n]*"?|(?P<comment>#[^\n]*)')


@dataclass(slots=True)
class _Piece:
    """One token with what stands around it. ``opener``: the piece whose brace it stands in, None outside of all.
    ``closer``: the piece of the brace that this one opens. ``blank``: an empty line stood before it."""

    token: Token
    depth: int
    opener: int | None
    part: bool = False
    closer: int | None = None
    blank: bool = False
    broken: bool = False
    glued: bool = False
    before: list[_Comment] = field(default_factory=list)
    behind: str | None = None

    @property
    def text(self) -> str:
        return spelling_of(self.token)


@record
class _Comment:
    text: str
    blank: bool


@no_collecting()
def laid_out(source: Source, problems: Problems) -> str | None:
    """The text as it should be; None where it has slips, which are reported."""
    try:
        interactive = parser().parse_interactive(source.text, start="text")
        tokens = list(interactive.iter_parse())
        tree: Tree[Token] = interactive.feed_eof()  # type: ignore[no-untyped-call]
    except UnexpectedInput:
        parse_text(source, problems)
        return None
    pieces = _pieces(tokens)
    _mark_parts(pieces, tree)
    rest = _place_comments(pieces, source.text)
    lengths = _lengths(pieces)
    for start, end in _parts_between(pieces, 0, len(pieces)):
        _decide(pieces, start, end, lengths)
    _keep_accepted_lines(pieces, source)
    _wrap(pieces)
    return _written(pieces, rest)


def _pieces(tokens: Sequence[Token]) -> list[_Piece]:
    pieces: list[_Piece] = []
    opened: list[int] = []
    for number, token in enumerate(tokens):
        if token.type == "RBRACE":
            pieces[opened[-1]].closer = number
            opened.pop()
        pieces.append(_Piece(token, len(opened), opened[-1] if opened else None))
        if token.type == "LBRACE":
            opened.append(number)
    return pieces


def _starts(pieces: Sequence[_Piece]) -> list[int]:
    return [piece.token.start_pos or 0 for piece in pieces]


def _mark_parts(pieces: Sequence[_Piece], tree: Tree[Token]) -> None:
    """What begins a statement, or a part inside of the braces of its owner."""
    numbers = {start: number for number, start in enumerate(_starts(pieces))}
    for owner in (tree, *tree.iter_subtrees()):
        if owner is not tree and owner.data not in _OWNERS:
            continue
        for child in owner.children:
            start = start_of(child) if isinstance(child, Tree) else None
            if start is None:
                continue
            piece = pieces[numbers[start]]
            opener = piece.opener
            if owner is tree or (opener is not None and (pieces[opener].token.start_pos or 0) > (start_of(owner) or 0)):
                piece.part = True


def _place_comments(pieces: Sequence[_Piece], text: str) -> list[_Comment]:
    """Gives every comment to the piece before it in its line, or else to the next one; what is left at the end comes
    back."""
    starts = _starts(pieces)
    comments = [(found.start(), found["comment"]) for found in _COMMENT.finditer(text) if found["comment"]]
    rest: list[_Comment] = []
    seen = 0
    for start, written in comments:
        number = bisect_left(starts, start)
        _note_blanks(pieces[seen:number], text)
        last = pieces[number - 1] if number else None
        line = text.rfind("\n", 0, start) + 1
        if last is not None and (last.token.end_pos or 0) > line and last.behind is None:
            last.behind = written.rstrip()
        else:
            into = pieces[number].before if number < len(pieces) else rest
            into.append(_Comment(written.rstrip(), _blank_before(text, start)))
        seen = number
    _note_blanks(pieces[seen:], text)
    return rest


def _note_blanks(pieces: Sequence[_Piece], text: str) -> None:
    for piece in pieces:
        piece.blank = _blank_before(text, piece.token.start_pos or 0)


def _blank_before(text: str, start: int) -> bool:
    """Whether the line before that of ``start`` is empty."""
    line = text.rfind("\n", 0, start)
    if line < 0 or not _is_empty(text[line + 1 : start]):
        return False
    return _is_empty(text[text.rfind("\n", 0, line) + 1 : line])


def _is_empty(part: str) -> bool:
    return not part.replace("\ufeff", "").strip()


# Where lines end


def _parts_between(pieces: Sequence[_Piece], start: int, end: int) -> Iterator[tuple[int, int]]:
    """The parts that stand side by side from ``start`` to ``end``."""
    begin = start
    number = start
    while number < end:
        if pieces[number].part and number > begin:
            yield begin, number
            begin = number
        number = (pieces[number].closer or number) + 1
    if begin < end:
        yield begin, end


def _lengths(pieces: Sequence[_Piece]) -> list[int]:
    """How long everything before each piece is on one line."""
    lengths = [0]
    for number, piece in enumerate(pieces):
        lengths.append(lengths[-1] + len(_gap(pieces, number)) + len(piece.text))
    return lengths


def _decide(pieces: Sequence[_Piece], start: int, end: int, lengths: Sequence[int]) -> None:
    """One part: on one line where it fits, else its braces are opened, and its parts are looked at in their turn."""
    pieces[start].broken = True
    length = lengths[end] - lengths[start] - len(_gap(pieces, start))
    inner = any(piece.before for piece in pieces[start + 1 : end]) or any(
        piece.behind for piece in pieces[start : end - 1]
    )
    stays_open = any(piece.token.type in _ALWAYS_OPEN for piece in pieces[start:end])
    if not inner and not stays_open and INDENT * pieces[start].depth + length <= WIDTH:
        return
    number = start
    while number < end:
        closer = pieces[number].closer
        if closer is not None:
            if closer > number + 1:
                pieces[closer].broken = True
            for part in _parts_between(pieces, number + 1, closer):
                _decide(pieces, *part, lengths)
            number = closer
        number += 1


def _keep_accepted_lines(pieces: Sequence[_Piece], source: Source) -> None:
    """A comment that accepts speaks of a whole line: what stood in it stays, and nothing comes to it."""
    spoken_of = {accept.line for accept in accepts_of(source, None, Problems())}
    if not spoken_of:
        return
    line = 1
    position = 0
    before = 0
    for piece in pieces:
        start = piece.token.start_pos or 0
        line += source.text.count("\n", position, start)
        position = start
        if line in spoken_of or before in spoken_of:
            piece.glued = line == before
            piece.broken = line != before
        before = line


def _begins_line(pieces: Sequence[_Piece], number: int) -> bool:
    piece = pieces[number]
    return number == 0 or bool(piece.before) or piece.broken or pieces[number - 1].behind is not None


def _wrap(pieces: Sequence[_Piece]) -> None:
    """Lets lines that are too long go on in the next one, where there is a place for it."""
    column = 0
    may_wrap: int | None = None
    for number, piece in enumerate(pieces):
        if _begins_line(pieces, number):
            column = _indent(piece)
            may_wrap = None
        elif piece.token.type in _WRAPS and not piece.glued:
            may_wrap = number
        column += len(piece.text) + (0 if _begins_line(pieces, number) else len(_gap(pieces, number)))
        if column > WIDTH and may_wrap is not None:
            pieces[may_wrap].broken = True
            column = _indent(pieces[may_wrap]) + sum(
                len(pieces[one].text) + (len(_gap(pieces, one)) if one > may_wrap else 0)
                for one in range(may_wrap, number + 1)
            )
            may_wrap = None


# Writing


def _gap(pieces: Sequence[_Piece], number: int) -> str:
    """What stands before a piece that does not begin a line."""
    if number == 0:
        return ""
    before, piece = pieces[number - 1].token, pieces[number]
    if piece.part and before.type != "LBRACE":
        return BETWEEN_PARTS
    return blank_between(before, piece.token)


def _indent(piece: _Piece) -> int:
    return INDENT * piece.depth + (0 if piece.part or piece.token.type == "RBRACE" else HANGING)


def _written(pieces: Sequence[_Piece], rest: Sequence[_Comment]) -> str:
    lines: list[str] = []
    for number, piece in enumerate(pieces):
        closes = piece.token.type == "RBRACE"
        margin = " " * (INDENT * (piece.depth + 1) if closes else _indent(piece))
        opened = number == 0 or pieces[number - 1].token.type == "LBRACE"
        for comment in piece.before:
            lines += [""] if comment.blank and not opened else []
            lines.append(margin + comment.text)
            opened = False
        if _begins_line(pieces, number):
            # Behind a comment an empty line has a meaning: one that accepts then speaks of nothing.
            apart = piece.blank and not opened and (piece.before or piece.part)
            lines += [""] if apart else []
            lines.append(" " * _indent(piece) + piece.text)
        else:
            lines[-1] += _gap(pieces, number) + piece.text
        if piece.behind is not None:
            lines[-1] += f"   {piece.behind}"
    for comment in rest:
        lines += [""] if comment.blank and lines else []
        lines.append(comment.text)
    return "".join(f"{line}\n" for line in lines)
