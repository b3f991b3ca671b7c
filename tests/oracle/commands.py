"""What the steps command: stored commands, pulses, and the writes that send changes out."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass

from seqcheck.machine.model import Machine
from seqcheck.machine.steps import Command, CommandKind, Step
from seqcheck.machine.time import Span
from tests.oracle.clock import Clock, Ticket, Turn
from tests.oracle.inputs import read_wait
from tests.oracle.reads import Cause, Read
from tests.oracle.visits import ActiveVisit


@dataclass(slots=True, eq=False)
class Pulse:
    starter: str
    target: str
    read: Read
    end: Ticket | None = None


class Commands:
    """``ends(pulse)`` is told as a pulse is over, ``switch(target, on, cause)`` as a coil or an output switches."""

    def __init__(
        self,
        clock: Clock,
        machine: Machine,
        ends: Callable[[Pulse], None],
        switch: Callable[[str, bool, Cause], None],
    ) -> None:
        self._clock = clock
        self._machine = machine
        self._ends = ends
        self._switch = switch
        self._stored: set[str] = set()
        self._pulses: list[Pulse] = []
        self._switched: dict[str, int] = {}
        self._last_sent: dict[str, tuple[int, Turn]] = {}
        self._writes: dict[str, int] = {}

    def commanded(self, active: Iterable[ActiveVisit]) -> frozenset[str]:
        on = {command.target for visit in active for command in visit.step.commands if command.kind is CommandKind.ON}
        return frozenset(on | self._stored | {pulse.target for pulse in self._pulses})

    def end(self, pulse: Pulse) -> None:
        self._pulses.remove(pulse)

    def store(self, read: Read, entered: list[ActiveVisit]) -> None:
        """Sets and pulses of the steps entered, then resets, which win."""
        commands = [(visit.step, command) for visit in entered for command in visit.step.commands]
        resets = {command.target for _, command in commands if command.kind is CommandKind.RESET}
        self._stored |= {command.target for _, command in commands if command.kind is CommandKind.SET}
        self._stored -= resets
        for pulse in self._pulses:
            if pulse.target in resets:
                self._clock.call_off(pulse.end)
        self._pulses = [pulse for pulse in self._pulses if pulse.target not in resets]
        for step, command in commands:
            if command.kind is CommandKind.PULSE and command.target not in resets:
                self._start_pulse(read, step, command)

    def _start_pulse(self, read: Read, step: Step, command: Command) -> None:
        assert command.duration is not None
        pulse = Pulse(step.name, command.target, read)
        wait = self._clock.draw("pulse", command.target, read_wait(self._machine.controller))
        time = max(read.floor, read.time + command.duration + wait)
        pulse.end = self._clock.at(time, Turn.DWELL, lambda: self._ends(pulse))
        self._pulses.append(pulse)

    def write(self, read: Read, after: frozenset[str], causes: dict[str, Cause]) -> None:
        """Send the changes of coils and outputs out. Those on one island share one update."""
        updates: dict[str, int] = {}
        for target, cause in causes.items():
            via = self._island_of(target)
            if via is not None and via not in updates:
                number = self._writes.get(via, 0)
                self._writes[via] = number + 1
                updates[via] = self._clock.draw("update", via, self._machine.islands[via].update, number)
            on = target in after
            delay = self._clock.draw("output", target, self._switching(via, on))
            self._send(read, target, on, read.write + (0 if via is None else updates[via]) + delay, cause)

    def _island_of(self, target: str) -> str | None:
        coil = self._machine.coils.get(target)
        return self._machine.outputs[target].via if coil is None else coil.via

    def _switching(self, via: str | None, on: bool) -> Span:
        place = self._machine.controller if via is None else self._machine.islands[via]
        return place.output_on if on else place.output_off

    def _send(self, read: Read, target: str, on: bool, time: int, cause: Cause) -> None:
        """A later change of the same output overtakes one that has not switched yet, and comes behind one that switches
        at the same instant."""

        def switch() -> None:
            if self._switched.get(target, 0) < read.number:
                self._switched[target] = read.number
                self._switch(target, on, cause)

        turn = Turn.ENERGIZE if on else Turn.RELEASE
        if self._last_sent.get(target) == (time, Turn.ENERGIZE):
            turn = Turn.ENERGIZE
        self._last_sent[target] = time, turn
        self._clock.at(time, turn, switch)


def brought_by(
    target: str, on: bool, entered: list[ActiveVisit], leaving: tuple[ActiveVisit, ...], ended: Pulse | None
) -> str | None:
    """The step whose command or exit changes an output, None where none does so by itself."""
    for visit in entered:
        for command in visit.step.commands:
            if command.target == target and (command.kind is not CommandKind.RESET) is on:
                return visit.step.name
    if on:
        return None
    for visit in leaving:
        if any(command.target == target and command.kind is CommandKind.ON for command in visit.step.commands):
            return visit.step.name
    return ended.starter if ended is not None and ended.target == target else None
