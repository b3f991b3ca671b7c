"""Which part of a machine a chart shows, where its sequences do not all hang together.

Takes an examined machine and what was asked for; gives the part to show, and a note on what is left out. Parts that
share nothing have no time in common, so that one chart shows one part. Refuses, in words, what no single part has.
"""

from __future__ import annotations

from collections.abc import Iterator

from seqcheck.chart.asked import Part, Unplaceable, step_named, wishes_of
from seqcheck.machine.model import Machine, items_of
from seqcheck.pipeline import Studied, StudiedPart


def part_shown(studied: Studied, asked: Part) -> StudiedPart:
    """The part that has all that is asked for by name; the first where nothing is. Raises ``Unplaceable``."""
    left = list(studied.parts)
    for option, name in _asked(studied.machine, asked):
        having = [part for part in left if name in _names(part.machine)]
        if not having and any(name in _names(part.machine) for part in studied.parts):
            raise Unplaceable(
                f"{option}: this shares nothing with {_sequences(left[0].machine)}, which the rest asks for, so that"
                " there is no time in common, and no chart of both"
            )
        left = having or left
    return left[0]


def left_out(studied: Studied, shown: StudiedPart) -> Iterator[str]:
    """A note on the sequences of the other parts, if there are any."""
    others = [_sequences(part.machine) for part in studied.parts if part is not shown]
    if others:
        several = len(others) > 1 or "," in others[0]
        yield (
            f"Not shown: {', '.join(others)}, which {'share' if several else 'shares'} nothing with"
            f" {_sequences(shown.machine)}, so that there is no time in common; --anchor STEP shows the sequence of"
            " that step."
        )


def _asked(machine: Machine, asked: Part) -> Iterator[tuple[str, str]]:
    """Each option that names something, as it was written, with the sequence or the device that it is about."""
    for option, step in (("--from", asked.from_step), ("--to", asked.to_step), ("--anchor", asked.anchor)):
        if step:
            yield f"{option} {step}", step_named(machine, step).partition(".")[0]
    for wish in wishes_of(machine, asked.choices):
        yield (
            f"--choice {wish.asked}",
            next(one.name for one in machine.sequences if any(item is wish.choose for item in items_of(one.items))),
        )
    for row in asked.rows:
        yield f"--rows {row}", row


def _names(part: Machine) -> set[str]:
    """What may have a row in its chart."""
    devices = (part.valves, part.coils, part.outputs, part.cylinders, part.sensors, part.signals, part.flags)
    return {*(one.name for one in part.sequences), *(name for mapping in devices for name in mapping)}


def _sequences(part: Machine) -> str:
    return ", ".join(one.name for one in part.sequences)
