"""When a wait is over: its condition holds, its dwell is over, it has been steady, or its watchdog leads elsewhere.

Takes waits and what the controller knows; gives the events that a wait has waited for once it may end. Every moment at
which that may change is scheduled, and whoever ``wake`` calls then asks again.
"""

from __future__ import annotations

from collections.abc import Callable

from seqcheck.engine.conditions import Alternative, Alternatives, Literal
from seqcheck.engine.graph import OPEN, Event
from seqcheck.engine.knowledge import Knowledge
from seqcheck.engine.timeline import Order, Timeline
from seqcheck.engine.trace import Alarm, Answer, Choice, Visit, Wait
from seqcheck.machine.devices import OutsideSignal
from seqcheck.machine.model import Machine
from seqcheck.machine.steps import Watchdog
from seqcheck.machine.time import Span


class Exits:
    def __init__(self, machine: Machine, timeline: Timeline, knowledge: Knowledge, wake: Callable[[], None]) -> None:
        self._machine = machine
        self._settings = machine.controller
        self._wait = machine.controller.wait
        self._timeline = timeline
        self._knowledge = knowledge
        self._wake = wake

    # Beginning -------------------------------------------------------------------------------------------------

    def begin(self, visit: Visit) -> None:
        """A step begins to wait."""
        step, timeline = visit.step, self._timeline
        if step.dwell is not None:
            visit.dwell_over = timeline.event(
                Event("dwell over", step.name), timeline.fixed(visit.entered.event, step.dwell)
            )
            visit.dwell_seen = timeline.event(
                Event("dwell seen", step.name), timeline.delay(visit.dwell_over, self._wait, "dwell", step.name)
            )
            timeline.at(visit.dwell_seen, Order.CONTROLLER, self._wake)
        self._await_signals(visit)
        self._watch(visit, step.watchdog, step.name)
        timeline.at(visit.entered.floor, Order.CONTROLLER, self._wake)

    def stand(self, choice: Choice) -> None:
        """A choice of which no condition holds begins to wait. What it asked of a signal from outside has come out."""
        now = choice.entered.event
        for literal in choice.literals:
            if choice.asked.get(literal.term.subject) == literal.wanted and self._knowledge.from_outside(literal.term):
                choice.signals[literal] = (now, now)
        self._await_signals(choice)
        self._watch(choice, choice.choose.watchdog, name_of(choice))
        self._timeline.at(choice.entered.floor, Order.CONTROLLER, self._wake)

    def _await_signals(self, wait: Wait) -> None:
        """A signal from outside comes some time after a step begins to wait for it."""
        for literal in wait.literals:
            if literal in wait.signals or not self._knowledge.from_outside(literal.term):
                continue
            key = (literal.term.subject, literal.wanted)
            arrival = wait.entered.signals.get(key)
            if arrival is None:
                arrival = wait.entered.signals[key] = self._let_come(wait, literal)
            wait.signals[literal] = arrival
            self._timeline.at(arrival[1], Order.SEEN, self._wake)

    def _let_come(self, wait: Wait, literal: Literal) -> tuple[int, int]:
        name, timeline = literal.term.subject, self._timeline
        signal = self._machine.signals[name]
        assert isinstance(signal, OutsideSignal)
        delay = signal.after or Span(0, 0, OPEN)
        detail = "on" if literal.wanted else "off"
        filtered = self._settings.input_on if literal.wanted else self._settings.input_off
        comes = timeline.event(
            Event("signal", name, detail), timeline.delay(wait.entered.event, delay, "outside", name)
        )
        held = timeline.event(Event("input", name, detail), timeline.delay(comes, filtered, "filter", name))
        seen = timeline.event(Event("seen", name, detail), timeline.delay(held, self._wait, "see", name))
        return held, seen

    def _watch(self, wait: Wait, watchdog: Watchdog | None, name: str) -> None:
        """A watchdog that leads to another step runs out unless the wait has come to hold before."""
        if watchdog is None or watchdog.target is None:
            return
        timeline = self._timeline
        over = timeline.event(Event("watchdog", name), timeline.fixed(wait.entered.event, watchdog.within))
        noticed = timeline.event(Event("watchdog seen", name), timeline.delay(over, self._wait, "watchdog", name))
        alarm = wait.alarm = Alarm(watchdog, over, noticed)

        def run_out() -> None:
            if not self._has_come_to_hold(wait, timeline.times[over]):
                alarm.expired = True
                timeline.at(noticed, Order.CONTROLLER, self._wake)

        timeline.at(over, Order.WATCHDOG, run_out)

    def _has_come_to_hold(self, wait: Wait, now: int) -> bool:
        """At the inputs, seen or not; the dwell over, steady for long enough."""
        times = self._timeline.times
        timed = [event for event in (wait.dwell_over, wait.steady_over) if event is not None]
        steady = isinstance(wait, Visit) and wait.step.steady is not None
        if any(times[event] > now for event in timed) or (steady and wait.steady_over is None):
            return False
        return any(all(self._is_held(wait, literal, now) for literal in one) for one in wait.alternatives)

    def _is_held(self, wait: Wait, literal: Literal, now: int) -> bool:
        if literal in wait.signals:
            return self._timeline.times[wait.signals[literal][0]] <= now
        return self._knowledge.held[literal.aspect] == literal.wanted

    # Ending ----------------------------------------------------------------------------------------------------

    def causes(self, wait: Wait) -> list[int] | None:
        """The events that the wait has waited for; None where it does not end yet."""
        happened = self._timeline.happened
        if wait.alarm is not None and wait.alarm.expired:
            causes = [wait.entered.floor, wait.alarm.noticed]
            return causes if all(event in happened for event in causes) else None
        if wait.missing is not None and self.answer(wait, wait.missing) is None:
            return None
        answers = self._holding(wait)
        steady = isinstance(wait, Visit) and wait.step.steady is not None
        if isinstance(wait, Visit) and steady:
            self._keep_steady(wait, None if answers is None else [answer.seen for answer in answers])
        causes = [wait.entered.floor]
        causes += [event for event in (wait.dwell_seen, wait.steady_seen) if event is not None]
        if answers is None or (steady and wait.steady_seen is None):
            return None
        if not happened.issuperset(causes):
            return None
        wait.answers = tuple(answers)
        return causes + [answer.seen for answer in answers]

    def _holding(self, wait: Wait) -> list[Answer] | None:
        """What makes true what holds and came first; of a choice, for the first branch whose condition holds."""
        if not isinstance(wait, Choice):
            return self._first_to_hold(wait, wait.alternatives)
        for number, condition in enumerate(wait.conditions):
            held = self._first_to_hold(wait, condition)
            if held is not None:
                wait.taken = number
                return held
        return None

    def _first_to_hold(self, wait: Wait, alternatives: Alternatives) -> list[Answer] | None:
        if len(alternatives) == 1:
            return self._answers(wait, alternatives[0])
        times = self._timeline.times
        found: tuple[int, list[Answer]] | None = None
        for one in alternatives:
            answers = self._answers(wait, one)
            if answers is not None:
                since = max([times[answer.seen] for answer in answers], default=0)
                if found is None or since < found[0]:
                    found = since, answers
        return None if found is None else found[1]

    def _answers(self, wait: Wait, alternative: Alternative) -> list[Answer] | None:
        """What makes true every literal of an alternative; None where one of them is not."""
        answers = []
        for literal in alternative:
            answer = self.answer(wait, literal)
            if answer is None:
                wait.missing = literal if len(wait.alternatives) == 1 else None
                return None
            answers.append(answer)
        return answers

    def answer(self, wait: Wait, literal: Literal) -> Answer | None:
        """What makes the literal as wanted; None where it is not (as the controller knows)."""
        if wait.signals and literal in wait.signals:
            held, seen = wait.signals[literal]
            return Answer(literal, seen, held) if seen in self._timeline.happened else None
        known = self._knowledge.if_known(literal.aspect)
        if known is None or known.value != literal.wanted:
            return None
        return Answer(literal, known.seen, known.held, known.edge)

    def _keep_steady(self, visit: Visit, seen: list[int] | None) -> None:
        """Begin to count once the whole condition is seen, stop when it no longer is."""
        step, timeline = visit.step, self._timeline
        if seen is None:
            if visit.steady_seen is not None:
                timeline.call_off(visit.steady_seen)
            visit.steady_over = visit.steady_seen = None
        elif visit.steady_seen is None:
            since = timeline.last_of(Event("condition seen", step.name), seen)
            over = timeline.event(Event("steady over", step.name), timeline.fixed(since, step.steady or 0))
            visit.steady_over = over
            visit.steady_seen = timeline.event(
                Event("steady seen", step.name), timeline.delay(over, self._wait, "steady", step.name)
            )
            timeline.at(visit.steady_seen, Order.CONTROLLER, self._wake)

    def end(self, wait: Wait) -> None:
        """The wait is over: its watchdog is of no account any more."""
        if wait.alarm is not None:
            self._timeline.call_off(wait.alarm.over)


def name_of(choice: Choice) -> str:
    """What the delays of a choice are named after."""
    place = choice.choose.place
    return f"choose {place.line}:{place.column}"
