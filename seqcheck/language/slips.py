"""Words for slips of syntax.

Takes the text, the offset where the parser stopped and what it could have taken there; gives a sentence, its place
and what would be right.
"""

from __future__ import annotations

import re
from collections.abc import Callable

from seqcheck.language.grammar import MOST_NESTED
from seqcheck.language.problems import short
from seqcheck.language.situation import Situation, Slip, Words, expected, near_word, shown

_WORD = re.compile(r"\w+|.", re.DOTALL)
_BARE_NUMBER = re.compile(r"(?<![\w./%])[0-9]+(\.[0-9]+)?$|\.\.\s*[0-9]+(\.[0-9]+)?$")
_UNMOVED = re.compile(r"(\w+)(?:\s|#[^\n]*\n)*\Z")
_DEVICES = ("controller", "io", "valve", "output", "cylinder", "signal", "flag")
_STATEMENTS = ("machine", "timing", *_DEVICES, "sequence", "never", "limit")
_INNER_STATEMENTS = ("step", "together", "choose", "repeat", "jump", "every")
_HOMES = {**dict.fromkeys(_INNER_STATEMENTS, "sequence"), "coil": "valve", "sensor": "cylinder"}

_LOOK_BACK = 300
_NUMBER_AHEAD = re.compile(r".\s*[0-9]", re.DOTALL)
_DASHES = ("-", "\u2013", "\u2014", "\u2026")
_SEPARATED = "leave it out: spaces and line ends separate"
_SIGNS = {
    **dict.fromkeys((",", ";", ":"), _SEPARATED),
    "=": "leave it out: a name alone says that it is on",
    "&": "write `and`",
    "|": "write `or`",
    "!": "write `not`",
    "*": "write `and`",
}
_SKIPPED = re.compile(r'"[^"\n]*"|#[^\n]*|[{}]')


def describe_slip(text: str, begin: int, offset: int, accepted: frozenset[str], whole: str) -> Slip:
    """What is wrong at an offset. ``begin`` is the start of the broken statement; ``whole`` names what is read."""
    if offset >= len(text):
        offset = len(text.rstrip())
        word = ""
    else:
        word = _word_at(text, offset)
    moved = _UNMOVED.search(text, max(begin, offset - _LOOK_BACK), offset) if accepted == {"PLUS", "MINUS"} else None
    if moved is not None:
        return Slip(moved.start(1), moved.end(1), *_no_motion(moved[1]))
    situation = Situation(text, offset, word, accepted, _open_line(text, begin, offset), whole)
    for rule in _RULES:
        words = rule(situation)
        if words is not None:
            return Slip(offset, offset + max(1, len(word)), *words)
    return Slip(offset, offset + max(1, len(word)), f"{shown(word)} cannot stand here", expected(situation))


def _word_at(text: str, offset: int) -> str:
    found = _WORD.match(text, offset)
    return found[0] if found else ""


def _open_line(text: str, begin: int, offset: int) -> int | None:
    """The line of the innermost brace that is still open."""
    opened: list[int] = []
    for found in _SKIPPED.finditer(text, begin, offset):
        if found[0] == "{":
            opened.append(found.start())
        elif found[0] == "}" and opened:
            opened.pop()
    return text.count("\n", 0, opened[-1]) + 1 if opened else None


# One rule a slip; the first that has words for it is taken.


def _too_deep(at: Situation) -> Words | None:
    if at.accepted:
        return None
    return f"nested over {MOST_NESTED} deep", "close some braces or parentheses"


def _no_motion(word: str) -> Words:
    """A word between steps that no + or - follows."""
    joined = re.match(r"(" + "|".join((*_INNER_STATEMENTS, "dwell", "within")) + r")[0-9]+$", word)
    near = near_word(word, (*_INNER_STATEMENTS, "dwell", "within"))
    if joined:
        advice = f"leave a space: `{joined[1]} {word[len(joined[1]) :]}`"
    elif near:
        advice = f"did you mean `{near}`?"
    else:
        advice = f"a cylinder moves by {short(word)}+ or {short(word)}-, other steps begin with `step`"
    return f"{shown(word)} begins no step", advice


def _text_ends(at: Situation) -> Words | None:
    if at.word:
        return None
    if at.opened is not None:
        advice = "write `}` at the end" if "RBRACE" in at.accepted else expected(at)
        return f"the text ends before the `{{` of line {at.opened} is closed", advice
    return f"the {at.whole} ends too early", expected(at)


def _quotes_open(at: Situation) -> Words | None:
    if at.word != '"':
        return None
    line = at.text[at.offset + 1 : at.text.find("\n", at.offset) % (len(at.text) + 1)]
    if '"' in line:
        return 'a text in "quotes" cannot stand here', expected(at)
    return "these quotes are not closed", 'write `"` at the end of the text, on the same line'


def _brace_open(at: Situation) -> Words | None:
    if at.opened is None or at.word not in _STATEMENTS or "RBRACE" not in at.accepted:
        return None
    line = at.text[at.text.rfind("\n", 0, at.offset) + 1 : at.offset]
    if line.strip():
        return None
    return f"the `{{` of line {at.opened} is not closed before `{at.word}`", "write `}` before it"


def _brace_extra(at: Situation) -> Words | None:
    if at.word == "}" and at.opened is None and "RBRACE" not in at.accepted:
        return "there is no open `{` for this `}`", "leave it out"
    return None


def _reserved(at: Situation) -> Words | None:
    if at.word in ("and", "or", "not") and "NAME" in at.accepted:
        return f"`{at.word}` cannot be a name", "a name goes here"
    return None


def _number(at: Situation) -> Words | None:
    """Other ways to write numbers and spans."""
    behind_number = _BARE_NUMBER.search(at.before) is not None
    before_number = _NUMBER_AHEAD.match(at.text, at.offset) is not None
    if at.word == "," and behind_number and before_number:
        return "a comma in a number", "write a decimal point: 1.5"
    if at.word == "." and at.before.endswith(".."):
        return "a span has two points", "write 18..28 ms, say"
    if at.word in _DASHES and behind_number and before_number:
        return f"a span is not written with `{at.word}`", "write 18..28 ms, say"
    if at.word == "-" and "NUMBER" in at.accepted:
        return "a number cannot be negative", "leave the `-` out"
    if at.word == "." and "NUMBER" in at.accepted:
        return "a number begins with a digit", "write 0.5, say"
    return None


def _hyphen(at: Situation) -> Words | None:
    name = re.search(r"(?<!\w)[^\W\d]\w*$", at.before)
    rest = re.match(r"-(\w+)", at.text[at.offset : at.offset + 60])
    if at.word != "-" or at.gap or name is None or rest is None:
        return None
    return "a name has no hyphen", f"write {short(name[0])}_{rest[1]}"


def _foreign_sign(at: Situation) -> Words | None:
    if at.word in _SIGNS:
        return f"`{at.word}` is no part of the language", _SIGNS[at.word]
    return None


def _digit_first(at: Situation) -> Words | None:
    if at.word[:1].isdigit() and "NAME" in at.accepted and "NUMBER" not in at.accepted:
        return "a name cannot begin with a digit", "begin it with a letter"
    return None


def _unknown_unit(at: Situation) -> Words | None:
    """By the look of it: behind a number the parser may have gone on before it stopped."""
    if "\n" in at.gap or not (at.word.isalpha() or at.word == "µ") or "LBRACE" in at.accepted:
        return None
    if "PERCENT" in at.accepted and "UNIT" not in at.accepted:
        return None
    if not _BARE_NUMBER.search(at.before):
        return None
    return f"{shown(at.word)} is no unit", "write us, ms, s or min"


def _joined(at: Situation) -> Words | None:
    found = re.match(r"([a-z]+)[0-9]", at.word)
    if found and found[1] in at.keywords:
        return f"{shown(at.word)} is one word", f"leave a space: `{found[1]} {short(at.word[len(found[1]) :])}`"
    return None


def _no_statement(at: Situation) -> Words | None:
    if "VALVE" not in at.accepted or not re.match(r"\w", at.word):
        return None
    home = _HOMES.get(at.word)
    if home is not None:
        return f"`{at.word}` stands outside of a {home}", "is there a `}` too many before it?"
    near = near_word(at.word, at.keywords, 0.6)
    return f"{shown(at.word)} begins no statement", f"did you mean `{near}`?" if near else _statements_advice()


def _statements_advice() -> str:
    return "a statement begins with one of: " + ", ".join(_STATEMENTS)


_RULES: tuple[Callable[[Situation], Words | None], ...] = (
    _too_deep,
    _text_ends,
    _quotes_open,
    _brace_open,
    _brace_extra,
    _reserved,
    _number,
    _hyphen,
    _foreign_sign,
    _joined,
    _digit_first,
    _no_statement,
    _unknown_unit,
)
