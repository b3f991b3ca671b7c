"""Where a cycle of a sequence begins, and how long each has taken."""

from __future__ import annotations

from seqcheck.machine.conditions import TermKind, terms_of
from seqcheck.machine.devices import OutsideSignal
from seqcheck.machine.model import Machine
from seqcheck.machine.steps import Repeat, Sequence, Step
from tests.oracle.controller import ControllerPlay
from tests.oracle.records import Cycle


def waiting_first_step(machine: Machine, sequence: Sequence) -> str | None:
    """The first step, if it waits for a signal from outside: then a cycle counts from leaving it."""
    item = sequence.items[0]
    while isinstance(item, Repeat):
        item = item.items[0]
    if not isinstance(item, Step):
        return None
    waits = any(
        term.kind is TermKind.SIGNAL and isinstance(machine.signals[term.subject], OutsideSignal)
        for term in terms_of(item.until)
    )
    return item.name if waits else None


class CycleBook:
    """Follows the cycles of one sequence: ``begins`` by the number of the cycle, None where it has not begun yet."""

    def __init__(self, machine: Machine, sequence: Sequence, controller: ControllerPlay) -> None:
        self._sequence = sequence
        self._controller = controller
        self._waits = waiting_first_step(machine, sequence)

    def begin_of(self, cycle: int) -> int | None:
        start = self._controller.cycle_starts[self._sequence.name][cycle]
        if self._waits is None:
            return start
        visits = self._controller.visits_of(self._waits)
        return next((visit.left for visit in visits if visit.cycle == cycle), None)

    def begun(self) -> tuple[int, int | None]:
        """The cycle under way and when what counts of it has begun."""
        cycle = len(self._controller.cycle_starts[self._sequence.name]) - 1
        return cycle, self.begin_of(cycle)

    def finished(self) -> tuple[Cycle, ...]:
        starts = self._controller.cycle_starts[self._sequence.name]
        cycles = []
        for cycle, end in enumerate(starts[1:]):
            begin = self.begin_of(cycle)
            cycles.append(Cycle(starts[cycle], starts[cycle] if begin is None else begin, end))
        return tuple(cycles)
