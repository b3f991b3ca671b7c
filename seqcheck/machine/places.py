"""Where something stands in a text: lines and columns count from 1, the end is behind the last character."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True, order=True)
class Place:
    file: str
    line: int
    column: int
    end_line: int
    end_column: int
