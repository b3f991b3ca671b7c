"""Words for signs that mean something in other notations: comments, quotes, arrows, separators.

Takes where the parser stopped; gives a sentence and what would be right, None where the slip is no such one.
"""

from __future__ import annotations

import re

from seqcheck.language.problems import short
from seqcheck.language.situation import Situation, Words

_COMMENTS = ("//", "/*", "(*", "--")
_QUOTED = re.compile(
    r"[\u201c\u201d\u201e\u201f\u2018\u2019\u201a\u00ab\u00bb'`]([^\u201c\u201d\u2018\u2019\u00ab\u00bb'`\"\n]*)"
)
_SEPARATED = "leave it out: spaces and line ends separate"
_SIGNS = {
    **dict.fromkeys((",", ";", ":"), _SEPARATED),
    "=": "leave it out: a name alone says that it is on",
    "&": "write `and`",
    "|": "write `or`",
    "!": "write `not`",
    "*": "write `and`",
}


def comment(at: Situation) -> Words | None:
    """Other beginnings of a comment."""
    start = at.offset - began_before(at)
    alone = at.begins_line and at.word in (";", "'") and re.match(r"[ \t]*\w", at.ahead)
    if at.text[start : start + 2] in _COMMENTS or alone:
        return "a comment begins with `#`", "write `# ..`, up to the end of the line"
    return None


def began_before(at: Situation) -> bool:
    """Whether the parser took the first of the two signs for something else."""
    return at.word in ("*", "-") and at.offset > 0 and at.text[at.offset - 1 : at.offset + 1] in ("(*", "--")


def quotes(at: Situation) -> Words | None:
    """Typographic and single quotes."""
    found = _QUOTED.match(at.text, at.offset)
    if found is None:
        return None
    return f'quotes are written `"`, not `{at.word}`', f'write "{short(found[1].strip())}"'


def hyphen(at: Situation) -> Words | None:
    name = re.search(r"(?<!\w)[^\W\d]\w*$", at.before)
    rest = re.match(r"-(\w+)", at.text[at.offset : at.offset + 60])
    if at.word != "-" or at.gap or name is None or rest is None:
        return None
    return "a name has no hyphen", f"write {short(name[0])}_{rest[1]}"


def direction(at: Situation) -> Words | None:
    """``+`` and ``-`` where they say nothing, and arrows."""
    name = re.match(r"\s*([^\W\d]\w*)", at.ahead)
    arrow = at.text[at.offset : at.offset + 2] in ("->", "=>") or at.word in ("\u2192", ">")
    if arrow and "TO" in at.accepted:
        return "an arrow is no part of the language", "write `to` instead"
    if (arrow or at.word in ("/", "|")) and "TOGETHER" in at.accepted:
        sign = at.text[at.offset : at.offset + 2] if at.word in ("-", "=") else at.word
        return f"`{sign}` is no part of the language", "leave it out: steps run in their order"
    if at.word in ("+", "-") and at.before.endswith(("+", "-")) and not at.gap:
        return f"a second sign behind {short(at.before.split()[-1])}", "leave it out"
    if at.word not in ("+", "-") or name is None:
        return None
    if "SET" in at.accepted:
        return f"`{at.word}` switches nothing", f"write `{'on' if at.word == '+' else 'reset'} {short(name[1])}`"
    if "TOGETHER" in at.accepted:
        advice = f"write `{short(name[1])}{at.word}` for a cylinder; a coil is switched in a step, by `on` or `reset`"
        return f"`{at.word}` stands behind a name, not before it", advice
    return None


def foreign_sign(at: Situation) -> Words | None:
    if at.word == "," and at.accepted >= {"SET", "UNTIL"}:
        return "`,` is no part of the language", "leave it out; each command has a word of its own: `on Y1   on Y2`"
    if at.word == "=" and not at.accepted >= {"AND", "OR"}:
        return "`=` is no part of the language", "leave it out"
    if at.word in _SIGNS:
        return f"`{at.word}` is no part of the language", _SIGNS[at.word]
    return None
