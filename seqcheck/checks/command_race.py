"""``command-race``: branches that run together work one coil, and which comes last is a matter of time."""

from __future__ import annotations

from collections.abc import Iterator
from functools import partial
from itertools import pairwise

from seqcheck.checks.check import Check, Obligation, Wording
from seqcheck.checks.study import Study
from seqcheck.engine.branches import Branches
from seqcheck.engine.trace import Effect, Touch
from seqcheck.machine.findings import Severity


def _obligations(study: Study) -> Iterator[Obligation]:
    branches = Branches(study.machine)
    for target, touches in study.trace.touches.items():
        in_order = sorted(touches, key=lambda touch: study.time(touch.event))
        for first, second in pairwise(in_order):
            if first.conflicts_with(second) and branches.parallel(first.origin.step, second.origin.step):
                yield _obligation(target, first, second)


def _obligation(target: str, first: Touch, second: Touch) -> Obligation:
    origin, before = second.origin, first.origin
    message = f"{before.step} and {origin.step} both work {target}, and which comes last is a matter of"
    return Obligation(
        target,
        origin.step,
        origin.place,
        first.event,
        second.event,
        partial(
            Wording, f"{message} {{by}}", lambda by: f"let {origin.step} wait for {before.step}", f"{message} time"
        ),
        # In one and the same read the reset wins whoever comes first.
        1 if first.effect is not Effect.BEGINS else 0,
    )


CHECK = Check("command-race", Severity.ERROR, "branches work one coil and time decides which wins", _obligations)
