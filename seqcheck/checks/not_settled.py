"""``not-settled``: the machine does not come round to a state that was there before, so that not every run was played.

Sequences of one part that never wait for one another stand to each other in ever new ways: nothing that is proved of
the first rounds need hold later.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from seqcheck.checks.check import Check, Sight
from seqcheck.checks.study import Study
from seqcheck.engine.conditions import aspect_of
from seqcheck.engine.knowledge import asked_conditions
from seqcheck.machine.conditions import TermKind, terms_of
from seqcheck.machine.findings import Severity
from seqcheck.machine.model import Machine, steps_of


def _not_settled(studies: Sequence[Study]) -> Iterator[Sight]:
    if studies[0].whole or any(study.trace.stepless for study in studies):
        return
    machine = studies[0].machine
    names = [sequence.name for sequence in machine.sequences]
    rounds = min(len(study.trace.cycles) for study in studies)
    played = f"only what was played is proved, {rounds} rounds of {names[0]} at least"
    if len(names) > 1:
        message = f"{' and '.join(names)} come to ever new states: {played}"
        yield Sight(names[0], None, machine.sequences[1].place, message, mend=_tie(machine))
    else:
        message = f"{names[0]} comes to ever new states: {played}"
        mend = "fewer branches side by side, or fewer pulses that outlast their steps, leave fewer states"
        yield Sight(names[0], None, machine.sequences[0].place, message, mend=mend)


def _tie(machine: Machine) -> str:
    """Which step could wait for which: the first of a sequence that asks nothing of the others. To wait until it is
    active would find it so from before; a step that is never left for another one cannot be waited for."""
    first, *others = machine.sequences
    steps = [one.name for one in steps_of(first)]
    free = [one.name for one in others if not _asks_of(machine, one.name)] or [others[0].name]
    if len(steps) < 2:
        return "let one sequence wait for a step of the other"
    begins = f"say `until not {steps[0]}` and then `until {steps[0]}`"
    return f"let {free[0]} wait once a round for a step of {first.name} to begin, {begins}"


def _asks_of(machine: Machine, name: str) -> bool:
    """Whether any condition of this sequence names a step of another one."""
    own = f"{name}."
    sequences = tuple(one for one in machine.sequences if one.name == name)
    asked = (aspect_of(term) for one in asked_conditions(machine, sequences) for term in terms_of(one))
    return any(kind is TermKind.STEP and not subject.startswith(own) for kind, subject, _ in asked)


CHECK = Check(
    "not-settled", Severity.WARNING, "ever new states come up, and not every run was played", omissions=_not_settled
)
