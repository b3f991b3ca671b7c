"""What a comparison gives back: what is new, gone or changed between an old and a new machine, as plain values.

Times are whole microseconds. An old or new value that is not there at all is told by the difference (``NEW``,
``GONE``), so that a margin or a duration of None keeps its meaning: an outside signal leaves it open.
"""

from __future__ import annotations

from enum import Enum

from seqcheck.machine.findings import Duration, Finding, Problem
from seqcheck.machine.records import record


class Difference(Enum):
    NEW = "new"
    GONE = "gone"
    CHANGED = "changed"


class Part(Enum):
    """What of a text a change is about."""

    DEVICE = "device"
    TIME = "time"
    STEP = "step"
    RULE = "rule"


@record
class Change:
    """``name`` with its kind (``coil Y1``, ``step main.raise``). ``aspect``, ``old`` and ``new`` belong to what has
    changed; a new step says in ``new`` where it stands."""

    part: Part
    name: str
    difference: Difference
    aspect: str | None = None
    old: str | None = None
    new: str | None = None


@record
class FindingChange:
    """``finding`` as it is now, or as it was where it is gone; ``before`` where it was there already. ``worse``: it
    counts now, and did not before."""

    difference: Difference
    finding: Finding
    before: Finding | None
    worse: bool


@record
class MarginChange:
    """The tightest margin of one kind, subject and step. ``worse``: it shrank by more than is allowed."""

    difference: Difference
    kind: str
    subject: str
    step: str | None
    old_us: int | None
    new_us: int | None
    worse: bool

    @property
    def shrank(self) -> bool:
        return self.difference is Difference.CHANGED and loss(self.old_us, self.new_us) > 0


@record
class DurationChange:
    """A cycle, a cycle with one branch of a choice, or a step; ``old`` is None where it is new, ``new`` where it is
    gone. ``worse``: the greatest grew by more than is allowed."""

    name: str
    old: Duration | None
    new: Duration | None
    worse: bool


@record
class FileComparison:
    """One text before and after; a name is None where there was no such text, or is none any more. ``compared`` is
    False where one of the two could not be examined: then only ``changes`` may be told. ``left_out`` says what could
    not be held against each other, and why. ``stored``: of the old side there is but a stored report."""

    old: str | None
    new: str | None
    machine: str | None
    problems: tuple[Problem, ...] = ()
    compared: bool = True
    findings: tuple[FindingChange, ...] = ()
    margins: tuple[MarginChange, ...] = ()
    cycles: tuple[DurationChange, ...] = ()
    choices: tuple[DurationChange, ...] = ()
    steps: tuple[DurationChange, ...] = ()
    changes: tuple[Change, ...] = ()
    left_out: tuple[str, ...] = ()
    sheets: tuple[str, ...] = ()
    stored: bool = False

    @property
    def worse(self) -> tuple[FindingChange | MarginChange | DurationChange, ...]:
        """What makes the change worse, findings first."""
        judged: tuple[FindingChange | MarginChange | DurationChange, ...] = (
            *self.findings,
            *self.cycles,
            *self.margins,
        )
        return tuple(one for one in judged if one.worse)

    @property
    def verdict(self) -> str:
        """``unreadable``, ``worse``, ``changed`` or ``same``."""
        if self.problems:
            return "unreadable"
        if self.worse:
            return "worse"
        there = self.findings or self.margins or self.cycles or self.choices or self.steps or self.changes
        return "changed" if there or self.old is None or self.new is None else "same"


def loss(old_us: int | None, new_us: int | None) -> float:
    """By how much a margin shrank (below 0: grew); one that an outside signal leaves open is below every other."""
    if old_us == new_us:
        return 0
    if old_us is None:
        return float("-inf")
    return float("inf") if new_us is None else old_us - new_us


def growth(old_us: int | None, new_us: int | None) -> float:
    """By how much a greatest time grew (below 0: fell); an open one is above every other."""
    return -loss(old_us, new_us) if old_us is not None and new_us is not None else loss(old_us, new_us)
