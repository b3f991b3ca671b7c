"""Parses a whole text, or one value of a sheet, and goes on after every slip.

Takes a text; gives the records of its whole statements, and the names that its broken ones would have declared;
reports at most 20 slips, each at its own place.
"""

from __future__ import annotations

import re
import unicodedata
from typing import TYPE_CHECKING

from lark import Token, Tree, UnexpectedInput
from lark.exceptions import UnexpectedCharacters, UnexpectedToken
from lark.utils import TextSlice

from seqcheck.language.grammar import TooDeep, no_collecting, parser
from seqcheck.language.harvest import Harvest, end_of
from seqcheck.language.problems import Problems, Ruler
from seqcheck.language.source import Source
from seqcheck.language.statements import statement_text
from seqcheck.language.syntax import SettingValue, StatementText
from seqcheck.machine.records import record

if TYPE_CHECKING:
    from seqcheck.language.situation import Slip

MOST_SLIPS = 20

#: A line that begins a statement: inside braces only ``output`` may stand there as well, before its times.
_BEGINNING = re.compile(
    r"^[ \t\r\ufeff]*((?:machine|timing|controller|io|valve|cylinder|signal|flag|sequence|never|limit)(?!\w)"
    r"|output(?!\w)(?!\s*(?:on\s+)?[0-9]))",
    re.MULTILINE,
)
_DECLARED = re.compile(r"(?<!\w)(?:io|valve|coil|output|cylinder|sensor|signal|flag|sequence|step)\s+([^\W\d]\w*)")


@record
class Parsed:
    """``forgiven`` are the names in broken statements; ``whole`` says that there were none broken."""

    statements: tuple[StatementText, ...]
    forgiven: frozenset[str]
    whole: bool
    timing_whole: bool


@no_collecting()
def parse_text(source: Source, problems: Problems) -> Parsed:
    """The statements of a text."""
    ruler = Ruler(source.name, source.text)
    harvest = Harvest(ruler, problems)
    statements: list[Tree[Token]] = []
    broken: list[str] = []
    position = 0
    while position < len(source.text) and len(broken) < MOST_SLIPS:
        try:
            tree = parser().parse(TextSlice(source.text, position, len(source.text)), start="text")
            statements += _statements_in(tree)
            break
        except UnexpectedInput as error:
            from seqcheck.language.slips import describe_slip  # Most texts have none.

            accepted = _accepted(error)
            stopped = _offset(error, source.text)
            finished = _without_broken(_finished(error, accepted), source.text, stopped)
            statements += finished
            begin = end_of(finished[-1]) or position if finished else position
            slip = describe_slip(source.text, begin, stopped, accepted, "statement")
            _report(slip, ruler, problems)
            position = _resume(source.text, position, slip.start)
            broken.append(source.text[begin:position])
    if len(broken) == MOST_SLIPS:
        broken.append(source.text[position:])
    return Parsed(
        tuple(statement_text(harvest, statement) for statement in statements),
        frozenset(unicodedata.normalize("NFC", name) for part in broken for name in _DECLARED.findall(part)),
        not broken,
        not any(re.search(r"\btim|\.ya?ml", part) for part in broken),
    )


def parse_value(ruler: Ruler, problems: Problems) -> SettingValue | None:
    """One value of a timing sheet; None where it is broken."""
    text = ruler.text
    try:
        tree = parser().parse(text, start="sheet_value")
    except UnexpectedInput as error:
        from seqcheck.language.slips import describe_slip

        slip = describe_slip(text, 0, _offset(error, text), _accepted(error), "value")
        _report(slip, ruler, problems)
        return None
    assert isinstance(tree, Tree)
    before = len(problems)
    value = Harvest(ruler, problems).value(tree)
    return value if len(problems) == before else None


def _report(slip: Slip, ruler: Ruler, problems: Problems) -> None:
    problems.report(ruler.place(slip.start, slip.end), slip.message, slip.advice)


def _statements_in(value: object) -> list[Tree[Token]]:
    if not isinstance(value, Tree):
        return []
    return [child for child in value.children if isinstance(child, Tree)]


def _finished(error: UnexpectedInput, accepted: frozenset[str]) -> list[Tree[Token]]:
    """The statements that were whole when the parser stopped."""
    state = getattr(error, "interactive_parser", None)
    if state is None:
        return []
    if "$END" in accepted:
        return _statements_in(state.feed_eof())
    values = state.parser_state.value_stack
    repeated = values and isinstance(values[0], Tree) and str(values[0].data).startswith("__text")
    return _statements_in(values[0]) if repeated else []


def _without_broken(finished: list[Tree[Token]], text: str, stopped: int) -> list[Tree[Token]]:
    """A statement without braces that the slip follows in its own line is the broken one, though it could end there."""
    if not finished:
        return finished
    end = end_of(finished[-1]) or stopped
    behind = text[end:stopped]
    broken = text[end - 1] != "}" and not behind.strip() and "\n" not in behind and text[stopped : stopped + 1] != "}"
    return finished[:-1] if broken else finished


def _offset(error: UnexpectedInput, text: str) -> int:
    """Where the slip is; the end of the text where it ends too early."""
    if isinstance(error, UnexpectedToken):
        return len(text) if error.token.type == "$END" else error.token.start_pos or 0
    return error.offset if isinstance(error, TooDeep) else error.pos_in_stream or 0


def _accepted(error: UnexpectedInput) -> frozenset[str]:
    """The terminals that could have stood at the slip; none where it is nested too deep."""
    state = getattr(error, "interactive_parser", None)
    if not isinstance(error, UnexpectedToken | UnexpectedCharacters) or state is None:
        return frozenset()
    return frozenset(state.accepts())


def _resume(text: str, position: int, slip: int) -> int:
    """The next line that begins a statement, at the slip or behind it, but always further on."""
    line = text.rfind("\n", 0, slip) + 1
    found = _BEGINNING.search(text, line)
    while found and (found.start(1) < slip or found.start(1) <= position):
        found = _BEGINNING.search(text, found.end())
    return found.start(1) if found else len(text)
