"""The tool and its rules, as SARIF 2.1.0 says them: one rule for each kind of finding, with its help.

Takes kinds; gives JSON objects. What a kind means is told in the words of ``seqcheck explain``.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from seqcheck.checks.catalogue import CHECKS
from seqcheck.checks.explain import Explanation, explanation
from seqcheck.machine.findings import Severity

UNREADABLE_INPUT = "unreadable-input"

Json = dict[str, object]


def rule_numbers(met: Iterable[str]) -> dict[str, int]:
    """The number of each kind: those of the catalogue in its order, then any other that was met."""
    kinds = dict.fromkeys(check.kind for check in CHECKS) | dict.fromkeys(sorted(met))
    return {kind: number for number, kind in enumerate(kinds)}


def driver(kinds: Sequence[str], version: str) -> Json:
    return {
        "name": "seqcheck",
        "version": version,
        "semanticVersion": version,
        "shortDescription": {"text": "Proves the timing of valve sequences for all times within their tolerances."},
        "rules": [_rule(kind) for kind in kinds],
        "notifications": [
            {
                "id": UNREADABLE_INPUT,
                "shortDescription": {"text": "A text or a timing sheet could not be read, so no timing was proved."},
                "defaultConfiguration": {"level": "error"},
            }
        ],
    }


def _rule(kind: str) -> Json:
    titles = {check.kind: (check.title, check.severity) for check in CHECKS}
    title, severity = titles.get(kind, (kind, Severity.WARNING))
    rule: Json = {
        "id": kind,
        "shortDescription": {"text": _sentence(title)},
        "defaultConfiguration": {"level": severity.value},
    }
    known = explanation(kind)
    if known is None:
        return rule | {"fullDescription": {"text": _sentence(title)}, "help": {"text": _sentence(title)}}
    return rule | {
        "fullDescription": {"text": _flowing(known.meaning)},
        "help": {"text": _help(known), "markdown": _markdown(known)},
    }


def _help(known: Explanation) -> str:
    return (
        f"{_flowing(known.meaning)}\n\nA sequence that shows it:\n\n{known.faulty}\n({known.says}.)\n\n"
        f"Mended: {_flowing(known.how)}\n\n{known.mended}"
    )


def _markdown(known: Explanation) -> str:
    return (
        f"{known.meaning}\n\n**A sequence that shows it**\n\n```\n{known.faulty}```\n\n> {known.says}\n\n"
        f"**Mended.** {known.how}\n\n```\n{known.mended}```\n"
    )


def _flowing(prose: str) -> str:
    """Paragraphs without the line breaks of the file that they stand in."""
    return "\n\n".join(" ".join(paragraph.split()) for paragraph in prose.split("\n\n"))


def _sentence(words: str) -> str:
    return f"{words[:1].upper()}{words[1:].rstrip('.')}."
