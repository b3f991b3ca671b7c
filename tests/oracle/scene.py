"""The machine itself, as rules and signals that follow it see it."""

from __future__ import annotations

from seqcheck.machine.conditions import Condition, TermKind
from seqcheck.machine.devices import FollowingSignal
from seqcheck.machine.model import Machine
from tests.oracle.clock import Clock, Turn
from tests.oracle.conditions import Literal, holds
from tests.oracle.controller import ControllerPlay
from tests.oracle.inputs import InputLine
from tests.oracle.pistons import CylinderPlay
from tests.oracle.valves import ValvePlay


class Scene:
    """``outputs`` are those that are switched on."""

    def __init__(
        self,
        machine: Machine,
        lines: dict[str, InputLine],
        valves: dict[str, ValvePlay],
        cylinders: dict[str, CylinderPlay],
        controller: ControllerPlay,
    ) -> None:
        self.outputs: set[str] = set()
        self._machine = machine
        self._lines = lines
        self._valves = valves
        self._cylinders = cylinders
        self._controller = controller

    def holds(self, condition: Condition) -> bool:
        return holds(condition, lambda literal: self._is_on(literal) is literal.wanted)

    def _is_on(self, literal: Literal) -> bool:
        subject, aspect = literal.subject, literal.aspect
        match literal.kind:
            case TermKind.SENSOR | TermKind.SIGNAL:
                line = self._lines.get(subject)
                return subject in self._controller.outside.on if line is None else line.known
            case TermKind.COIL:
                return subject in self._valves[self._machine.coils[subject].valve].energized
            case TermKind.OUTPUT:
                return subject in self.outputs
            case TermKind.FLAG | TermKind.STEP:
                return (literal.kind, subject) in self._controller.knowledge.facts
            case TermKind.CYLINDER:
                return self._cylinders[subject].shows(aspect)
            case TermKind.VALVE:
                return self._valves[subject].shows(aspect)


class Followers:
    """The signals that follow the machine. They look at it when everything else of an instant has come."""

    def __init__(self, clock: Clock, machine: Machine, lines: dict[str, InputLine], scene: Scene) -> None:
        self._clock = clock
        self._lines = lines
        self._scene = scene
        self._signals = [each for each in machine.signals.values() if isinstance(each, FollowingSignal)]
        self._looking = False

    def notice(self) -> None:
        """Something may have changed."""
        if not self._looking and any(self._differs(signal) for signal in self._signals):
            self._looking = True
            self._clock.at(self._clock.now, Turn.LOOK, self._look)

    def _differs(self, signal: FollowingSignal) -> bool:
        return self._scene.holds(signal.follows) is not self._lines[signal.name].physical

    def _look(self) -> None:
        self._looking = False
        for signal in self._signals:
            if self._differs(signal):
                line = self._lines[signal.name]
                line.change(not line.physical)
