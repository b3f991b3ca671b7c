"""A sequence as a list of instructions that threads walk along.

Takes a resolved sequence; gives instructions in which loops, branches, choices and jumps are addresses, so that where
a thread stands is a number and its loop counts.
"""

from __future__ import annotations

from collections.abc import Collection, Mapping
from dataclasses import dataclass, field

from seqcheck.engine.conditions import Alternatives, alternatives_of
from seqcheck.machine.model import Machine, items_of
from seqcheck.machine.places import Place
from seqcheck.machine.records import record
from seqcheck.machine.steps import Choose, Item, Jump, Repeat, Sequence, Step, Together


@record
class Enter:
    """Be in a step until its exit; then go on behind it."""

    step: Step
    alternatives: Alternatives


@record
class Count:
    """Begin a loop; ``behind`` is where to go on when it runs no time at all."""

    times: int
    behind: int


@record
class Again:
    """The end of a loop that begins at ``start``."""

    start: int


@record
class Fork:
    """A thread for each branch; behind them the thread goes on at ``join``."""

    branches: tuple[int, ...]
    join: int
    place: Place


@record
class BranchEnd:
    """A branch has ended; it waits for the others."""


@record
class Select:
    """Go on at the first of ``branches`` whose condition holds."""

    choose: Choose
    conditions: tuple[Alternatives, ...]
    branches: tuple[int, ...]
    behind: str | None

    @property
    def waited(self) -> tuple[Alternatives, ...]:
        """The conditions for which a thread may have to wait here."""
        return self.conditions if self.choose.choices[-1].condition is not None else ()


@record
class Go:
    """On at another address; ``step``: the one that is jumped to, None where a branch of a choice has ended."""

    to: int
    step: str | None = None


@record
class Last:
    """Behind the last step: from the start again, or the end of a ``once``."""

    once: bool


#: Milestones are so many steps apart, or more, so that no sequence has more than so many (and one) of them.
_LEAST_APART = 16
_MOST_MILESTONES = 32

Instruction = Enter | Count | Again | Fork | BranchEnd | Select | Go | Last


@dataclass(slots=True)
class Program:
    """``loops``: for each instruction the loops around it, by the addresses of their beginnings, outer ones first.
    ``steps``: the address of each step by its qualified name. ``first``: the step that begins a cycle whenever it is
    entered by a jump; None where the sequence begins with something else. ``heads``: the steps to which jumps and
    watchdogs lead. ``milestones``: some of its other steps, evenly spread over a long sequence."""

    name: str
    code: list[Instruction] = field(default_factory=list)
    loops: list[tuple[int, ...]] = field(default_factory=list)
    steps: dict[str, int] = field(default_factory=dict)
    first: str | None = None
    heads: set[str] = field(default_factory=set)
    milestones: set[str] = field(default_factory=set)

    def counts_after_jump(self, at: int, counts: tuple[int, ...], to: int) -> tuple[int, ...]:
        """The rounds left of the loops around ``to``: those that are not left keep theirs."""
        kept = []
        for loop, other, count in zip(self.loops[at], self.loops[to], counts, strict=False):
            if loop != other:
                break
            kept.append(count)
        return (*kept, *(self._times(loop) for loop in self.loops[to][len(kept) :]))

    def steps_behind(self, step: str, known: Collection[str]) -> set[str]:
        """The steps that can come to be active once this one is, itself included, as far as the next ``known`` one."""
        found: set[int] = set()
        waiting = [self.steps[step]]
        while waiting:
            at = waiting.pop()
            if at not in found:
                found.add(at)
                instruction = self.code[at]
                if not isinstance(instruction, Enter) or instruction.step.name not in known:
                    waiting += self._following(at)
        return {name for name, at in self.steps.items() if at in found}

    def _following(self, at: int) -> tuple[int, ...]:
        match self.code[at]:
            case Enter(step):
                target = step.watchdog.target if step.watchdog is not None else None
                return (at + 1, *([self.steps[target]] if target is not None else []))
            case Count(_, behind):
                return at + 1, behind
            case Again(start):
                return start + 1, at + 1
            case Fork(branches, join):
                return (*branches, join)
            case Select(choose, _, branches):
                target = choose.watchdog.target if choose.watchdog is not None else None
                return (*branches, *([self.steps[target]] if target is not None else []))
            case Go(to):
                return (to,)
            case Last(once):
                return () if once else (0,)
            case BranchEnd():
                return ()

    def _times(self, loop: int) -> int:
        begin = self.code[loop]
        assert isinstance(begin, Count)
        return begin.times


def programs_of(machine: Machine) -> Mapping[str, Program]:
    """The program of each sequence by its name."""
    return {sequence.name: compile_sequence(sequence) for sequence in machine.sequences}


def compile_sequence(sequence: Sequence) -> Program:
    compiler = _Compiler(Program(sequence.name))
    compiler.compile(sequence.items)
    compiler.add(Last(sequence.once))
    program = compiler.program
    for address, instruction in enumerate(program.code):
        if isinstance(instruction, Go) and instruction.step is not None:
            program.code[address] = Go(program.steps[instruction.step], instruction.step)
            program.heads.add(instruction.step)
    watchdogs = (item.watchdog for item in items_of(sequence.items) if isinstance(item, Step | Choose))
    program.heads |= {one.target for one in watchdogs if one is not None and one.target is not None}
    if sequence.items and isinstance(sequence.items[0], Step):
        program.first = sequence.items[0].name
    steps = [item.name for item in sequence.items if isinstance(item, Step)]
    apart = max(_LEAST_APART, len(steps) // _MOST_MILESTONES)
    program.milestones = set(steps[apart::apart]) - program.heads
    return program


class _Compiler:
    def __init__(self, program: Program) -> None:
        self.program = program
        self._loops: tuple[int, ...] = ()
        self._behind: str | None = None

    def add(self, instruction: Instruction) -> int:
        self.program.code.append(instruction)
        self.program.loops.append(self._loops)
        return len(self.program.code) - 1

    @property
    def _next(self) -> int:
        return len(self.program.code)

    def compile(self, items: tuple[Item, ...]) -> None:
        for item in items:
            match item:
                case Step():
                    self.program.steps[item.name] = self.add(Enter(item, alternatives_of(item.until)))
                    self._behind = item.name
                case Repeat():
                    self._repeat(item)
                case Together():
                    self._together(item)
                case Choose():
                    self._choose(item)
                case Jump(target):
                    self.add(Go(0, target))

    def _repeat(self, item: Repeat) -> None:
        start = self.add(Count(item.times, 0))
        outer, self._loops = self._loops, (*self._loops, start)
        self.compile(item.items)
        self.add(Again(start))
        self._loops = outer
        self.program.code[start] = Count(item.times, self._next)

    def _together(self, item: Together) -> None:
        fork = self.add(BranchEnd())
        starts = []
        outer, self._loops = self._loops, ()
        for branch in item.branches:
            starts.append(self._next)
            self.compile(branch)
            self.add(BranchEnd())
        self._loops = outer
        self.program.code[fork] = Fork(tuple(starts), self._next, item.place)

    def _choose(self, item: Choose) -> None:
        select = self.add(BranchEnd())
        starts, ends, behind = [], [], self._behind
        for choice in item.choices:
            self._behind = behind
            starts.append(self._next)
            self.compile(choice.items)
            ends.append(self.add(BranchEnd()))
        for end in ends:
            self.program.code[end] = Go(self._next)
        conditions = tuple(alternatives_of(choice.condition) for choice in item.choices)
        self.program.code[select] = Select(item, conditions, tuple(starts), behind)
