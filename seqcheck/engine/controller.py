"""The controller: reads at which threads walk on and commands change, and writes that carry the changes out.

Takes a machine and a timeline; fills the trace with reads, visits, choices and spells and hands every written change
on to the valves. What it sees of the inputs comes in through ``see``.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Mapping, Sequence
from functools import partial
from itertools import product
from typing import Protocol

from seqcheck.engine.commands import Commands
from seqcheck.engine.conditions import Aspect, Literal, holding, literals_of
from seqcheck.engine.exits import Exits, name_of
from seqcheck.engine.graph import Event
from seqcheck.engine.knowledge import Knowledge
from seqcheck.engine.plant import Plant
from seqcheck.engine.program import Enter, Fork, Program, Select, programs_of
from seqcheck.engine.threads import Course, Thread, Threads
from seqcheck.engine.timeline import Order, Timeline
from seqcheck.engine.trace import Choice, Edge, Known, Origin, Read, Spell, Trace, Visit, Wait
from seqcheck.machine.conditions import TermKind
from seqcheck.machine.devices import ControllerKind
from seqcheck.machine.model import Machine
from seqcheck.machine.records import record

#: Hands on: coil or output, on or off, the event at which it switches, the origin.
Switch = Callable[[str, bool, int, Origin], None]


@record
class Outcome:
    """One way in which a choice may come out at a read: the branch, None where no condition holds yet; ``signals``
    from outside that bring it about, by whether they are on."""

    taken: int | None
    signals: tuple[tuple[str, bool], ...] = ()


class Guide(Protocol):
    """Decides what nothing in the machine does, and hears of each round."""

    def decide(self, choice: Choice, outcomes: Sequence[Outcome]) -> Outcome:
        """Which of several outcomes a choice has in this run."""

    def round_begins(self, read: Read, sequence: str) -> None:
        """A sequence begins anew at this read, of which nothing has been done yet."""

    def step_comes_again(self, read: Read, step: str) -> None:
        """A step to which a jump or a watchdog leads is entered at this read."""

    def milestone_comes(self, read: Read, step: str) -> None:
        """Another step, of which a sequence has a few here and there, is entered at this read."""


class Controller:
    def __init__(
        self,
        machine: Machine,
        timeline: Timeline,
        trace: Trace,
        knowledge: Knowledge,
        plant: Plant,
        switch: Switch,
        guide: Guide,
        programs: Mapping[str, Program] | None = None,
    ) -> None:
        self._machine = machine
        self._settings = machine.controller
        self._timeline = timeline
        self._trace = trace
        self._knowledge = knowledge
        self._plant = plant
        self._switch = switch
        self._guide = guide
        self._programs = programs
        self._threads = Threads(self)
        self._exits = Exits(machine, timeline, knowledge, self._wake)
        self._read_events: set[int] = set()
        self._commands = Commands(trace.touches)
        self._wait = self._settings.wait
        #: Where the threads stand that this read has yet to let walk on.
        self._walking: list[Thread] = []
        #: How many waits there are for each signal from outside, and for each time that it comes.
        self._waiting_for: Counter[str] = Counter()
        self._awaited: Counter[int] = Counter()

    # Reading ---------------------------------------------------------------------------------------------------

    def start(self) -> None:
        """The read that activates the first step of each sequence, at event 0."""
        programs = programs_of(self._machine) if self._programs is None else self._programs
        courses = [Course(programs[one.name], number) for number, one in enumerate(self._machine.sequences)]
        self._read(0, [Thread(course, 0) for course in courses], "start")

    def see(self, aspect: Aspect, known: Known) -> None:
        self._knowledge.see(aspect, known)
        if aspect[0] in (TermKind.SENSOR, TermKind.SIGNAL) and self._plant.looks_at(aspect):
            self._plant.notice(known.seen, {aspect: known.value})
        self._wake()

    @property
    def state(self) -> tuple[object, ...]:
        """What the controller remembers, without times."""
        walking = tuple((thread.course.number, thread.at, thread.counts) for thread in self._walking)
        return self._knowledge.state, self._threads.state, walking, self._commands.state

    def _wake(self) -> None:
        """Let every thread whose wait is over go on; those that what happens now lets go on share a read."""
        ready: dict[tuple[int, ...], list[Thread]] = {}
        for thread, wait in self._threads.waiting:
            causes = self._exits.causes(wait)
            if causes is not None:
                ready.setdefault(self._timeline.graph.without_idle(causes), []).append(thread)
        for last, threads in ready.items():
            reader = min(_name_of(thread.wait) for thread in threads if thread.wait)
            event = self._timeline.last_of(Event("read", reader), last)
            self._read(event, threads, reader)

    # Changing --------------------------------------------------------------------------------------------------

    def _read(self, event: int, threads: Sequence[Thread], reader: str) -> Read:
        """One read: steps are left and entered, and what this changes is written."""
        read = self._begin_read(event, reader)
        for thread in threads:
            if thread.wait is not None:
                self._leave(thread, read)
        self._walking = list(threads)
        for thread in threads:
            if thread.course.cycle < 0:
                self.begin_anew(thread.course, read)
            self._threads.advance(thread, read)
            self._walking.pop(0)
        self._finish_read(read)
        return read

    def _begin_read(self, event: int, reader: str) -> Read:
        timeline, settings = self._timeline, self._settings
        if event in self._read_events:
            event = timeline.event(Event("read", reader), timeline.fixed(event))
        self._read_events.add(event)
        if settings.kind is ControllerKind.IDEAL:
            write = floor = event
        else:
            floor = timeline.event(Event("write", ""), timeline.delay(event, settings.round, "round", reader))
            write = floor
            if settings.kind is ControllerKind.TASK:
                write = timeline.event(Event("write", ""), timeline.delay(event, settings.run, "run", reader))
        read = Read(event, reader, write, floor)
        self._trace.reads.append(read)
        return read

    def _leave(self, thread: Thread, read: Read) -> None:
        wait = thread.wait
        assert wait is not None
        self._exits.end(wait)
        wait.left = read
        if wait.expired:
            wait.answers = ()
        self._threads.rouse(thread)
        thread.go_behind(wait)
        if isinstance(wait, Visit):
            read.left.append(wait)
            self._commands.leave(wait, read)
        elif isinstance(wait, Choice):
            wait.taken = None if wait.expired else wait.taken
            read.chosen.append(wait)
        if wait.expired and wait.alarm is not None and wait.alarm.watchdog.target == thread.program.first:
            self.begin_anew(thread.course, read)
        self._let_signals_go(wait, read)

    def _let_signals_go(self, wait: Wait, read: Read) -> None:
        """A signal from outside stays until every step that waits for it is left; it has been on, if only for the read
        that sees it."""
        if not wait.signals:
            return
        for literal, (_, seen) in wait.signals.items():
            if literal.wanted and seen in self._timeline.happened:
                self._read_signal(literal.term.subject, seen)
        for name, seen in {(literal.term.subject, seen) for literal, (_, seen) in wait.signals.items()}:
            self._awaited[seen] -= 1
            if not self._awaited[seen]:
                self._timeline.call_off(seen)
            self._waiting_for[name] -= 1
            if not self._waiting_for[name]:
                self._plant.notice(read.event, {(TermKind.SIGNAL, name, None): False})

    def _await_signals(self, wait: Wait) -> None:
        if not wait.signals:
            return
        for name, seen in {(literal.term.subject, seen) for literal, (_, seen) in wait.signals.items()}:
            self._awaited[seen] += 1
            self._waiting_for[name] += 1
        for literal, (_, seen) in wait.signals.items():
            if literal.wanted:
                self._timeline.at(seen, Order.SEEN, partial(self._read_signal, literal.term.subject, seen))

    def _read_signal(self, name: str, seen: int) -> None:
        if self._waiting_for[name]:
            self._plant.notice(seen, {(TermKind.SIGNAL, name, None): True})

    # Host of the threads ---------------------------------------------------------------------------------------

    def enter(self, thread: Thread, enter: Enter, read: Read) -> Visit:
        step = enter.step
        if step.name in thread.program.heads:
            self._guide.step_comes_again(read, step.name)
        elif step.name in thread.program.milestones:
            self._guide.milestone_comes(read, step.name)
        visit = Visit(entered=read, alternatives=enter.alternatives, cycle=thread.course.cycle, step=step)
        self._trace.visits.append(visit)
        read.entered.append(visit)
        self._exits.begin(visit)
        self._await_signals(visit)
        return visit

    def choose(self, thread: Thread, select: Select, read: Read) -> Choice:
        choice = Choice(
            entered=read,
            alternatives=tuple(one for condition in select.waited for one in condition),
            cycle=thread.course.cycle,
            choose=select.choose,
            after=select.behind,
            conditions=select.conditions,
            told={
                literal.aspect: len(self._trace.known[literal.aspect])
                for condition in select.conditions
                for literal in literals_of(condition)
                if not self._knowledge.from_outside(literal.term)
            },
        )
        outcomes = self._outcomes(select)
        outcome = outcomes[0] if len(outcomes) == 1 else self._guide.decide(choice, outcomes)
        choice.taken, choice.asked = outcome.taken, dict(outcome.signals)
        self._trace.choices.append(choice)
        if choice.taken is None:
            self._exits.stand(choice)
            self._await_signals(choice)
        else:
            choice.left = read
            read.chosen.append(choice)
        return choice

    def _outcomes(self, select: Select) -> list[Outcome]:
        """What a choice may come to at this read. Where several ways for the signals from outside lead to one branch,
        they are all alike."""
        asked = dict.fromkeys(
            literal.term.subject
            for condition in select.conditions
            for literal in literals_of(condition)
            if self._knowledge.from_outside(literal.term)
        )
        found: dict[object, Outcome] = {}
        for values in product((True, False), repeat=len(asked)):
            signals = dict(zip(asked, values, strict=True))

            def is_so(literal: Literal, signals: dict[str, bool] = signals) -> bool:
                if literal.term.subject in signals:
                    return signals[literal.term.subject] == literal.wanted
                return self._knowledge.of(literal.aspect).value == literal.wanted

            taken = next((n for n, one in enumerate(select.conditions) if holding(one, is_so) is not None), None)
            outcome = Outcome(taken, tuple(signals.items()))
            found.setdefault(outcome if taken is None else taken, outcome)
        return sorted(found.values(), key=lambda one: len(select.conditions) if one.taken is None else one.taken)

    def begin_anew(self, course: Course, read: Read) -> None:
        course.cycle += 1
        self._trace.rounds.setdefault(course.program.name, []).append(read)
        if course.number == 0:
            self._trace.cycles.append(read)
        self._guide.round_begins(read, course.program.name)

    def join(self, thread: Thread, fork: Fork) -> None:
        reader = f"join {fork.place.line}:{fork.place.column}"
        joined = self._timeline.last_of(Event("join", reader), thread.ended)

        def go_on() -> None:
            self._threads.rouse(thread)
            thread.at, thread.branches, thread.ended = fork.join, 0, []
            self._read(joined, [thread], reader)

        self._timeline.at(joined, Order.CONTROLLER, go_on)

    def never_enters(self, course: Course) -> None:
        self._trace.stepless = course.program.name

    # Writing ---------------------------------------------------------------------------------------------------

    def _know_later(self, aspect: Aspect, value: bool, read: Read) -> None:
        """Steps and commands change at a read and are known to the next one."""
        kind, subject, _ = aspect
        if kind in (TermKind.STEP, TermKind.FLAG) and self._plant.looks_at(aspect):
            self._plant.notice(read.event, {aspect: value})
        if aspect in self._knowledge.asked:
            edge = Edge(subject, value, read.event, read.floor, read.floor)
            self._trace.edges.setdefault(subject, []).append(edge)
            known = Known(value, read.floor, read.floor, edge)

            def learn() -> None:
                self._knowledge.held[aspect] = value
                self.see(aspect, known)

            self._timeline.at(read.floor, Order.SEEN, learn)

    def _finish_read(self, read: Read) -> None:
        """Settle which steps are active and what is commanded after this read, and write the changes."""
        left, entered = ([visit.step.name for visit in visits] for visits in (read.left, read.entered))
        for name in left:
            if name not in entered:
                self._know_later((TermKind.STEP, name, None), False, read)
        for name in entered:
            if name not in left:
                self._know_later((TermKind.STEP, name, None), True, read)
        for visit in read.entered:
            for origin, target in self._commands.enter(visit):
                self._end_pulse_later(origin, target)
        for target, origin in self._commands.changes(read):
            if target in self._machine.flags:
                self._know_later((TermKind.FLAG, target, None), self._commands.commanded(target), read)
            else:
                self._write(target, origin)

    def _end_pulse_later(self, origin: Origin, coil: str) -> None:
        timeline, read = self._timeline, origin.read
        over = timeline.event(Event("pulse over", coil), timeline.fixed(read.event, origin.duration or 0))
        ends = timeline.event(
            Event("pulse end", coil), timeline.fixed(read.floor), timeline.delay(over, self._wait, "pulse", coil)
        )

        def end() -> None:
            if self._commands.runs(coil, origin):
                read = self._begin_read(ends, f"pulse {coil}")
                self._trace.pulses_over[read.event] = over
                self._commands.end_pulse(coil, origin, read)
                self._finish_read(read)

        self._commands.begin_pulse(coil, origin, ends)
        timeline.at(ends, Order.CONTROLLER, end)

    def _write(self, target: str, origin: Origin) -> None:
        """A command has changed: it switches its own output delay after the write."""
        read, timeline = origin.read, self._timeline
        on = self._commands.commanded(target)
        is_coil = target in self._machine.coils
        device = self._machine.coils[target] if is_coil else self._machine.outputs[target]
        settings = self._settings if device.via is None else self._machine.islands[device.via]
        event = timeline.event(
            Event("coil" if is_coil else "output", target, "on" if on else "off"),
            timeline.delay(
                read.write if device.via is None else self._updated(read, device.via),
                settings.output_on if on else settings.output_off,
                "output",
                target,
            ),
        )
        spells = self._trace.spells.setdefault(target, [])
        if on:
            spells.append(Spell(target, origin, event))
        else:
            spells[-1].ended, spells[-1].off = origin, event
        self._know_later((TermKind.COIL if is_coil else TermKind.OUTPUT, target, None), on, read)
        self._switch(target, on, event, origin)

    def _updated(self, read: Read, island: str) -> int:
        """The event at which the island has what this read writes: one for all its outputs."""
        if island not in read.updates:
            read.updates[island] = self._timeline.event(
                Event("update", island),
                self._timeline.delay(read.write, self._machine.islands[island].update, "update", island),
            )
        return read.updates[island]


def _name_of(wait: Wait) -> str:
    return wait.step.name if isinstance(wait, Visit) else name_of(wait) if isinstance(wait, Choice) else ""
