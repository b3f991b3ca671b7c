"""Words for slips of syntax.

Takes the text, the offset where the parser stopped and what it could have taken there; gives a sentence, its place
and what would be right. Slips in values have a file of their own, and so have words out of other notations.
"""

from __future__ import annotations

import re
from collections.abc import Callable

from seqcheck.language import slips_signs, slips_values
from seqcheck.language.grammar import MOST_NESTED
from seqcheck.language.habits import habit, habit_of_item
from seqcheck.language.problems import short
from seqcheck.language.situation import Situation, Slip, Words, expected, near_word, shown

_WORD = re.compile(r"\w+|.", re.DOTALL)
_UNMOVED = re.compile(r"(\w+)(?:\s|#[^\n]*\n)*\Z")
_DEVICES = ("controller", "io", "valve", "output", "cylinder", "signal", "flag")
_STATEMENTS = ("machine", "timing", *_DEVICES, "sequence", "never", "limit")
_INNER_STATEMENTS = ("step", "together", "choose", "repeat", "jump", "every")
_HOMES = {**dict.fromkeys(_INNER_STATEMENTS, "sequence"), "coil": "valve", "sensor": "cylinder"}
#: What stands in the braces of a device.
_BRACED = ("on", "off", "decay", "gap", "travel", "extend", "retract", "lag", "uneven", "overrun", "coil", "sensor")

_LOOK_BACK = 300
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
        offset, word = moved.start(1), moved[1]
        at = Situation(text, offset, word, accepted, _open_line(text, begin, offset), whole)
        return Slip(offset, offset + len(word), *_no_motion(at))
    situation = Situation(text, offset, word, accepted, _open_line(text, begin, offset), whole)
    for rule in _RULES:
        words = rule(situation)
        if words is not None:
            return Slip(*_place(situation, rule), *words)
    advice = near_keyword(situation) or habit(situation) or _named(situation) or expected(situation)
    return Slip(offset, offset + max(1, len(word)), f"{shown(word)} cannot stand here", advice)


def _place(at: Situation, rule: Callable[[Situation], Words | None]) -> tuple[int, int]:
    if rule is _unfinished:
        end = len(at.text[: at.offset].rstrip())
        return end, end + 1
    start = at.offset - (rule is slips_signs.comment and slips_signs.began_before(at))
    return start, at.offset + max(1, len(at.word))


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


def near_keyword(at: Situation) -> str | None:
    near = near_word(at.word, at.keywords)
    return f"did you mean `{near}`?" if near else None


# One rule a slip; the first that has words for it is taken.


def _too_deep(at: Situation) -> Words | None:
    if at.accepted:
        return None
    return f"nested over {MOST_NESTED} deep", "close some braces or parentheses"


def _no_motion(at: Situation) -> Words:
    """A word between steps that no + or - follows."""
    word = at.word
    if at.opened is not None and word in _STATEMENTS and at.begins_line and re.match(r'\s+[\w"{]', at.ahead):
        return f"the `{{` of line {at.opened} is not closed before `{word}`", "write `}` before it"
    beginnings = (*_INNER_STATEMENTS, "dwell", "within")
    joined = re.match(r"(" + "|".join(beginnings) + r")[0-9]+$", word)
    near = near_word(word, beginnings)
    direction = re.match(r"\s*(out|extend|in|retract)(?!\w)", at.ahead)
    if joined:
        advice = f"leave a space: `{joined[1]} {word[len(joined[1]) :]}`"
    elif near and near != word:
        advice = f"did you mean `{near}`?"
    elif meant := habit_of_item(at):
        advice = meant
    elif direction:
        advice = f"write `{short(word)}{'+' if direction[1] in ('out', 'extend') else '-'}`"
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


def _unfinished(at: Situation) -> Words | None:
    """A statement begins in a new line, and the one before it is not whole."""
    if at.opened is not None or at.word not in _STATEMENTS or "VALVE" in at.accepted or not at.begins_line:
        return None
    if "LBRACE" in at.accepted or not at.before:
        return None
    return f"the statement before `{at.word}` ends too early", expected(at)


def _quotes_open(at: Situation) -> Words | None:
    if at.word != '"':
        return None
    line = at.text[at.offset + 1 : at.text.find("\n", at.offset) % (len(at.text) + 1)]
    if '"' in line:
        named = "NAME" in at.accepted and "STRING" not in at.accepted and len(at.accepted) == 1
        return 'a text in "quotes" cannot stand here', "a name goes before it" if named else expected(at)
    return "these quotes are not closed", 'write `"` at the end of the text, on the same line'


def _brace_open(at: Situation) -> Words | None:
    if at.opened is None or at.word not in _STATEMENTS or "RBRACE" not in at.accepted or not at.begins_line:
        return None
    return f"the `{{` of line {at.opened} is not closed before `{at.word}`", "write `}` before it"


def _brace_extra(at: Situation) -> Words | None:
    if at.word == "}" and at.opened is None and "RBRACE" not in at.accepted:
        return "there is no open `{` for this `}`", "leave it out"
    return None


def _brace_early(at: Situation) -> Words | None:
    """A brace where something has to stand before it."""
    if at.word == "{" and at.accepted == {"NAME"}:
        kind = at.before.rpartition(" ")[2] or "it"
        return f"this `{short(kind)}` has no name", f"write `{short(kind)} NAME {{`"
    if at.word == "{" and at.accepted == {"NUMBER"}:
        return "nobody says how often this is repeated", "write `repeat 3 {`, say"
    if at.word == "}" and "RPAR" in at.accepted:
        return "a parenthesis is not closed", "write `)` before the `}`"
    if at.word == "}" and at.accepted == {"AND"}:
        return "a `together` has two branches or more", "write `together { .. } and { .. }`"
    if at.word == "}" and "NAME" in at.accepted and re.search(r"\bon$", at.before):
        return "`on` is a command and needs a name", "leave it out: in a condition a name alone says that it is on"
    return None


def _reserved(at: Situation) -> Words | None:
    if at.word in ("and", "or", "not") and "NAME" in at.accepted and "TOGETHER" not in at.accepted:
        return f"`{at.word}` cannot be a name", "a name goes here"
    return None


def _negated(at: Situation) -> Words | None:
    found = re.search(r"(?<!\w)(NOT|Not|nicht|kein|no)$", at.before)
    if found and re.match(r"\w|\(", at.word) and "AND" in at.accepted:
        return f"{shown(at.word)} cannot stand behind the name `{found[1]}`", "write `not` in small letters before it"
    return None


def _digit_first(at: Situation) -> Words | None:
    if not at.word[:1].isdigit() or "NAME" not in at.accepted or "NUMBER" in at.accepted:
        return None
    if "TOGETHER" in at.accepted and re.match(r"\s*\{", at.ahead):
        return f"{shown(at.word)} cannot stand here", f"write `repeat {short(at.word)} {{ .. }}`"
    if re.match(r"[2-5]\s*/\s*[23](?!\w)", at.word + at.ahead):
        return "this valve has no name", "write `valve V1 5/2`, say"
    return "a name cannot begin with a digit", "begin it with a letter"


def _joined(at: Situation) -> Words | None:
    found = re.match(r"([a-z]+)[0-9]", at.word)
    if found and found[1] in at.keywords:
        return f"{shown(at.word)} is one word", f"leave a space: `{found[1]} {short(at.word[len(found[1]) :])}`"
    return None


def _no_statement(at: Situation) -> Words | None:
    if "VALVE" not in at.accepted or not re.match(r"\w", at.word):
        return None
    if "ADDRESS" in at.accepted and re.match(r"[QIM]X?[0-9]", at.word):
        return f"{shown(at.word)} is no address", f"an address begins with `%`: %{at.word}.., say"
    if "AFTER" in at.accepted and at.word.isdecimal():
        return f"{shown(at.word)} cannot stand here", "write `after` before it"
    if "LBRACE" in at.accepted and at.word in _BRACED and not at.begins_line:
        return (
            f"{shown(at.word)} stands outside of the braces",
            "write `{` before it and `}` behind all that belongs in",
        )
    home = _HOMES.get(at.word)
    if home is not None:
        return f"`{at.word}` stands outside of a {home}", "is there a `}` too many before it?"
    near = near_word(at.word, at.keywords, 0.75)
    advice = None if near else habit(at)
    if not near and not advice and re.match(r"\s*\{", at.ahead):
        advice = f"write `sequence {short(at.word)} {{ .. }}`"
    if not near and not advice and at.word == "for":
        advice = 'it stands before the reason: `never CONDITION for 5 ms "why"`'
    near = near or (None if advice else near_word(at.word, at.keywords, 0.6))
    return f"{shown(at.word)} begins no statement", f"did you mean `{near}`?" if near else advice or _beginnings()


def _beginnings() -> str:
    return "a statement begins with one of: " + ", ".join(_STATEMENTS)


def _named(at: Situation) -> str | None:
    """Advice for a name where a word of the language goes first."""
    word = short(at.word)
    if at.accepted >= {"SET", "UNTIL"} and re.match(r"\d", at.word):
        unit = re.match(r"[.0-9]* ?(us|ms|s|min)(?!\w)", at.ahead)
        time = f"{word}{unit[0]}" if unit else f"{word} ms"
        return f"write `dwell {time}`, or `pulse NAME {time}` instead of `on NAME`"
    if at.accepted >= {"SET", "UNTIL"} and at.word == "and":
        return "each command has a word of its own: `on Y1   on Y2`"
    if at.accepted == {"CYCLE", "FROM"}:
        path = re.match(r"[^\n]*\sto\s", at.ahead)
        return "write `from` before it" if path else f"write `cycle` before it: `limit cycle {word} ..`"
    if not re.match(r"[^\W\d]", at.word):
        return None
    if at.accepted >= {"EXTENDED", "NUMBER"}:
        return "write `retracted`, `extended` or a range such as 45..50 %"
    if "AT" in at.accepted and re.search(r"\bsensor\s+at$", at.before):
        return f"a sensor has a name: `sensor B1 at {word}`"
    if at.accepted >= {"LBRACE", "ONCE"}:
        return "write `{` before it"
    if at.accepted >= {"SET", "UNTIL"}:
        off = re.match(r"\s*(off|-|:?=+\s*(0|false|off))(?!\w)", at.ahead, re.IGNORECASE)
        return f"write `{'reset' if off else 'on'} {word}`"
    if at.accepted >= {"COIL", "RBRACE", "DECAY"}:
        return f"write `coil {word}`"
    if at.accepted >= {"ON", "OUT"}:
        return f"write `on {word}`"
    if at.accepted == {"STRING"}:
        rest = re.match(r"[^\s\"#]*", at.ahead)
        return f'write it in quotes: "{short(at.word + (rest[0] if rest else ""))}"'
    if at.accepted == {"LBRACE"} and re.search(r"\brepeat\s+[0-9]+$", at.before):
        return "leave it out: `repeat 3 { .. }`"
    return None


_RULES: tuple[Callable[[Situation], Words | None], ...] = (
    _too_deep,
    _text_ends,
    slips_signs.comment,
    slips_values.span,
    slips_signs.quotes,
    _quotes_open,
    _brace_open,
    _brace_extra,
    _brace_early,
    _unfinished,
    _reserved,
    slips_values.number,
    slips_values.share,
    slips_values.ports,
    slips_signs.hyphen,
    slips_signs.direction,
    slips_signs.foreign_sign,
    _negated,
    _joined,
    _digit_first,
    _no_statement,
    slips_values.unit,
)
