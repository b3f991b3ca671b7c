"""How grave a finding is. A file of its own, so that help need not load what findings are made of."""

from __future__ import annotations

from enum import Enum


class Severity(Enum):
    ERROR = "error"
    WARNING = "warning"
    NOTE = "note"
