"""Reads of the controller, and what leads to them."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from tests.oracle.outside import Arrival

Past = frozenset[tuple[str, int]]
"""The strokes, by cylinder and number, of which a sensor has been waited for before something and by its causes."""


@dataclass(frozen=True, slots=True)
class Cause:
    """Of a coil's change: the step whose command or exit it is, None where none is by itself, and what led to it."""

    step: str | None
    past: Past


@dataclass(slots=True, eq=False)
class Read:
    """One read. ``passed``: its ``floor`` is over, what it changed is known. ``write`` is when its changes go out.
    ``arrivals`` are the signals from outside, by name and value, on their way to what begins to wait at this read."""

    number: int
    time: int
    past: Past = frozenset()
    passed: bool = False
    floor: int = 0
    write: int = 0
    arrivals: dict[tuple[str, bool], Arrival] = field(default_factory=dict)
