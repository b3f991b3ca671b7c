"""Where the parser stopped, and what could have stood there.

Takes the text around a slip and the terminals that would have been taken; gives words for them.
"""

from __future__ import annotations

import difflib
from collections.abc import Iterable

from seqcheck.language.problems import short
from seqcheck.machine.records import record

#: What the terminals that are no keywords stand for.
_MEANT = {
    "NAME": "a name",
    "STRING": 'a text in "quotes"',
    "ADDRESS": "an address such as %Q0.1",
    "NUMBER": "a number",
    "UNIT": "a unit (us, ms, s, min)",
    "PORTS": "ports/positions such as 5/2",
    "PLUS": "+",
    "MINUS": "-",
    "LBRACE": "{",
    "RBRACE": "}",
    "LPAR": "(",
    "RPAR": ")",
    "DOT": ".",
    "PERCENT": "%",
    "CENTRE": "centre",
    "__ANON_0": "..",
}
_UNSAID = {
    "ADDRESS",
    "STRING",
    "$END",
    "NTH",
    "RPAR_NTH",
    "PLUS_MINUS",
    "__ANON_0",
    "DOT",
    "PLUS",
    "MINUS",
    "AND",
    "OR",
    "LPAR",
}
_MOST_NAMED = 8


@record
class Slip:
    start: int
    end: int
    message: str
    advice: str | None


#: A message and what would be right.
Words = tuple[str, str | None]


@record
class Situation:
    """The place of a slip. ``word`` is empty at the end of the text; ``opened`` is the line of the innermost open
    brace of this statement."""

    text: str
    offset: int
    word: str
    accepted: frozenset[str]
    opened: int | None
    whole: str

    @property
    def before(self) -> str:
        """The text before the slip, as far as a rule looks back."""
        return self.text[max(0, self.offset - 60) : self.offset].rstrip()

    @property
    def ahead(self) -> str:
        """The text behind the word, as far as a rule looks ahead."""
        end = self.offset + len(self.word)
        return self.text[end : end + 60]

    @property
    def begins_line(self) -> bool:
        return not self.text[self.text.rfind("\n", 0, self.offset) + 1 : self.offset].strip()

    @property
    def gap(self) -> str:
        """The spaces right before the slip."""
        near = self.text[max(0, self.offset - 60) : self.offset]
        return near[len(near.rstrip()) :]

    @property
    def keywords(self) -> list[str]:
        return sorted(name.lower() for name in self.accepted if name.isalpha() and name not in _MEANT)


def near_word(word: str, candidates: Iterable[str], likeness: float = 0.7) -> str | None:
    """The candidate that was probably meant; none for a long word."""
    found = difflib.get_close_matches(word.lower(), list(candidates), 1, likeness) if len(word) < 40 else []
    return found[0] if found else None


def shown(word: str) -> str:
    return f"`{short(word)}`" if word.isprintable() else f"the character U+{ord(word[0]):04X}"


def expected(at: Situation) -> str | None:
    near = near_word(at.word, at.keywords)
    if near:
        return f"did you mean `{near}`?"
    said = at.accepted - _UNSAID or at.accepted & _MEANT.keys() | at.accepted & {"AND", "OR"}
    words = [_MEANT.get(name, name.lower()) for name in sorted(said)]
    if len(words) == 1 and at.word and "$END" not in at.accepted and (words[0] in "{)" or words[0].isalpha()):
        return f"write `{words[0]}` before it"
    if not words or len(words) > 2 * _MOST_NAMED:
        return None
    named = words[:_MOST_NAMED] + (["..."] if len(words) > _MOST_NAMED else [])
    return "here may stand: " + ", ".join(named)
