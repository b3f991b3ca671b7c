"""The pages of ``explain``: one kind of finding, or the list of all.

Takes explanations; gives the text of an 80-column page. Lays it out without rich, whose loading takes longer than
everything else here.
"""

from __future__ import annotations

import textwrap
from collections.abc import Iterable, Sequence

from seqcheck.checks.explain import Explanation

_WIDTH = 80
_INDENT = "    "


def render_explanation(one: Explanation) -> str:
    """What the kind means, the sequence that shows it with what is said of it, and the mended one."""
    blocks = (
        _filled(f"{one.kind} ({one.severity.value}): {one.title}"),
        *_paragraphs(one.meaning),
        "A sequence that shows it:",
        textwrap.indent(one.faulty.rstrip(), _INDENT),
        _filled(f"seqcheck says: {one.says}"),
        *_paragraphs(f"Mended. {one.how}"),
        textwrap.indent(one.mended.rstrip(), _INDENT),
    )
    return "\n\n".join(blocks) + "\n"


def render_list(every: Sequence[Explanation]) -> str:
    """One line for each kind."""
    kinds, severities = _padded(one.kind for one in every), _padded(one.severity.value for one in every)
    rows = zip(kinds, severities, every, strict=True)
    lines = [f"{kind}  {severity}  {one.title}" for kind, severity, one in rows]
    return (
        "\n".join([*lines, "", "seqcheck explain KIND shows what it means, with a sequence and the mended one."]) + "\n"
    )


def _paragraphs(prose: str) -> Iterable[str]:
    return (_filled(paragraph) for paragraph in prose.split("\n\n"))


def _filled(text: str) -> str:
    return textwrap.fill(" ".join(text.split()), _WIDTH, break_on_hyphens=False)


def _padded(words: Iterable[str]) -> list[str]:
    found = list(words)
    width = max(map(len, found), default=0)
    return [word.ljust(width) for word in found]
