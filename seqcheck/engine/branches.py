"""Which steps can run side by side.

Takes a machine; gives, for each step, the branches of ``together`` in which it lies, and tells of two steps whether
they lie in different branches of one.
"""

from __future__ import annotations

from seqcheck.machine.model import Machine
from seqcheck.machine.places import Place
from seqcheck.machine.steps import Item, Repeat, Step, Together


class Branches:
    def __init__(self, machine: Machine) -> None:
        self._of: dict[str, dict[Place, int]] = {}
        for sequence in machine.sequences:
            self._collect(sequence.items, {})

    def parallel(self, one: str, other: str) -> bool:
        """Whether two steps, by qualified names, lie in different branches of one ``together``."""
        return any(self._of[other].get(together, branch) != branch for together, branch in self._of[one].items())

    def _collect(self, items: tuple[Item, ...], inside: dict[Place, int]) -> None:
        for item in items:
            match item:
                case Step():
                    self._of[item.name] = inside
                case Together(branches, place):
                    for number, branch in enumerate(branches):
                        self._collect(branch, {**inside, place: number})
                case Repeat(_, inner):
                    self._collect(inner, inside)
                case _:
                    pass
