"""Sequences: steps and what holds them together."""

from __future__ import annotations

from enum import Enum

from seqcheck.machine.conditions import Condition
from seqcheck.machine.places import Place
from seqcheck.machine.records import record


class CommandKind(Enum):
    ON = "on"
    SET = "set"
    RESET = "reset"
    PULSE = "pulse"


@record
class Command:
    """``target`` is a coil, an output or a flag; ``duration`` (us) belongs to a pulse."""

    kind: CommandKind
    target: str
    duration: int | None
    place: Place


@record
class Watchdog:
    """``target`` is the step it goes to (``within .. else``), None where the sequence stops."""

    within: int
    target: str | None
    place: Place


@record
class Move:
    """One cylinder of a motion step."""

    cylinder: str
    out: bool
    place: Place


@record
class Step:
    """``name`` is qualified (``main.raise``). A motion step (``clamp+``) carries its ``moves`` beside the commands
    and the exit that they come to. ``until`` is None where the exit is a dwell or one round."""

    name: str
    label: str | None
    commands: tuple[Command, ...]
    until: Condition | None
    steady: int | None
    dwell: int | None
    watchdog: Watchdog | None
    moves: tuple[Move, ...]
    place: Place


@record
class Together:
    branches: tuple[tuple[Item, ...], ...]
    place: Place


@record
class Choice:
    """One ``when``; ``condition`` is None for ``otherwise``."""

    condition: Condition | None
    items: tuple[Item, ...]
    place: Place


@record
class Choose:
    choices: tuple[Choice, ...]
    watchdog: Watchdog | None
    place: Place


@record
class Repeat:
    times: int
    items: tuple[Item, ...]
    place: Place


@record
class Jump:
    target: str
    place: Place


Item = Step | Together | Choose | Repeat | Jump


@record
class Sequence:
    """After the last item the first is active again, unless the sequence runs ``once``."""

    name: str
    label: str | None
    once: bool
    items: tuple[Item, ...]
    place: Place
