"""Times in the words of a finding."""

from __future__ import annotations

from seqcheck.language.durations import format_duration

#: Where nothing limits it.
UNLIMITED = "an unlimited time"
#: Where a time is more than can be, perhaps.
OR_LESS = "or less or not at all: it is added up over states with something under way"


def in_time(time_us: int) -> str:
    return format_duration(time_us)


def round_up(time_us: int) -> str:
    """The next whole millisecond: what one would write into the text to be safe."""
    return format_duration(-(-time_us // 1000) * 1000)


def round_down(time_us: int) -> str:
    """The last whole millisecond before it, where there is one."""
    return format_duration(time_us // 1000 * 1000 or time_us)
