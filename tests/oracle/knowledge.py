"""What the controller knows: sensors and signals as read, commands, flags and steps from the floor of the read that
changed them."""

from __future__ import annotations

from seqcheck.machine.conditions import TermKind
from tests.oracle.clock import Clock, Turn
from tests.oracle.conditions import Literal
from tests.oracle.inputs import InputLine
from tests.oracle.reads import Read

Fact = tuple[TermKind, str]


class Knowledge:
    """``facts`` are the commands, flags and steps that are on as the last read has left them, known or not yet.
    ``stirred``: something may have become known since that was last asked."""

    def __init__(self, clock: Clock, lines: dict[str, InputLine]) -> None:
        self.facts: frozenset[Fact] = frozenset()
        self.stirred = True
        self._clock = clock
        self._lines = lines
        self._known: dict[Fact, tuple[bool, Read]] = {}
        self._floors: list[tuple[Read, dict[Fact, bool]]] = []

    def announce(self, read: Read, facts: frozenset[Fact]) -> None:
        """What the read changed is known from its floor."""
        changed = {fact: fact in facts for fact in self.facts ^ facts}
        self.facts = facts
        self._floors.append((read, changed))
        self._clock.at(read.floor, Turn.FLOOR, self.pass_floors)

    def pass_floors(self) -> None:
        """Every floor that lies at or before now."""
        passed = [(read, changed) for read, changed in self._floors if read.floor <= self._clock.now]
        self._floors = [(read, changed) for read, changed in self._floors if read.floor > self._clock.now]
        for read, changed in passed:
            read.passed = True
            self.stirred = True
            for fact, value in changed.items():
                if fact not in self._known or self._known[fact][1].number < read.number:
                    self._known[fact] = (value, read)

    def is_known(self, literal: Literal) -> bool:
        """Whether the literal is known to be as it wants to be; not of signals from outside."""
        line = self._lines.get(literal.subject)
        if line is not None:
            return line.known is literal.wanted
        known = self._known.get((literal.kind, literal.subject))
        return (known is not None and known[0]) is literal.wanted

    def at_input(self, literal: Literal) -> bool:
        """Likewise, with inputs as they are, seen or not."""
        line = self._lines.get(literal.subject)
        return self.is_known(literal) if line is None else line.level is literal.wanted

    def read_of(self, literal: Literal) -> Read | None:
        """The read that has brought what is known of a command, flag or step."""
        known = self._known.get((literal.kind, literal.subject))
        return None if known is None else known[1]
