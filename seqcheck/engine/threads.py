"""Threads: where each sequence stands, and how it walks on from one step to the next.

Takes programs; at a read walks a thread along to the steps that it enters, and tells the controller of each. Branches
of a ``together`` are threads of their own; a choice that cannot be taken yet keeps its thread waiting.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Protocol

from seqcheck.engine.program import Again, BranchEnd, Count, Enter, Fork, Go, Last, Program, Select
from seqcheck.engine.trace import Choice, Read, Visit, Wait


@dataclass(slots=True, eq=False)
class Course:
    """A sequence as it is run: the ``number``-th of the text, in its ``cycle``-th round."""

    program: Program
    number: int
    cycle: int = -1


@dataclass(slots=True, eq=False)
class Thread:
    """A place in a program. A parent waits for its branches and keeps the floors of those that have ended."""

    course: Course
    at: int
    counts: tuple[int, ...] = ()
    parent: Thread | None = None
    branches: int = 0
    ended: list[int] = field(default_factory=list)
    wait: Wait | None = None

    @property
    def program(self) -> Program:
        return self.course.program

    def go_behind(self, wait: Wait) -> None:
        """To where the thread goes on once the wait is over."""
        instruction = self.program.code[self.at]
        if wait.alarm is not None and wait.alarm.expired:
            assert wait.alarm.watchdog.target is not None
            self.jump(self.program.steps[wait.alarm.watchdog.target])
        elif isinstance(wait, Choice):
            assert isinstance(instruction, Select) and wait.taken is not None
            self.at = instruction.branches[wait.taken]
        else:
            self.at += 1

    def jump(self, to: int) -> None:
        self.counts = self.program.counts_after_jump(self.at, self.counts, to)
        self.at = to


class Host(Protocol):
    """What happens where a thread comes to."""

    def enter(self, thread: Thread, enter: Enter, read: Read) -> Visit:
        """The thread is in a step."""

    def choose(self, thread: Thread, select: Select, read: Read) -> Choice:
        """The thread has come to a choice; one that is not taken yet waits."""

    def begin_anew(self, course: Course, read: Read) -> None:
        """The sequence begins a new round."""

    def join(self, thread: Thread, fork: Fork) -> None:
        """All branches of the thread have ended."""

    def never_enters(self, course: Course) -> None:
        """A sequence goes round and round without a step."""


class Threads:
    def __init__(self, host: Host) -> None:
        self._host = host
        self.active: list[Thread] = []

    @property
    def state(self) -> tuple[object, ...]:
        return tuple(
            (
                thread.course.number,
                thread.at,
                thread.counts,
                thread.branches,
                len(thread.ended),
                thread.wait.alarm.expired if thread.wait is not None and thread.wait.alarm is not None else None,
            )
            for thread in self.active
        )

    @property
    def waiting(self) -> list[tuple[Thread, Wait]]:
        """Those of the active threads that wait for something, by sequence."""
        found = [(thread, thread.wait) for thread in self.active if thread.wait is not None]
        found.sort(key=lambda one: one[0].course.number)
        return found

    def rest(self, thread: Thread, wait: Wait | None = None) -> None:
        thread.wait = wait
        self.active.append(thread)

    def rouse(self, thread: Thread) -> None:
        thread.wait = None
        self.active.remove(thread)

    def advance(self, thread: Thread, read: Read) -> None:
        """Walk on until the thread waits for something."""
        again = False
        while True:
            match thread.program.code[thread.at]:
                case Enter() as enter:
                    self.rest(thread, self._host.enter(thread, enter, read))
                    return
                case Select() as select:
                    choice = self._host.choose(thread, select, read)
                    if choice.taken is None:
                        self.rest(thread, choice)
                        return
                    thread.at = select.branches[choice.taken]
                case Go(to, step):
                    if step is None:
                        thread.at = to
                    else:
                        thread.jump(to)
                        if step == thread.program.first:
                            self._host.begin_anew(thread.course, read)
                case Count(times, behind):
                    if times:
                        thread.counts = (*thread.counts, times)
                        thread.at += 1
                    else:
                        thread.at = behind
                case Again(start):
                    left = thread.counts[-1] - 1
                    thread.counts = (*thread.counts[:-1], left) if left > 0 else thread.counts[:-1]
                    thread.at = start + 1 if left > 0 else thread.at + 1
                case Fork(branches):
                    self._fork(thread, branches, read)
                    return
                case BranchEnd():
                    self._end_branch(thread, read)
                    return
                case Last(once):
                    if once or again:
                        if again:
                            self._host.never_enters(thread.course)
                        return
                    again = True
                    thread.at = 0
                    self._host.begin_anew(thread.course, read)

    def _fork(self, thread: Thread, branches: tuple[int, ...], read: Read) -> None:
        thread.branches, thread.ended = len(branches), []
        self.rest(thread)
        for start in branches:
            self.advance(Thread(thread.course, start, parent=thread), read)

    def _end_branch(self, thread: Thread, read: Read) -> None:
        """The branch has ended; the last one to be known lets the parent go on, at a read of its own."""
        parent = thread.parent
        assert parent is not None
        parent.ended.append(read.floor)
        if len(parent.ended) == parent.branches:
            fork = parent.program.code[parent.at]
            assert isinstance(fork, Fork)
            self._host.join(parent, fork)
