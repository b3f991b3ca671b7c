"""Which steps can run side by side.

Takes a machine; tells of two steps whether they lie in different sequences, or in different branches of one
``together``.
"""

from __future__ import annotations

from seqcheck.machine.model import Machine
from seqcheck.machine.places import Place
from seqcheck.machine.steps import Choose, Item, Jump, Repeat, Step, Together


class Branches:
    def __init__(self, machine: Machine) -> None:
        #: For each step the branch of each ``together`` in which it lies; its sequence counts as one of them.
        self._of: dict[str, dict[Place | None, int]] = {}
        for number, sequence in enumerate(machine.sequences):
            self._collect(sequence.items, {None: number})

    def parallel(self, one: str, other: str) -> bool:
        """Whether two steps, by qualified names, can be active at the same time."""
        return any(self._of[other].get(together, branch) != branch for together, branch in self._of[one].items())

    def _collect(self, items: tuple[Item, ...], inside: dict[Place | None, int]) -> None:
        for item in items:
            match item:
                case Step():
                    self._of[item.name] = inside
                case Together(branches, place):
                    for number, branch in enumerate(branches):
                        self._collect(branch, {**inside, place: number})
                case Repeat(_, inner):
                    self._collect(inner, inside)
                case Choose(choices):
                    for choice in choices:
                        self._collect(choice.items, inside)
                case Jump():
                    pass
