"""``command-race``: branches that run together work one coil, and which comes last is a matter of time."""

from __future__ import annotations

from collections.abc import Iterator
from itertools import pairwise

from seqcheck.checks.check import Check, Obligation, Wording
from seqcheck.checks.study import Study
from seqcheck.engine.trace import Effect, Touch
from seqcheck.machine.findings import Severity
from seqcheck.machine.model import Machine
from seqcheck.machine.places import Place
from seqcheck.machine.steps import Item, Repeat, Step, Together

#: For each step, the branches in which it lies: which branch of which ``together``.
_Branches = dict[str, dict[Place, int]]


def _obligations(study: Study) -> Iterator[Obligation]:
    branches = _branches_of(study.machine)
    for target, touches in study.trace.touches.items():
        in_order = sorted(touches, key=lambda touch: study.time(touch.origin.read.event))
        for first, second in pairwise(in_order):
            if _conflict(first, second) and _parallel(branches, first.origin.step, second.origin.step):
                yield _obligation(target, first, second)


def _conflict(first: Touch, second: Touch) -> bool:
    """One begins what the other ends, at different reads."""
    begins = [touch.effect is Effect.BEGINS for touch in (first, second)]
    return begins[0] != begins[1] and first.origin.read is not second.origin.read


def _obligation(target: str, first: Touch, second: Touch) -> Obligation:
    origin, before = second.origin, first.origin
    message = f"{before.step} and {origin.step} both work {target}, and which comes last is a matter of {{by}}"
    return Obligation(
        target,
        origin.step,
        origin.place,
        before.read.event,
        origin.read.event,
        Wording(message, lambda by: f"let {origin.step} wait for {before.step}"),
        # In one and the same read the reset wins whoever comes first.
        1 if first.effect is not Effect.BEGINS else 0,
    )


def _parallel(branches: _Branches, one: str, other: str) -> bool:
    return any(branches[other].get(together, branch) != branch for together, branch in branches[one].items())


def _branches_of(machine: Machine) -> _Branches:
    found: _Branches = {}
    for sequence in machine.sequences:
        _collect(sequence.items, {}, found)
    return found


def _collect(items: tuple[Item, ...], inside: dict[Place, int], found: _Branches) -> None:
    for item in items:
        match item:
            case Step():
                found[item.name] = inside
            case Together(branches, place):
                for number, branch in enumerate(branches):
                    _collect(branch, {**inside, place: number}, found)
            case Repeat(_, inner):
                _collect(inner, inside, found)
            case _:
                pass


CHECK = Check("command-race", Severity.ERROR, "branches work one coil and time decides which wins", _obligations)
