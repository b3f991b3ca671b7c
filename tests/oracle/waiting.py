"""What a step or a standing choice waits for besides what becomes known: times, signals from outside, a watchdog."""

from __future__ import annotations

from collections.abc import Iterable

from seqcheck.machine.model import Machine, steps_of
from tests.oracle.clock import Clock, Turn
from tests.oracle.conditions import Literal, holds
from tests.oracle.inputs import read_wait
from tests.oracle.knowledge import Knowledge
from tests.oracle.outside import Outside
from tests.oracle.visits import ActiveChoice, ActiveVisit, SteadyWatch, Wait


class Waiting:
    def __init__(self, clock: Clock, machine: Machine, knowledge: Knowledge, outside: Outside) -> None:
        self._clock = clock
        self._knowledge = knowledge
        self._outside = outside
        self._wait = read_wait(machine.controller)
        self._steady = {
            step.name: SteadyWatch(step.until)
            for sequence in machine.sequences
            for step in steps_of(sequence)
            if step.steady is not None
        }

    def enter(self, visit: ActiveVisit) -> None:
        clock, step = self._clock, visit.step
        if step.dwell is None:
            visit.dwell_over = True
        else:
            wait = clock.draw("dwell", step.name, self._wait)

            def over() -> None:
                visit.dwell_over = self._knowledge.stirred = True

            clock.at(clock.now + step.dwell + wait, Turn.DWELL, over)
        visit.awaited = self._outside.await_all(visit.read, visit.literals)
        self._set_watchdog(visit)
        self._follow_steady(visit)

    def stand(self, choice: ActiveChoice) -> None:
        choice.awaited = self._outside.await_all(choice.read, choice.literals, choice.asked)
        self._set_watchdog(choice)

    def leave(self, wait: Wait) -> None:
        self._clock.call_off(wait.steady_end, wait.watchdog_ticket)
        self._outside.leave(wait.awaited)

    # --- steady ---

    def follow_steady(self, active: Iterable[ActiveVisit]) -> None:
        """Something has become known."""
        for watch in self._steady.values():
            if not holds(watch.condition, self._is_known_without_outside):
                watch.since = None
            elif watch.since is None:
                watch.since = self._clock.now
        for visit in active:
            self._follow_steady(visit)

    def _is_known_without_outside(self, literal: Literal) -> bool:
        return not self._outside.comes_from_outside(literal) and self._knowledge.is_known(literal)

    def _follow_steady(self, visit: ActiveVisit) -> None:
        """Counted from before the step where the condition held then, and has since."""
        if visit.step.steady is None:
            return
        if not visit.holds():
            self._clock.call_off(visit.steady_end)
            visit.steady_since, visit.steady_over = None, False
        elif visit.steady_since is None:
            since = self._steady[visit.name].since
            visit.steady_since = self._clock.now if since is None else since
            wait = self._clock.draw("steady", visit.name, self._wait)
            time = max(self._clock.now, visit.steady_since + visit.step.steady + wait)

            def over() -> None:
                visit.steady_over = self._knowledge.stirred = True

            visit.steady_end = self._clock.at(time, Turn.DWELL, over)

    # --- watchdogs ---

    def _set_watchdog(self, wait: Wait) -> None:
        if wait.watchdog is None:
            return
        by = self._clock.now + wait.watchdog.within
        idle = wait.watchdog.target is None
        wait.watchdog_ticket = self._clock.at(by, Turn.WATCHDOG, lambda: self._expire(wait, by), idle)

    def _expire(self, wait: Wait, by: int) -> None:
        assert wait.watchdog is not None
        if wait.has_come_to_hold(by):
            return
        goes_on = wait.watchdog.target is not None
        if not any(self._outside.comes_at_any_time(literal) for literal in wait.literals):
            self._clock.incident("tight-watchdog", wait.name, wait.name, "the watchdog expires", diverts=not goes_on)
        if goes_on:
            wait.expired = True
            time = by + self._clock.draw("watchdog", wait.name, self._wait)
            wait.watchdog_ticket = self._clock.at(max(wait.read.floor, time), Turn.DWELL, lambda: self._expel(wait))

    def _expel(self, wait: Wait) -> None:
        wait.gone = self._knowledge.stirred = True
