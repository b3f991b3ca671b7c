"""Comments that accept a finding: ``# accept KIND: reason``.

Takes a text and the kinds of findings there are; gives what its comments accept, and for which line. Refuses a kind
that does not exist, a missing reason, and the same kind twice for one line. What stands in quotes is no comment, and
prose that only begins with the word is left alone.
"""

from __future__ import annotations

import re
from collections.abc import Collection, Sequence

from seqcheck.language.problems import Problems, Ruler, short
from seqcheck.language.source import Source
from seqcheck.machine.accepts import Accept
from seqcheck.machine.places import Place

MOST_SLIPS = 20

_COMMENT = re.compile(r'"[^"\n]*"?|(?P<comment>#[^\n]*)')
_ACCEPT = re.compile(r"#[ \t]*accept(?!\w)(?P<said>[ \t]*(?P<kind>[\w-]*)[ \t]*(?P<colon>:?)[ \t]*(?P<reason>[^\n]*))")
_ANOTHER = re.compile(r"#[ \t]*accept(?!\w)")
_ALONE = re.compile(r"[\s\ufeff]*#")
_FORM = "write `# accept KIND: why it does no harm here`"


def accepts_of(source: Source, kinds: Collection[str] | None, problems: Problems) -> tuple[Accept, ...]:
    """What the comments of a text accept, in their order; ``kinds`` None: any kind may stand there. A comment behind
    a statement speaks of its own line; one that stands alone of the next line that does not begin with a comment."""
    if "accept" not in source.text:
        return ()
    reader = _Reader(source, kinds, problems)
    for found in _COMMENT.finditer(source.text):
        written = _ACCEPT.match(source.text, found.start()) if found["comment"] else None
        if written:
            reader.read(written)
        if reader.slips == MOST_SLIPS:
            break
    return tuple(reader.accepts.values())


class _Reader:
    """Reads one comment after the other; at most ``MOST_SLIPS`` of them are refused."""

    def __init__(self, source: Source, kinds: Collection[str] | None, problems: Problems) -> None:
        self.accepts: dict[tuple[str, int], Accept] = {}
        self.slips = 0
        self._ruler = Ruler(source.name, source.text)
        self._lines_spoken_of = _lines_spoken_of(source.text.split("\n"))
        self._kinds = kinds
        self._problems = problems

    def read(self, found: re.Match[str]) -> None:
        kind, colon, reason = found["kind"], found["colon"], found["reason"].strip()
        if not kind and (colon or not found["said"].strip()):
            self._refuse(found, "this comment does not say which kind of finding it accepts", _FORM)
        elif kind and colon:
            self._read_kind(found, kind, reason)
        elif kind and self._is_kind(kind):
            self._refuse(found, f"accepting {kind} needs a colon and a reason", _FORM)
        elif colon_later := found["said"].find(":") + 1:
            joined = re.sub(r"\W+", "-", found["said"][: colon_later - 1].strip())
            if self._is_kind(joined):
                self._refuse(found, f"a kind of finding is written as the report names it: {joined}", _FORM)

    def _read_kind(self, found: re.Match[str], kind: str, reason: str) -> None:
        place = self._place(found)
        line = self._lines_spoken_of[place.line - 1]
        if self._kinds is not None and kind not in self._kinds:
            advice = self._problems.did_you_mean(kind, self._kinds, "the report names the kind of every finding")
            self._refuse(found, f"no kind of finding `{short(kind)}` can be accepted", advice)
        elif not re.search(r"\w", reason):
            self._refuse(found, f"accepting {kind} needs a reason", _FORM)
        elif _ANOTHER.search(reason):
            self._refuse(found, "a comment accepts one kind only", "write a comment for each, one a line")
        elif (kind, line) in self.accepts:
            first = self.accepts[kind, line].place.line
            self._refuse(found, f"{kind} is accepted twice for line {line}, first in line {first}", "leave one out")
        else:
            self.accepts[kind, line] = Accept(kind, reason, line, place)

    def _is_kind(self, word: str) -> bool:
        return self._kinds is not None and word in self._kinds

    def _refuse(self, found: re.Match[str], message: str, advice: str | None) -> None:
        """At the kind where there is one, else at the whole comment."""
        place = self._ruler.place(*found.span("kind")) if found["kind"] else self._place(found)
        self._problems.report(place, message, advice)
        self.slips += 1

    def _place(self, found: re.Match[str]) -> Place:
        return self._ruler.place(found.start(), found.start() + len(found[0].rstrip()))


def _lines_spoken_of(lines: Sequence[str]) -> list[int]:
    """For each line, the number of the one that a comment in it speaks of."""
    spoken_of = [0] * len(lines)
    goes_on = False
    for row in range(len(lines) - 1, -1, -1):
        alone = _ALONE.match(lines[row]) is not None
        spoken_of[row] = row + 1 if not alone else spoken_of[row + 1] if goes_on else row + 2
        goes_on = alone
    return spoken_of
