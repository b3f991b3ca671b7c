"""Durations in writing: ``55.5 ms`` to whole microseconds and back.

Takes digits with a unit (``us``, ``ms``, ``s``, ``min``) and gives microseconds; refuses what is finer than one
microsecond or longer than 1000 hours. Formatting and parsing are inverse of each other.
"""

from __future__ import annotations

import re

UNITS = {"us": 1, "ms": 1_000, "s": 1_000_000, "min": 60_000_000}

#: Nothing on a machine takes over 1000 hours.
GREATEST_TIME = 1_000 * 60 * UNITS["min"]

_WRITTEN = re.compile(r"(-?)([0-9]+(?:\.[0-9]+)?) ?(us|ms|s|min)")
_MOST_DIGITS = 18


def whole_times(digits: str, times: int) -> tuple[int, int] | None:
    """``times`` the value of ``12.50``: what is whole of it, and what is left (0 where nothing is); None where it has
    more digits than any honest value needs."""
    whole, _, part = digits.partition(".")
    whole, part = whole.lstrip("0"), part.rstrip("0")
    if len(whole) > _MOST_DIGITS or len(part) > _MOST_DIGITS:
        return None
    parts: int = 10 ** len(part)
    return divmod(int((whole or "0") + part) * times, parts)


def time_from(digits: str, unit: str) -> int | str:
    """Microseconds of a number and its unit, or a sentence that says why there are none."""
    number = whole_times(digits, UNITS[unit])
    if number is None:
        return "this number has too many digits"
    time, left = number
    if number > (GREATEST_TIME, 0):
        return "this is over 1000 hours"
    return "this is finer than one microsecond" if left else time


def parse_duration(text: str) -> int | None:
    """Microseconds of a written duration, which may be negative; None where it is none."""
    written = _WRITTEN.fullmatch(text)
    if written is None:
        return None
    time = time_from(written[2], written[3])
    return None if isinstance(time, str) else -time if written[1] else time


def format_duration(us: int) -> str:
    """The shortest exact writing that reads well: ``-500 us``, ``55.5 ms``, ``1.2 s``, ``2 min``."""
    size = abs(us)
    if size == 0:
        return "0 ms"
    if size >= UNITS["min"] and size % UNITS["min"] == 0:
        unit = "min"
    elif size >= UNITS["s"]:
        unit = "s"
    else:
        unit = "ms" if size >= UNITS["ms"] else "us"
    whole, part = divmod(size, UNITS[unit])
    decimals = f".{part:0{len(str(UNITS[unit])) - 1}d}".rstrip("0") if part else ""
    return f"{'-' if us < 0 else ''}{whole}{decimals} {unit}"
