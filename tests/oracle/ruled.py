"""Random rules over all that there is in a machine: conditions of one to three terms, on any device, step or flag.

The machines are those of ``whole``, their own rules left out. Most rules are nonsense to a practitioner, and many are
broken: what matters is that the report says so, and by how much.
"""

from __future__ import annotations

import random

from seqcheck.language.read import read_machine
from seqcheck.language.source import Source
from seqcheck.machine.model import Machine, steps_of
from tests.oracle.whole import whole_text

RULES = 5
#: Rules come from other draws than the machine that they stand in.
_APART = 77


def ruled_text(seed: int) -> str:
    """The same text for the same seed."""
    lines = [line for line in whole_text(seed).split("\n") if not line.startswith(("never", "limit"))]
    text = "\n".join(lines)
    machine = read_machine(Source("random.steps", text))
    assert isinstance(machine, Machine)
    draw = random.Random(seed + _APART)
    terms = _terms(machine)
    return text + "\n".join(_rule(draw, terms) for _ in range(RULES)) + "\n"


def _terms(machine: Machine) -> list[str]:
    named = [*machine.coils, *machine.outputs, *machine.sensors, *machine.flags, *machine.signals]
    return [
        *(f"{one}.{aspect}" for one in machine.cylinders for aspect in ("extended", "retracted", "moving", "between")),
        *(f"{one}.{aspect}" for one in machine.valves for aspect in ("a", "b", "shifting")),
        *named,
        *(step.name for sequence in machine.sequences for step in steps_of(sequence)),
    ]


def _rule(draw: random.Random, terms: list[str]) -> str:
    time = f"{draw.randint(1_000, 900_000)} us"
    if draw.random() < 0.55:
        return f"never {_condition(draw, terms, 3)}" + (f" for {time}" if draw.random() < 0.5 else "")
    least = "1 us.." if draw.random() < 0.2 else ""
    return f"limit from {_condition(draw, terms, 2)} to {_condition(draw, terms, 2)} {least}{time}"


def _condition(draw: random.Random, terms: list[str], most: int) -> str:
    parts = [("not " if draw.random() < 0.3 else "") + draw.choice(terms) for _ in range(draw.randint(1, most))]
    return draw.choice((" and ", " and ", " or ")).join(parts)
