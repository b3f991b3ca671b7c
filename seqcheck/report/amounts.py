"""Times, margins and counts in words and in aligned columns.

Takes whole microseconds, None where a time is open; gives exact figures, nothing rounded.
"""

from __future__ import annotations

from collections.abc import Sequence

from seqcheck.language.durations import format_duration
from seqcheck.machine.findings import Duration

OPEN = "open"
#: Marks bounds that are safe and maybe not exact.
WIDE = "wide"
MAYBE_WIDE = " (safe, maybe wide)"
ADDED_UP = "safe: added up over states with something under way, so that what can be may lie closer together"
#: The head of the column of such marks.
BOUNDS = "bounds"
HANGS_ON = "hangs on signals from outside, or on how often a way goes back"


def milliseconds(values: Sequence[int | None], decimals: int | None = None) -> tuple[str, ...]:
    """Each value in milliseconds, all with the same count of decimals (as few as keep them all exact), so that they
    line up when set to the right; ``open`` for None."""
    places = decimals_of(values) if decimals is None else decimals
    return tuple(OPEN if value is None else _milliseconds(value, places) for value in values)


def decimals_of(values: Sequence[int | None]) -> int:
    """The least count of decimals (0 to 3) that shows every one of these microseconds exactly in milliseconds."""
    known = [value for value in values if value is not None]
    return next((places for places in range(3) if all(value % 10 ** (3 - places) == 0 for value in known)), 3)


def spelled_range(duration: Duration) -> str:
    """``1.905 s to 2.374 s, typically 2.1395 s``; says where bounds are safe and maybe not exact."""
    return _spelled_range(duration) + ("" if duration.exact else MAYBE_WIDE)


def _spelled_range(duration: Duration) -> str:
    least, typical = format_duration(duration.least), format_duration(duration.typical)
    if duration.greatest is None:
        return f"at least {least}, typically {typical}, at most {OPEN} ({HANGS_ON})"
    if duration.least == duration.greatest:
        return f"always {least}"
    return f"{least} to {format_duration(duration.greatest)}, typically {typical}"


def marks_of(times: Sequence[Duration]) -> Sequence[tuple[str, ...]]:
    """What a column of marks says of each; nothing, not even a column, where all are exact."""
    return [() if all(one.exact for one in times) else ("" if time.exact else WIDE,) for time in times]


def counted(count: int, noun: str) -> str:
    """``1 error``, ``2 errors``."""
    return f"{count} {noun}" if count == 1 else f"{count} {noun}s"


def _milliseconds(value: int, places: int) -> str:
    whole, rest = divmod(abs(value), 1000)
    sign = "-" if value < 0 else ""
    return f"{sign}{whole}.{rest:03d}"[: None if places == 3 else places - 3] if places else f"{sign}{whole}"
