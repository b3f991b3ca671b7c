"""Where something stands in a text: lines and columns count from 1, the end is behind the last character."""

from __future__ import annotations

from typing import NamedTuple


class Place(NamedTuple):
    """A plain tuple: there are some for every word of a text, and they are parts of keys."""

    file: str
    line: int
    column: int
    end_line: int
    end_column: int
