"""The smallest input that still shows a fault.

Takes an input with its fault, and a way to try others; gives an input from which no line and then no word can be taken
away any more, as far as a few hundred tries go.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import replace

from tests.fuzz.inputs import Input

MOST_TRIES = 400


def smallest(one: Input, shows: Callable[[Input], bool]) -> Input:
    tries = MOST_TRIES
    for pattern in (rb"(?<=\n)", rb"(?<=[\s{}])"):
        parts = re.split(pattern, one.text)
        size = len(parts) // 2
        while size and tries:
            at = 0
            while at < len(parts) and tries:
                tries -= 1
                less = replace(one, text=b"".join(parts[:at] + parts[at + size :]))
                if shows(less):
                    parts, one = parts[:at] + parts[at + size :], less
                else:
                    at += size
            size //= 2
    return one
