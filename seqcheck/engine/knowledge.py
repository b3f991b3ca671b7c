"""What the controller knows: inputs as read, and what it does itself as known to the next read.

Takes what is seen; gives the value of any term that a step, a choice, a signal or a rule asks as the controller sees
it. Signals from outside are not among them: they come for each wait anew.
"""

from __future__ import annotations

from collections.abc import Iterator

from seqcheck.engine.conditions import Aspect, aspect_of
from seqcheck.engine.trace import Known, Trace
from seqcheck.machine.conditions import Condition, Term, TermKind, terms_of
from seqcheck.machine.devices import OutsideSignal
from seqcheck.machine.model import Machine, items_of
from seqcheck.machine.steps import Choose, Sequence, Step

#: What a controller does itself, and knows without an input.
_OWN = (TermKind.COIL, TermKind.OUTPUT, TermKind.FLAG, TermKind.STEP)


class Knowledge:
    """``asked``: what steps and choices ask. ``held``: what holds at the inputs, seen or not."""

    def __init__(self, machine: Machine, trace: Trace) -> None:
        self._machine = machine
        self._trace = trace
        self.asked: set[Aspect] = {
            aspect_of(term) for condition in asked_conditions(machine) for term in terms_of(condition)
        }
        self._known: dict[Aspect, Known] = {}
        #: All of them, in an order that is the same in every play.
        self._in_order: list[Aspect] = []
        self.held: dict[Aspect, bool] = {}
        for aspect in self.asked:
            if aspect[0] in _OWN:
                self.initially(aspect, False)

    def initially(self, aspect: Aspect, value: bool) -> None:
        known = self._known[aspect] = Known(value, 0, 0)
        self._trace.known[aspect] = [known]
        self.held[aspect] = value

    def see(self, aspect: Aspect, known: Known) -> None:
        self._known[aspect] = known
        self._trace.known[aspect].append(known)

    def of(self, aspect: Aspect) -> Known:
        return self._known[aspect]

    def if_known(self, aspect: Aspect) -> Known | None:
        """The same; None for a signal from outside."""
        return self._known.get(aspect)

    def from_outside(self, term: Term) -> bool:
        return term.kind is TermKind.SIGNAL and isinstance(self._machine.signals[term.subject], OutsideSignal)

    @property
    def state(self) -> tuple[object, ...]:
        if len(self._in_order) < len(self._known):
            self._in_order = sorted(self._known, key=lambda aspect: (aspect[0].value, aspect[1]))
        return tuple([self._known[aspect].value for aspect in self._in_order])


def asked_conditions(machine: Machine, sequences: tuple[Sequence, ...] | None = None) -> Iterator[Condition]:
    """Every condition that steps and choices wait for, of all sequences or of some."""
    for sequence in machine.sequences if sequences is None else sequences:
        for item in items_of(sequence.items):
            match item:
                case Step(until=until) if until is not None:
                    yield until
                case Choose(choices):
                    yield from (choice.condition for choice in choices if choice.condition is not None)
                case _:
                    pass
