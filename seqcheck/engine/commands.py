"""Which coils and outputs are commanded, and by what.

A coil is commanded while any active step has it ``on``, or it is set, or a pulse runs; ``reset`` ends set and
pulse and wins over ``set`` in the same read.
"""

from __future__ import annotations

from collections.abc import Iterator

from seqcheck.engine.trace import Effect, Origin, Read, Touch, Visit
from seqcheck.machine.steps import Command, CommandKind


class Commands:
    """``touches``: everything that steps have done to each target, in the order of the run."""

    def __init__(self, touches: dict[str, list[Touch]]) -> None:
        self._touches = touches
        self._on: dict[str, dict[Visit, Origin]] = {}
        self._stored: dict[str, Origin] = {}
        #: For each target its running pulses, with the event at which each ends by itself.
        self._pulses: dict[str, dict[Origin, int]] = {}
        self._commanded: set[str] = set()
        #: Targets that this read has touched, with the command that would account for their end.
        self._touched: dict[str, Origin] = {}

    @property
    def state(self) -> tuple[object, ...]:
        on = sorted((name, sorted(visit.step.name for visit in by)) for name, by in self._on.items() if by)
        return (
            str(on),
            tuple(sorted(self._stored)),
            tuple(sorted((name, len(by)) for name, by in self._pulses.items() if by)),
            tuple(sorted(self._commanded)),
        )

    def commanded(self, target: str) -> bool:
        return target in self._commanded

    def leave(self, visit: Visit, read: Read) -> None:
        for command in visit.step.commands:
            if command.kind is CommandKind.ON:
                origin = self._on[command.target].pop(visit, None)
                if origin is not None:
                    self._touched[command.target] = origin
                    self._note(command.target, origin.at(read), Effect.ENDS)

    def runs(self, coil: str, pulse: Origin) -> bool:
        """Whether this very pulse still runs: nothing has reset it."""
        return pulse in self._pulses.get(coil, {})

    def begin_pulse(self, coil: str, origin: Origin, ends: int) -> None:
        self._pulses.setdefault(coil, {})[origin] = ends

    def end_pulse(self, coil: str, origin: Origin, read: Read) -> None:
        del self._pulses[coil][origin]
        self._touched[coil] = origin
        self._note(coil, origin.at(read), Effect.ENDS)

    def enter(self, visit: Visit) -> Iterator[tuple[Origin, str]]:
        """Apply the commands of a step; gives the pulses that it asks for (``begin_pulse`` begins them)."""
        for command in visit.step.commands:
            origin = _origin(visit, command)
            self._touched.setdefault(command.target, origin)
            effect = Effect.RESETS if command.kind is CommandKind.RESET else Effect.BEGINS
            self._note(command.target, origin, effect)
            match command.kind:
                case CommandKind.ON:
                    self._on.setdefault(command.target, {})[visit] = origin
                case CommandKind.SET:
                    self._stored[command.target] = origin
                case CommandKind.PULSE:
                    yield origin, command.target
                case CommandKind.RESET:
                    pass

    def changes(self, read: Read) -> Iterator[tuple[str, Origin]]:
        """Settle the read: each target whose command differs from before, with what brought that about."""
        for visit in read.entered:
            for command in visit.step.commands:
                if command.kind is CommandKind.RESET:
                    self._stored.pop(command.target, None)
                    for pulse, ends in self._pulses.pop(command.target, {}).items():
                        self._note(command.target, pulse, Effect.ENDS, ends)
                    self._touched[command.target] = _origin(visit, command)
        touched, self._touched = self._touched, {}
        for target, ending in touched.items():
            by = self._holding(target)
            if by is not None and target not in self._commanded:
                self._commanded.add(target)
                yield target, by.at(read)
            elif by is None and target in self._commanded:
                self._commanded.remove(target)
                yield target, ending.at(read)

    def _note(self, target: str, origin: Origin, effect: Effect, event: int | None = None) -> None:
        touch = Touch(origin.read.event if event is None else event, origin, effect)
        self._touches.setdefault(target, []).append(touch)

    def _holding(self, target: str) -> Origin | None:
        on = self._on.get(target)
        if on:
            return next(iter(on.values()))
        return self._stored.get(target) or next(iter(self._pulses.get(target, {})), None)


def _origin(visit: Visit, command: Command) -> Origin:
    return Origin(visit.step.name, command.place, command.kind, command.duration, visit.entered)
