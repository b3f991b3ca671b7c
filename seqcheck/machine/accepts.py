"""Findings that a text says it can live with."""

from __future__ import annotations

from seqcheck.machine.places import Place
from seqcheck.machine.records import record


@record
class Accept:
    """A comment ``# accept KIND: reason``. ``line`` is the one whose findings it accepts; ``place`` is its own."""

    kind: str
    reason: str
    line: int
    place: Place
