"""``stale-accept``, and what it is about: comments that accept the findings of a line.

An accepted finding stays what it is and says why it is accepted. A comment that accepts nothing is a finding itself:
what it was written for may have been mended, or may have moved away. Where the sequence gets stuck, nobody can tell.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace

from seqcheck.checks.check import Check, Sight
from seqcheck.checks.standstill import DEAD_END, ENDLESS_LOOP
from seqcheck.machine.accepts import Accept
from seqcheck.machine.findings import Finding, Severity

CHECK = Check("stale-accept", Severity.WARNING, "a comment accepts what is not found any more")


def with_reasons(findings: Iterable[Finding], accepts: Iterable[Accept]) -> list[Finding]:
    """The findings, each with the reason of the comment that accepts it, if one does."""
    reasons = {(one.kind, one.line): one.reason for one in accepts}
    return [replace(one, accepted=reasons.get((one.kind, one.place.line))) for one in findings]


def stale_accepts(findings: Iterable[Finding], accepts: Iterable[Accept]) -> tuple[Finding, ...]:
    """The comments that accept none of all the findings of a text."""
    found = {(one.kind, one.place.line) for one in findings}
    if any(kind in (DEAD_END.kind, ENDLESS_LOOP.kind) for kind, _ in found):
        return ()
    return tuple(_stale(one) for one in accepts if (one.kind, one.line) not in found)


def _stale(accept: Accept) -> Finding:
    message = f"this comment accepts nothing: there is no {accept.kind} in the line that it speaks of"
    mend = "take the comment out, or put it on the finding's line or right before it"
    return CHECK.finding(Sight(accept.kind, None, accept.place, message, mend=mend))
