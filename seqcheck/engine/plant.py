"""The machine itself, as rules, signals that follow it, and nobody else can see it.

Takes every change of an aspect that somebody looks at (``clamp.moving``, ``V1.a``, a coil as energized at the valve,
a sensor as read); keeps them in the trace and tells who follows a condition when it has come to hold or ceased to.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass

from seqcheck.engine.conditions import Alternatives, Aspect, Literal, alternatives_of, aspect_of, holding
from seqcheck.engine.graph import Event
from seqcheck.engine.timeline import Timeline
from seqcheck.engine.trace import Change, Trace
from seqcheck.machine.conditions import Condition, terms_of
from seqcheck.machine.devices import FollowingSignal
from seqcheck.machine.model import Machine
from seqcheck.machine.rules import CycleLimit, Never

#: Told that a followed condition has changed: the signal, its new value, the event that brought it.
Follow = Callable[[str, bool, int], None]


@dataclass(slots=True)
class _Follower:
    name: str
    either: Mapping[bool, Alternatives]
    value: bool = False


class Plant:
    def __init__(self, machine: Machine, timeline: Timeline, trace: Trace, follow: Follow) -> None:
        self._timeline = timeline
        self._trace = trace
        self._follow = follow
        self._values: dict[Aspect, bool] = {}
        self._since: dict[Aspect, int] = {}
        self._followers: dict[Aspect, list[_Follower]] = {}
        self._all: list[_Follower] = []
        self._live = False
        for signal in machine.signals.values():
            if isinstance(signal, FollowingSignal):
                follower = _Follower(
                    signal.name, {wanted: alternatives_of(signal.follows, wanted) for wanted in (True, False)}
                )
                self._all.append(follower)
                for aspect in {aspect_of(term) for term in terms_of(signal.follows)}:
                    self._followers.setdefault(aspect, []).append(follower)
        for condition in looked_at(machine):
            for term in terms_of(condition):
                self._values[aspect_of(term)] = False
                self._since[aspect_of(term)] = 0

    def initially(self, values: Mapping[Aspect, bool]) -> None:
        for aspect, value in values.items():
            if aspect in self._values:
                self._values[aspect] = value
                self._trace.changes[aspect] = [Change(True, 0)] if value else []

    def settle(self) -> Iterator[tuple[str, bool]]:
        """The value of each signal that follows the machine as it stands; from the second time on, changes are told."""
        for follower in self._all:
            follower.value = self._holds(follower, True) is not None
            yield follower.name, follower.value

    def looks_at(self, aspect: Aspect) -> bool:
        return aspect in self._values

    @property
    def looked_at(self) -> set[str]:
        """The names of all of which somebody looks at an aspect."""
        return {subject for _, subject, _ in self._values}

    def go_live(self) -> None:
        self._live = True

    @property
    def state(self) -> tuple[object, ...]:
        return tuple(self._values.values()), tuple(follower.value for follower in self._all)

    def notice(self, event: int, values: Mapping[Aspect, bool]) -> None:
        """What these aspects have become by one event, all at once."""
        touched: dict[str, _Follower] = {}
        for aspect, value in values.items():
            if aspect in self._values and self._values[aspect] != value:
                self._values[aspect] = value
                self._since[aspect] = event
                self._trace.changes.setdefault(aspect, []).append(Change(value, event))
                touched.update((one.name, one) for one in self._followers.get(aspect, ()))
        if self._live:
            for follower in touched.values():
                self._tell(follower)

    def _tell(self, follower: _Follower) -> None:
        reason = self._holds(follower, not follower.value)
        if reason is not None:
            follower.value = not follower.value
            events = [self._since[literal.aspect] for literal in reason]
            detail = "on" if follower.value else "off"
            event = self._timeline.last_of(Event("holds", follower.name, detail), events)
            self._follow(follower.name, follower.value, event)

    def _holds(self, follower: _Follower, wanted: bool) -> tuple[Literal, ...] | None:
        return holding(follower.either[wanted], lambda literal: self._values[literal.aspect] == literal.wanted)


def looked_at(machine: Machine) -> Iterator[Condition]:
    """Every condition that is held against the machine itself."""
    for signal in machine.signals.values():
        if isinstance(signal, FollowingSignal):
            yield signal.follows
    for rule in machine.rules:
        match rule:
            case Never(condition):
                yield condition
            case CycleLimit():
                pass
            case _:
                yield from (rule.start, rule.end)
