"""Rules: what must never be, and what may not take longer."""

from __future__ import annotations

from seqcheck.machine.conditions import Condition
from seqcheck.machine.places import Place
from seqcheck.machine.records import record


@record
class Never:
    """``tolerated`` (us): shorter than this is no break. ``text`` is the rule as it was written."""

    condition: Condition
    tolerated: int
    why: str | None
    text: str
    place: Place


@record
class CycleLimit:
    sequence: str
    greatest: int
    text: str
    place: Place


@record
class PathLimit:
    """From one condition becoming true to the next time that the other does; ``least`` is None where only the
    greatest is limited."""

    start: Condition
    end: Condition
    least: int | None
    greatest: int
    text: str
    place: Place


Rule = Never | CycleLimit | PathLimit
