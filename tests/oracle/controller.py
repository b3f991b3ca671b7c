"""The controller: threads of steps, choices and reads."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from functools import partial

from seqcheck.machine.conditions import TermKind
from seqcheck.machine.devices import ControllerKind
from seqcheck.machine.model import Machine
from seqcheck.machine.steps import Choose, Jump, Step, Together
from tests.oracle.choosing import Choosing
from tests.oracle.clock import Clock
from tests.oracle.commands import Commands, Pulse, brought_by
from tests.oracle.inputs import InputLine
from tests.oracle.knowledge import Fact, Knowledge
from tests.oracle.outside import Outside
from tests.oracle.reads import Cause, Past, Read
from tests.oracle.records import Visit
from tests.oracle.routes import Join, Thread
from tests.oracle.visits import ActiveChoice, ActiveVisit, Wait
from tests.oracle.waiting import Waiting

MOST_AT_ONCE = 1000
"""So many reads at one instant, or cycles begun at one read, are an endless loop."""


class EndlessLoop(RuntimeError):
    """Steps chase each other without time passing."""


@dataclass(frozen=True, slots=True)
class Supervisor:
    """Who is told: ``commanded(entered, before, after, causes)`` behind each read, ``leaves(wait)`` as a step is left
    or a choice made (gives what its sensors add to the past), ``switch(target, on, cause)`` as a coil or an output
    switches."""

    commanded: Callable[[tuple[ActiveVisit, ...], frozenset[str], frozenset[str], dict[str, Cause]], None]
    leaves: Callable[[Wait], Past]
    switch: Callable[[str, bool, Cause], None]


@dataclass(frozen=True, slots=True)
class Occasion:
    """What a read is made for: steps and choices that are left, branches that end, threads that begin, a pulse."""

    visits: tuple[ActiveVisit, ...] = ()
    choices: tuple[ActiveChoice, ...] = ()
    joins: tuple[Join, ...] = ()
    starts: tuple[Thread, ...] = ()
    ended: Pulse | None = None

    @property
    def reader(self) -> str:
        names = [each.name for each in (*self.visits, *self.choices)] or [join.name for join in self.joins]
        if self.ended is not None:
            names = [f"pulse {self.ended.target}"]
        return min(names, default="start")


class ControllerPlay:
    """``active`` are the steps under way in the order in which they were entered, ``standing`` the choices."""

    def __init__(self, clock: Clock, machine: Machine, lines: dict[str, InputLine], supervisor: Supervisor) -> None:
        self.machine = machine
        self.active: list[ActiveVisit] = []
        self.visits: list[ActiveVisit] = []
        self.cycle_starts: dict[str, list[int]] = {sequence.name: [] for sequence in machine.sequences}
        self.knowledge = Knowledge(clock, lines)
        self.outside = Outside(clock, machine, self.knowledge)
        self._waiting = Waiting(clock, machine, self.knowledge, self.outside)
        self.choosing = Choosing(clock, self.knowledge, self.outside, self._waiting)
        self._clock = clock
        self._supervisor = supervisor
        self._commands = Commands(clock, machine, self._end_pulse, supervisor.switch)
        self._order = {sequence.name: number for number, sequence in enumerate(machine.sequences)}
        self._joins: list[Join] = []
        self._by_step: defaultdict[str, list[ActiveVisit]] = defaultdict(list)
        self._reads = 0
        self._reads_now = (0, 0)

    def waits(self) -> Iterator[Wait]:
        yield from self.active
        yield from self.choosing.standing

    # --- reads ---

    def start(self) -> None:
        """The read at time 0 that activates the first step of each sequence."""
        threads = tuple(Thread(sequence, sequence.items, None) for sequence in self.machine.sequences)
        for sequence in self.machine.sequences:
            self.cycle_starts[sequence.name].append(0)
        self._waiting.follow_steady(self.active)
        self._read(Occasion(starts=threads))

    def settle(self) -> None:
        """Leave whatever can be left now, all of it at one read."""
        if not self.knowledge.stirred:
            return
        self.knowledge.stirred = False
        self._waiting.follow_steady(self.active)
        visits = tuple(visit for visit in self.active if visit.gone or visit.ready())
        choices = tuple(choice for choice in self.choosing.standing if choice.gone or choice.ready())
        joins = tuple(join for join in self._joins if join.ready())
        if visits or choices or joins:
            self._read(Occasion(visits, choices, joins))

    def _end_pulse(self, pulse: Pulse) -> None:
        self._read(Occasion(ended=pulse))

    def _read(self, occasion: Occasion) -> None:
        read = self._begin_read(occasion)
        before = self._commands.commanded(self.active)
        for visit in occasion.visits:
            self._leave(visit)
        entered = self._go_on(occasion, read)
        if occasion.ended is not None:
            self._commands.end(occasion.ended)
        self._time(read, occasion.reader)
        self._commands.store(read, entered)
        after = self._commands.commanded(self.active)
        causes = {
            target: Cause(brought_by(target, target in after, entered, occasion.visits, occasion.ended), read.past)
            for target in sorted(before ^ after)
            if target not in self.machine.flags
        }
        self.knowledge.announce(read, self._facts(after))
        self._commands.write(read, after, causes)
        self._supervisor.commanded(tuple(entered), before, after, causes)
        for visit in entered:
            self._waiting.enter(visit)

    def _begin_read(self, occasion: Occasion) -> Read:
        now = self._clock.now
        self._reads += 1
        self._reads_now = (now, self._reads_now[1] + 1 if self._reads_now[0] == now else 1)
        if self._reads_now[1] > MOST_AT_ONCE:
            raise EndlessLoop(f"at {now} us, last reader {occasion.reader}")
        pasts = [self._past_of(wait) for wait in (*occasion.visits, *occasion.choices)]
        pasts += [end.past for join in occasion.joins for end in join.ends]
        if occasion.ended is not None:
            pasts.append(occasion.ended.read.past)
        return Read(self._reads, now, frozenset().union(*pasts))

    def _past_of(self, wait: Wait) -> Past:
        """What has led to a step's being left: its entry and, where its watchdog has not, its sensors, the commands and
        steps that it asked for."""
        if wait.gone:
            return wait.read.past
        reads = [self.knowledge.read_of(literal) for literal in wait.grounds()]
        pasts = [read.past for read in (wait.read, *reads) if read is not None]
        return self._supervisor.leaves(wait).union(*pasts)

    def _time(self, read: Read, reader: str) -> None:
        """Draw the round: it sets the floor of the read, and its write."""
        controller = self.machine.controller
        match controller.kind:
            case ControllerKind.SCAN:
                read.write = read.floor = read.time + self._clock.draw("round", reader, controller.round)
            case ControllerKind.TASK:
                read.floor = read.time + self._clock.draw("round", reader, controller.round)
                read.write = read.time + self._clock.draw("run", reader, controller.run)
            case ControllerKind.IDEAL:
                read.write = read.floor = read.time

    def _facts(self, commanded: frozenset[str]) -> frozenset[Fact]:
        facts: set[Fact] = {(TermKind.STEP, visit.step.name) for visit in self.active}
        for target in commanded:
            if target in self.machine.flags:
                facts.add((TermKind.FLAG, target))
            else:
                facts.add((TermKind.COIL if target in self.machine.coils else TermKind.OUTPUT, target))
        return frozenset(facts)

    # --- leaving and going on ---

    def _leave(self, visit: ActiveVisit) -> None:
        self._waiting.leave(visit)
        visit.left = self._clock.now
        self.active.remove(visit)
        self._clock.log(f"step {visit.step.name} left{' by its watchdog' if visit.gone else ''}")

    def _go_on(self, occasion: Occasion, read: Read) -> list[ActiveVisit]:
        """Each thread to where it stops next, in the order of the text; gives the steps entered."""
        self._joins = [join for join in self._joins if join not in occasion.joins]
        moves: list[tuple[Thread, Callable[[list[ActiveVisit]], None]]] = []
        for visit in occasion.visits:
            moves.append((visit.thread, partial(self._go_on_from, visit, read)))
        for choice in occasion.choices:
            moves.append((choice.thread, partial(self._go_on_from, choice, read)))
        for thread in (*(join.thread for join in occasion.joins), *occasion.starts):
            moves.append((thread, partial(self._advance, thread, read)))
        entered: list[ActiveVisit] = []
        for _, move in sorted(moves, key=lambda each: self._order[each[0].sequence.name]):
            move(entered)
        return entered

    def _go_on_from(self, wait: Wait, read: Read, entered: list[ActiveVisit]) -> None:
        if isinstance(wait, ActiveChoice):
            self.choosing.leave(wait)
            self.choosing.take(wait, stood=True)
        if wait.gone:
            assert wait.watchdog is not None and wait.watchdog.target is not None
            self._jump(wait.thread, wait.watchdog.target, read)
        self._advance(wait.thread, read, entered)

    def _jump(self, thread: Thread, step: str, read: Read) -> None:
        if thread.jump(step):
            self.cycle_starts[thread.sequence.name].append(read.time)

    def _advance(self, thread: Thread, read: Read, entered: list[ActiveVisit]) -> None:
        """Go on until a step is entered, a choice stands, or a branch or the sequence ends."""
        for _ in range(MOST_AT_ONCE):
            match thread.next():
                case Step() as step:
                    entered.append(self._enter(step, thread, read))
                    return
                case Together() as together:
                    self._split(together, thread, read, entered)
                    return
                case Choose() as choose:
                    if not self._choose(choose, thread, read):
                        return
                case Jump(target):
                    self._jump(thread, target, read)
                case None:
                    if not self._end(thread, read):
                        return
        raise EndlessLoop(f"at {read.time} us, sequence {thread.sequence.name} goes round without a step")

    def _split(self, together: Together, thread: Thread, read: Read, entered: list[ActiveVisit]) -> None:
        join = Join(together, thread, len(together.branches))
        self._joins.append(join)
        for branch in together.branches:
            self._advance(Thread(thread.sequence, branch, join), read, entered)

    def _end(self, thread: Thread, read: Read) -> bool:
        """Gives whether the thread goes round."""
        if thread.join is not None:
            thread.join.open -= 1
            thread.join.ends.append(read)
            return False
        if thread.sequence.once:
            return False
        self.cycle_starts[thread.sequence.name].append(read.time)
        thread.restart()
        return True

    def _choose(self, choose: Choose, thread: Thread, read: Read) -> bool:
        """Come to a choice. Gives whether a branch is taken at this very read; else the choice stands."""
        choice = self.choosing.come_to(choose, thread, read)
        if choice.index is None:
            self.choosing.stand(choice)
            return False
        read.past |= self._past_of(choice)
        self.choosing.take(choice)
        return True

    def _enter(self, step: Step, thread: Thread, read: Read) -> ActiveVisit:
        cycle = len(self.cycle_starts[thread.sequence.name]) - 1
        visit = ActiveVisit(thread, read, self.knowledge, step=step, cycle=cycle)
        self.active.append(visit)
        self.visits.append(visit)
        self._by_step[step.name].append(visit)
        self._clock.log(f"step {step.name} entered")
        return visit

    def visits_of(self, step: str) -> list[ActiveVisit]:
        return self._by_step[step]

    def finished_visits(self) -> tuple[Visit, ...]:
        return tuple(Visit(each.name, each.entered, each.left, each.cycle, each.expired) for each in self.visits)
