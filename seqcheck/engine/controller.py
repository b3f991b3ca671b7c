"""The controller: threads that walk the sequence, reads that change commands, writes that carry them out.

Takes a machine and a timeline; fills the trace with reads, visits and spells and hands every written change on to
the valves. What it sees of the inputs comes in through ``see``.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field

from seqcheck.engine.commands import Commands
from seqcheck.engine.graph import OPEN, Event
from seqcheck.engine.program import Again, BranchEnd, Count, Enter, Fork, Last, Program, compile_sequence
from seqcheck.engine.scope import Literal, literals_of
from seqcheck.engine.timeline import Order, Timeline
from seqcheck.engine.trace import Answer, Edge, Origin, Read, Spell, Trace, Visit
from seqcheck.machine.conditions import TermKind, terms_of
from seqcheck.machine.devices import ControllerKind, OutsideSignal
from seqcheck.machine.model import Machine, steps_of
from seqcheck.machine.time import Span

#: Hands on: coil or output, on or off, the event at which it switches, the origin.
Switch = Callable[[str, bool, int, Origin], None]


@dataclass(slots=True, eq=False)
class Thread:
    """A place in a program. A parent waits for its branches and keeps the floors of those that have ended."""

    program: Program
    at: int
    counts: tuple[int, ...] = ()
    parent: Thread | None = None
    branches: int = 0
    ended: list[int] = field(default_factory=list)
    visit: Visit | None = None


@dataclass(frozen=True, slots=True)
class Known:
    """What the controller knows of a term: its value, since which event, and since when it holds at the input."""

    value: bool
    seen: int
    held: int
    edge: Edge | None = None


class Controller:
    def __init__(
        self,
        machine: Machine,
        timeline: Timeline,
        trace: Trace,
        switch: Switch,
        cycle_started: Callable[[Read], None],
    ) -> None:
        self._machine = machine
        self._settings = machine.controller
        self._timeline = timeline
        self._trace = trace
        self._switch = switch
        self._cycle_started = cycle_started
        self._threads: list[Thread] = []
        self._known: dict[tuple[TermKind, str], Known] = {}
        self._read_events: set[int] = set()
        self._commands = Commands(trace.touches)
        self.asked = {
            (term.kind, term.subject)
            for sequence in machine.sequences
            for step in steps_of(sequence)
            for term in terms_of(step.until)
        }
        self._wait = self._settings.wait
        self._cycle = 0
        self._last_time = -1
        self._reads_at_once = 0
        self._patience = 50 + 4 * sum(len(list(steps_of(sequence))) for sequence in machine.sequences)

    # Reading ---------------------------------------------------------------------------------------------------

    def start(self) -> None:
        """The read that activates the first step of each sequence, at event 0."""
        threads = [Thread(compile_sequence(sequence), 0) for sequence in self._machine.sequences]
        self._trace.cycles.append(self._read(0, threads, "start"))

    def see(self, kind: TermKind, subject: str, known: Known) -> None:
        self._known[kind, subject] = known
        self._wake()

    def initially(self, kind: TermKind, subject: str, value: bool) -> None:
        self._known[kind, subject] = Known(value, 0, 0)

    def waits_for(self, kind: TermKind, subject: str) -> bool:
        return (kind, subject) in self.asked

    @property
    def state(self) -> tuple[object, ...]:
        """What the controller remembers, without times."""
        known = sorted((kind.value, subject, known.value) for (kind, subject), known in self._known.items())
        places = [(thread.at, thread.counts, thread.branches, len(thread.ended)) for thread in self._threads]
        return tuple(known), tuple(places), self._commands.state

    def _wake(self) -> None:
        """Let every thread whose exit holds go on; those that what happens now lets go on share a read."""
        ready: dict[tuple[int, ...], list[Thread]] = {}
        for thread in self._threads:
            causes = self._exit_causes(thread.visit) if thread.visit else None
            if causes is not None:
                ready.setdefault(self._timeline.graph.without_idle(causes), []).append(thread)
        for last, threads in ready.items():
            reader = min(thread.visit.step.name for thread in threads if thread.visit)
            event = self._timeline.last_of(Event("read", reader), last)
            self._read(event, threads, reader)

    def _exit_causes(self, visit: Visit) -> list[int] | None:
        """The events that the exit has waited for; None where it does not hold yet."""
        happened = self._timeline.happened
        answers = [self._answer(visit, literal) for literal in visit.literals]
        holds = all(answer is not None for answer in answers)
        if visit.step.steady is not None:
            self._keep_steady(visit, [answer.seen for answer in answers if answer] if holds else None)
        causes = [visit.entered.floor]
        causes += [event for event in (visit.dwell_seen, visit.steady_seen) if event is not None]
        if not holds or (visit.step.steady is not None and visit.steady_seen is None):
            return None
        if any(event not in happened for event in causes):
            return None
        visit.answers = tuple(answer for answer in answers if answer)
        return causes + [answer.seen for answer in visit.answers]

    def _answer(self, visit: Visit, literal: Literal) -> Answer | None:
        if literal in visit.signals:
            held, seen = visit.signals[literal]
            signal = self._machine.signals[literal.term.subject]
            unlimited = isinstance(signal, OutsideSignal) and signal.after is None
            return Answer(literal, seen, held, outside=unlimited) if seen in self._timeline.happened else None
        known = self._known[literal.term.kind, literal.term.subject]
        return Answer(literal, known.seen, known.held, known.edge) if known.value == literal.wanted else None

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

    # Changing --------------------------------------------------------------------------------------------------

    def _read(self, event: int, threads: Sequence[Thread], reader: str) -> Read:
        """One read: steps are left and entered, and what this changes is written."""
        read = self._begin_read(event, reader)
        started_cycle = False
        for thread in threads:
            if thread.visit is not None:
                self._leave(thread, read)
        for thread in threads:
            started_cycle = self._advance(thread, read) or started_cycle
        self._finish_read(read)
        if started_cycle:
            self._trace.cycles.append(read)
            self._cycle_started(read)
        return read

    def _begin_read(self, event: int, reader: str) -> Read:
        timeline, settings = self._timeline, self._settings
        if event in self._read_events:
            event = timeline.event(Event("read", reader), timeline.fixed(event))
        self._read_events.add(event)
        self._notice_endless(timeline.times[event])
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

    def _notice_endless(self, time: int) -> None:
        """Many reads at one instant: steps chase each other, or the run has stopped making sense."""
        self._reads_at_once = self._reads_at_once + 1 if time == self._last_time else 0
        self._last_time = time
        if self._reads_at_once > self._patience:
            self._trace.endless = True

    def _leave(self, thread: Thread, read: Read) -> None:
        visit = thread.visit
        assert visit is not None
        visit.left = read
        read.left.append(visit)
        thread.visit = None
        thread.at += 1
        self._threads.remove(thread)
        self._commands.leave(visit, read)
        self._know_later(TermKind.STEP, visit.step.name, False, read)

    def _advance(self, thread: Thread, read: Read) -> bool:
        """Walk on to the next steps; whether the sequence has begun anew."""
        again = False
        while True:
            match thread.program[thread.at]:
                case Enter(step):
                    self._enter(thread, step.name, read)
                    return again
                case Count(times, behind):
                    if times:
                        thread.counts = (*thread.counts, times)
                        thread.at += 1
                    else:
                        thread.at = behind
                case Again(start):
                    left = thread.counts[-1] - 1
                    thread.counts = (*thread.counts[:-1], left) if left else thread.counts[:-1]
                    thread.at = start + 1 if left else thread.at + 1
                case Fork(branches, _, _):
                    thread.branches, thread.ended = len(branches), []
                    self._threads.append(thread)
                    branch_threads = [Thread(thread.program, start, parent=thread) for start in branches]
                    for branch in branch_threads:
                        self._advance(branch, read)
                    return again
                case BranchEnd():
                    self._end_branch(thread, read)
                    return again
                case Last(once):
                    if once or again:
                        self._trace.endless = self._trace.endless or again
                        return again
                    again = True
                    self._cycle += 1
                    thread.at = 0

    def _end_branch(self, thread: Thread, read: Read) -> None:
        """The branch has ended; the last one to be known lets the parent go on, at a read of its own."""
        parent = thread.parent
        assert parent is not None
        parent.ended.append(read.floor)
        if len(parent.ended) < parent.branches:
            return
        fork = parent.program[parent.at]
        assert isinstance(fork, Fork)
        reader = f"join {fork.place.line}:{fork.place.column}"
        joined = self._timeline.last_of(Event("join", reader), parent.ended)

        def go_on() -> None:
            self._threads.remove(parent)
            parent.at, parent.branches, parent.ended = fork.join, 0, []
            self._read(joined, [parent], reader)

        self._timeline.at(joined, Order.CONTROLLER, go_on)

    def _enter(self, thread: Thread, name: str, read: Read) -> None:
        enter = thread.program[thread.at]
        assert isinstance(enter, Enter)
        step, timeline = enter.step, self._timeline
        visit = Visit(step, literals_of(step.until), read, self._cycle)
        thread.visit = visit
        self._threads.append(thread)
        self._trace.visits.append(visit)
        read.entered.append(visit)
        if step.dwell is not None:
            visit.dwell_over = timeline.event(Event("dwell over", name), timeline.fixed(read.event, step.dwell))
            visit.dwell_seen = timeline.event(
                Event("dwell seen", name), timeline.delay(visit.dwell_over, self._wait, "dwell", name)
            )
            timeline.at(visit.dwell_seen, Order.CONTROLLER, self._wake)
        for literal in visit.literals:
            if literal.term.kind is TermKind.SIGNAL:
                self._await_signal(visit, literal)
        self._know_later(TermKind.STEP, name, True, read)
        timeline.at(read.floor, Order.CONTROLLER, self._wake)

    def _await_signal(self, visit: Visit, literal: Literal) -> None:
        """A signal from outside comes some time after a step begins to wait for it."""
        name, timeline = literal.term.subject, self._timeline
        arrival = visit.entered.signals.get((name, literal.wanted))
        if arrival is None:
            arrival = visit.entered.signals[name, literal.wanted] = self._let_come(visit, literal)
        visit.signals[literal] = arrival
        timeline.at(arrival[1], Order.SEEN, self._wake)

    def _let_come(self, visit: Visit, literal: Literal) -> tuple[int, int]:
        name, timeline = literal.term.subject, self._timeline
        signal = self._machine.signals[name]
        assert isinstance(signal, OutsideSignal)
        delay = signal.after or Span(0, 0, OPEN)
        detail = "on" if literal.wanted else "off"
        filtered = self._settings.input_on if literal.wanted else self._settings.input_off
        comes = timeline.event(
            Event("signal", name, detail), timeline.delay(visit.entered.event, delay, "outside", name)
        )
        held = timeline.event(Event("input", name, detail), timeline.delay(comes, filtered, "filter", name))
        seen = timeline.event(Event("seen", name, detail), timeline.delay(held, self._wait, "see", name))
        return held, seen

    def _know_later(self, kind: TermKind, subject: str, value: bool, read: Read) -> None:
        """Steps and commands change at a read and are known to the next one."""
        if self.waits_for(kind, subject):
            edge = Edge(subject, value, read.event, read.floor, read.floor)
            self._trace.edges.setdefault(subject, []).append(edge)
            known = Known(value, read.floor, read.floor, edge)
            self._timeline.at(read.floor, Order.CONTROLLER, lambda: self.see(kind, subject, known))

    def _finish_read(self, read: Read) -> None:
        """Settle what is commanded after this read, and write the changes."""
        for visit in read.entered:
            for origin, target in self._commands.enter(visit):
                self._end_pulse_later(origin, target)
        for target, origin in self._commands.changes(read):
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
        span = self._settings.output_on if on else self._settings.output_off
        event = timeline.event(
            Event("coil" if target in self._machine.coils else "output", target, "on" if on else "off"),
            timeline.delay(read.write, span, "output", target),
        )
        spells = self._trace.spells.setdefault(target, [])
        if on:
            spells.append(Spell(target, origin, event))
        else:
            spells[-1].ended, spells[-1].off = origin, event
        kind = TermKind.COIL if target in self._machine.coils else TermKind.OUTPUT
        self._know_later(kind, target, on, read)
        self._switch(target, on, event, origin)
