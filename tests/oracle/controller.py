"""The controller: threads of steps, reads, commands and what is known of them."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import partial

from seqcheck.machine.conditions import TermKind
from seqcheck.machine.devices import ControllerKind, OutsideSignal
from seqcheck.machine.model import Machine
from seqcheck.machine.steps import Command, CommandKind, Step, Together
from seqcheck.machine.time import Span
from tests.oracle.clock import Clock, Ticket, Turn
from tests.oracle.inputs import InputLine, filter_of, read_wait
from tests.oracle.records import Visit
from tests.oracle.refusals import Part
from tests.oracle.visits import ActiveVisit, Arrival, Cause, Join, Past, Read, Thread, route_of

ANY_TIME = Span(0, 0, 60_000_000)
"""When an outside signal may come that has no ``after``."""

MOST_READS_AT_ONCE = 1000


class EndlessLoop(RuntimeError):
    """Steps chase each other without time passing."""


@dataclass(slots=True, eq=False)
class Pulse:
    starter: str
    target: str
    end: Ticket | None = None


@dataclass(frozen=True, slots=True)
class Supervisor:
    """Who is told: ``commanded(entered, before, after, causes)`` behind each read, ``leaves(visit)`` as a step is left
    (gives what its sensors add to the past), ``switch(target, on, cause)`` as a coil or an output switches."""

    commanded: Callable[[tuple[ActiveVisit, ...], frozenset[str], frozenset[str], dict[str, Cause]], None]
    leaves: Callable[[ActiveVisit], Past]
    switch: Callable[[str, bool, Cause], None]


class ControllerPlay:
    """``active`` are the steps under way in the order in which they were entered."""

    def __init__(self, clock: Clock, machine: Machine, lines: dict[str, InputLine], supervisor: Supervisor) -> None:
        self.machine = machine
        self.active: list[ActiveVisit] = []
        self.visits: list[ActiveVisit] = []
        self.cycle_starts: list[int] = []
        self._clock = clock
        self._lines = lines
        self._supervisor = supervisor
        self._sequence = machine.sequences[0]
        self._joins: list[Join] = []
        self._stored: set[str] = set()
        self._pulses: list[Pulse] = []
        self._facts: frozenset[tuple[TermKind, str]] = frozenset()
        self._known: dict[tuple[TermKind, str], tuple[bool, int, Read]] = {}
        self._switched: dict[str, int] = {}
        self._last_sent: dict[str, tuple[int, Turn]] = {}
        self._reads = 0
        self._last_read = (0, 0)

    # --- what a step can ask ---

    def known(self, part: Part) -> tuple[bool, int]:
        if part.kind is TermKind.SENSOR:
            line = self._lines[part.subject]
            return line.known, line.known_since
        fact = self._known.get((part.kind, part.subject))
        return (False, 0) if fact is None else fact[:2]

    def level(self, part: Part) -> bool:
        return self._lines[part.subject].level if part.kind is TermKind.SENSOR else self.known(part)[0]

    # --- leaving and entering ---

    def start(self) -> None:
        """The read at time 0 that activates the first step."""
        thread = Thread(route_of(self._sequence.items), None)
        self.cycle_starts.append(0)
        self._read("start", (), (thread,))

    def settle(self) -> None:
        """Leave whatever can be left now, all of it at one read."""
        for visit in self.active:
            self._follow_steady(visit)
        leaving = tuple(visit for visit in self.active if visit.ready())
        joins = tuple(join for join in self._joins if join.ready())
        if leaving or joins:
            names = [visit.step.name for visit in leaving] or [join.name for join in joins]
            self._joins = [join for join in self._joins if join not in joins]
            threads = tuple(visit.thread for visit in leaving) + tuple(join.thread for join in joins)
            ends = [read for join in joins for read in join.ends]
            self._read(min(names), leaving, threads, past=frozenset().union(*(read.past for read in ends)))

    def _read(
        self,
        reader: str,
        leaving: tuple[ActiveVisit, ...],
        threads: tuple[Thread, ...],
        ended: Pulse | None = None,
        past: Past = frozenset(),
    ) -> None:
        now = self._clock.now
        self._reads += 1
        self._last_read = (now, self._last_read[1] + 1 if self._last_read[0] == now else 1)
        if self._last_read[1] > MOST_READS_AT_ONCE:
            raise EndlessLoop(f"at {now} us, last reader {reader}")
        read = Read(self._reads, now, past.union(*(self._past_of(visit) for visit in leaving)))
        before = self._commanded()
        for visit in leaving:
            self._leave(visit)
        entered: list[ActiveVisit] = []
        for thread in threads:
            self._advance(thread, read, entered)
        if ended is not None:
            self._pulses.remove(ended)
        floor = self._time_of(read, reader)
        self._store(read, floor, entered)
        after = self._commanded()
        causes = {
            target: Cause(_brought_by(target, target in after, entered, leaving, ended), read.past)
            for target in sorted(before ^ after)
        }
        self._announce(read, floor, after)
        for target, cause in causes.items():
            self._write(read, target, target in after, cause)
        self._supervisor.commanded(tuple(entered), before, after, causes)
        for visit in entered:
            self._await(visit)

    def _past_of(self, visit: ActiveVisit) -> Past:
        """What has led to a step's being left: its entry, its sensors, the commands and steps that it asked for."""
        facts = [self._known.get((part.kind, part.subject)) for part in visit.parts]
        reads = [visit.read, *(fact[2] for fact in facts if fact is not None)]
        return self._supervisor.leaves(visit).union(*(read.past for read in reads))

    def _leave(self, visit: ActiveVisit) -> None:
        self._clock.call_off(visit.watchdog, visit.steady_end)
        visit.left = self._clock.now
        self.active.remove(visit)
        self._clock.log(f"step {visit.step.name} left")

    def _advance(self, thread: Thread, read: Read, entered: list[ActiveVisit]) -> None:
        item = next(thread.route, None)
        if isinstance(item, Step):
            entered.append(self._enter(item, thread, read))
        elif isinstance(item, Together):
            join = Join(item, thread, len(item.branches))
            self._joins.append(join)
            for branch in item.branches:
                self._advance(Thread(route_of(branch), join), read, entered)
        elif thread.join is not None:
            thread.join.open -= 1
            thread.join.ends.append(read)
        elif not self._sequence.once:
            self.cycle_starts.append(read.time)
            thread.route = route_of(self._sequence.items)
            self._advance(thread, read, entered)

    def _enter(self, step: Step, thread: Thread, read: Read) -> ActiveVisit:
        visit = ActiveVisit(step, thread, read, len(self.cycle_starts) - 1, {}, self.known, self.level)
        self.active.append(visit)
        self.visits.append(visit)
        self._clock.log(f"step {step.name} entered")
        return visit

    def _await(self, visit: ActiveVisit) -> None:
        """Start everything that a step waits for besides sensors."""
        clock, step = self._clock, visit.step
        if step.dwell is None:
            visit.dwell_over = True
        else:
            wait = clock.draw("dwell", step.name, read_wait(self.machine.controller))
            clock.at(clock.now + step.dwell + wait, Turn.DWELL, lambda: setattr(visit, "dwell_over", True))
        for part in visit.parts:
            if part.kind is TermKind.SIGNAL and part.subject not in visit.outside:
                signal = self.machine.signals[part.subject]
                assert isinstance(signal, OutsideSignal)
                visit.outside[signal.name] = Arrival()
                after = clock.draw("outside", signal.name, ANY_TIME if signal.after is None else signal.after)
                clock.at(clock.now + after, Turn.MARK, partial(self._arrive, visit, part))
        if step.watchdog is not None:
            by = clock.now + step.watchdog.within
            visit.watchdog = clock.at(by, Turn.WATCHDOG, lambda: self._expire(visit, by))
        self._follow_steady(visit)

    # --- outside signals, steady, watchdogs ---

    def _arrive(self, visit: ActiveVisit, part: Part) -> None:
        clock, arrival = self._clock, visit.outside[part.subject]
        clock.log(f"signal {part.subject} comes")

        def change() -> None:
            arrival.level = True
            clock.log(f"input {part.subject} {'on' if part.wanted else 'off'}")
            wait = clock.draw("see", part.subject, read_wait(self.machine.controller))
            clock.at(clock.now + wait, Turn.SEEN, see)

        def see() -> None:
            arrival.seen_since = clock.now
            clock.log(f"seen {part.subject} {'on' if part.wanted else 'off'}")

        delay = clock.draw("filter", part.subject, filter_of(self.machine.controller, part.wanted))
        clock.at(clock.now + delay, Turn.INPUT, change)

    def _follow_steady(self, visit: ActiveVisit) -> None:
        if visit.step.steady is None:
            return
        since = visit.holds_since()
        if since == visit.steady_since:
            return
        self._clock.call_off(visit.steady_end)
        visit.steady_since, visit.steady_over = since, False
        if since is not None:
            wait = self._clock.draw("steady", visit.step.name, read_wait(self.machine.controller))
            time = max(self._clock.now, since + visit.step.steady + wait)
            visit.steady_end = self._clock.at(time, Turn.DWELL, lambda: setattr(visit, "steady_over", True))

    def _expire(self, visit: ActiveVisit, by: int) -> None:
        if visit.has_come_to_hold(by):
            return
        for part in visit.parts:
            if part.kind is TermKind.SIGNAL:
                signal = self.machine.signals[part.subject]
                if isinstance(signal, OutsideSignal) and signal.after is None:
                    return
        self._clock.incident("tight-watchdog", visit.step.name, visit.step.name, "the watchdog expires")

    # --- commands ---

    def _commanded(self) -> frozenset[str]:
        on = {
            command.target for visit in self.active for command in visit.step.commands if command.kind is CommandKind.ON
        }
        return frozenset(on | self._stored | {pulse.target for pulse in self._pulses})

    def _store(self, read: Read, floor: int, entered: list[ActiveVisit]) -> None:
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
                self._start_pulse(read, floor, step, command)

    def _start_pulse(self, read: Read, floor: int, step: Step, command: Command) -> None:
        assert command.duration is not None
        pulse = Pulse(step.name, command.target)
        wait = self._clock.draw("pulse", command.target, read_wait(self.machine.controller))
        time = max(floor, read.time + command.duration + wait)
        name = f"pulse {command.target}"
        pulse.end = self._clock.at(time, Turn.DWELL, lambda: self._read(name, (), (), pulse, read.past))
        self._pulses.append(pulse)

    def _time_of(self, read: Read, reader: str) -> int:
        """Draw the round: sets the write of the read, gives its floor."""
        controller = self.machine.controller
        match controller.kind:
            case ControllerKind.SCAN:
                read.write = floor = read.time + self._clock.draw("round", reader, controller.round)
            case ControllerKind.TASK:
                floor = read.time + self._clock.draw("round", reader, controller.round)
                read.write = read.time + self._clock.draw("run", reader, controller.run)
            case ControllerKind.IDEAL:
                read.write = floor = read.time
        return floor

    def _announce(self, read: Read, floor: int, commanded: frozenset[str]) -> None:
        """Make what the read changed known at its floor."""
        facts = {(TermKind.STEP, visit.step.name) for visit in self.active}
        for target in commanded:
            facts.add((TermKind.COIL if target in self.machine.coils else TermKind.OUTPUT, target))
        changed = {fact: fact in facts for fact in self._facts ^ facts}
        self._facts = frozenset(facts)

        def pass_floor() -> None:
            read.passed = True
            for fact, value in changed.items():
                if fact not in self._known or self._known[fact][2].number < read.number:
                    self._known[fact] = (value, self._clock.now, read)

        self._clock.at(floor, Turn.FLOOR, pass_floor)

    def _write(self, read: Read, target: str, on: bool, cause: Cause) -> None:
        """Send one change out. A later change of the same output overtakes one that has not switched yet, and comes
        behind one that switches at the same instant."""
        controller, number = self.machine.controller, read.number
        delay = self._clock.draw("output", target, controller.output_on if on else controller.output_off)

        def switch() -> None:
            if self._switched.get(target, 0) < number:
                self._switched[target] = number
                self._supervisor.switch(target, on, cause)

        time, turn = read.write + delay, Turn.ENERGIZE if on else Turn.RELEASE
        if self._last_sent.get(target) == (time, Turn.ENERGIZE):
            turn = Turn.ENERGIZE
        self._last_sent[target] = time, turn
        self._clock.at(time, turn, switch)

    def finished_visits(self) -> tuple[Visit, ...]:
        return tuple(Visit(visit.step.name, visit.entered, visit.left, visit.cycle) for visit in self.visits)


def _brought_by(
    target: str,
    on: bool,
    entered: list[ActiveVisit],
    leaving: tuple[ActiveVisit, ...],
    ended: Pulse | None,
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
