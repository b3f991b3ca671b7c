"""What each kind of finding means, with a sequence that shows it and the mended one.

Takes the name of a kind; gives the explanation from the file ``explanations/KIND.md`` beside this one, None for a kind
that has none. Loads nothing that examines: help must come at once.
"""

from __future__ import annotations

import os
import re

from seqcheck.machine.severity import Severity

_FOLDER = os.path.join(os.path.dirname(os.path.realpath(__file__)), "explanations")
_ENDING = ".md"
_WRITTEN = re.compile(
    r"# (?P<kind>\S+)\n\n(?P<severity>\w+): (?P<title>[^\n]+)\n\n(?P<meaning>.+)\n\n"
    r"## A sequence that shows it\n\n```steps\n(?P<faulty>.+)```\n\n> (?P<says>[^\n]+)\n\n"
    r"## Mended\n\n(?P<how>.+)\n\n```steps\n(?P<mended>.+)```\n",
    re.DOTALL,
)


class Explanation:
    """``meaning`` and ``how`` (what was done to mend it) are prose, paragraphs apart by an empty line. ``faulty`` and
    ``mended`` are whole texts; ``says`` is the message of the first finding in the faulty one. (A plain class: to load
    what makes others takes longer than all else here.)"""

    def __init__(
        self, kind: str, severity: Severity, title: str, meaning: str, faulty: str, says: str, how: str, mended: str
    ) -> None:
        self.kind = kind
        self.severity = severity
        self.title = title
        self.meaning = meaning
        self.faulty = faulty
        self.says = says
        self.how = how
        self.mended = mended


def explained_kinds() -> tuple[str, ...]:
    """Every kind that has an explanation, by name."""
    return tuple(sorted(file.removesuffix(_ENDING) for file in os.listdir(_FOLDER) if file.endswith(_ENDING)))


def explanation(kind: str) -> Explanation | None:
    if kind not in explained_kinds():
        return None
    with open(os.path.join(_FOLDER, f"{kind}{_ENDING}"), encoding="utf-8") as file:
        written = _WRITTEN.fullmatch(file.read())
    if written is None or written["kind"] != kind:
        raise ValueError(f"the explanation of {kind} is not laid out as the others are")
    _, severity, title, meaning, faulty, says, how, mended = written.groups()
    return Explanation(kind, Severity(severity), title, meaning, faulty, says, how, mended)


def explanations() -> tuple[Explanation, ...]:
    """All of them: errors first, then warnings, then notes, each by name."""
    found = [one for kind in explained_kinds() if (one := explanation(kind)) is not None]
    severities = list(Severity)
    return tuple(sorted(found, key=lambda one: severities.index(one.severity)))
