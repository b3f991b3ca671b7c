"""Exit statuses, and what they are made of.

Takes reports and what ``--fail-on`` says; gives the status. Refuses, in words, what is no severity and no kind.
"""

from __future__ import annotations

from collections.abc import Sequence

from seqcheck.arguments import NEVER, WRONG_ARGUMENTS

TYPE_CHECKING = False  # As typing has it: help does without loading that.
if TYPE_CHECKING:
    # Help does without the records of findings.
    from seqcheck.machine.findings import Finding, Report

FINE = 0
FOUND = 1
UNREADABLE = WRONG_ARGUMENTS

STATUSES = (
    "Exit status: 0 nothing found at or above --fail-on; 1 something found; 2 the text, a timing sheet, a file or an"
    " option could not be read, or the report not be written."
)


def exit_status(reports: Sequence[Report], fail_on: Sequence[str]) -> int:
    """``UNREADABLE`` if any file was; else ``FOUND`` if anything found counts for ``fail_on``."""
    if any(report.verdict == "unreadable" for report in reports):
        return UNREADABLE
    return FOUND if any(failing(finding, fail_on) for report in reports for finding in report.findings) else FINE


def failing(finding: Finding, fail_on: Sequence[str]) -> bool:
    """Whether a finding counts: not accepted, and as severe as one of ``fail_on`` or more, or of a kind in it."""
    ranks = severities()
    as_severe = ranks[ranks.index(finding.severity.value) :]
    return finding.accepted is None and not {finding.kind, *as_severe}.isdisjoint(fail_on)


def severities() -> list[str]:
    from seqcheck.machine.severity import Severity

    return [severity.value for severity in Severity]


def ended(status: int, trouble: str | None) -> int:
    """The status, unless there was trouble, which is told."""
    if trouble is None:
        return status
    from seqcheck.report.delivery import complain

    complain(trouble)
    return UNREADABLE


def no_kind(fail_on: Sequence[str]) -> str | None:
    """What is wrong with a word of ``--fail-on``; the kinds are loaded only where one is not a severity."""
    words = [*severities(), NEVER]
    if set(fail_on) <= set(words):
        return None
    from seqcheck.checks.catalogue import CHECKS

    words += [check.kind for check in CHECKS]
    unknown = next((word for word in fail_on if word not in words), None)
    if unknown is None:
        return None
    told = advice(unknown, words, f"there are {', '.join(words)}")
    return f"--fail-on: {unknown} is no severity and no kind of finding; {told}"


def advice(word: str, words: Sequence[str], otherwise: str) -> str:
    import difflib

    near = difflib.get_close_matches(word, words, 1, 0.6)
    return f"did you mean {near[0]}?" if near else otherwise
