"""Cycle times over the timed state graph: the least and the greatest over all choices, and for each way of a choice.

Takes the states and runs of a machine and, for one sequence, the runs in which a cycle of it has begun; gives
durations. A run into which a sequence that waits for a signal from outside has not yet gone counts from where it leaves
its first step. Where choices can lead round and round without end, the greatest is open.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass

from seqcheck.engine.states import Run, TimedStates
from seqcheck.machine.findings import Duration


@dataclass(frozen=True, slots=True)
class Longest:
    """``time`` is None where nothing limits it; ``runs``: the way that takes it."""

    time: int | None
    runs: tuple[Run, ...]


class CycleWays:
    """The cycles of one ``sequence`` that come up again and again."""

    def __init__(self, timed: TimedStates, sequence: str) -> None:
        self._sequence = sequence
        self._starts = {state.number for state in timed.states if sequence in state.rounds}
        again = _come_up_again(timed)
        self._runs = [run for run in timed.runs if run.begin in again and run.end in again]
        self._from: dict[int, list[Run]] = {}
        self._to: dict[int, list[Run]] = {}
        for run in self._runs:
            self._from.setdefault(run.begin, []).append(run)
            self._to.setdefault(run.end, []).append(run)

    def duration(self, through: Callable[[Run], bool] | None = None) -> Duration | None:
        """Over all cycles, or those that go ``through`` a run; None where there are none."""
        least = self._least(through)
        if least is None:
            return None
        return Duration(least, least, self.longest(through).time)

    # Shortest ways ---------------------------------------------------------------------------------------------

    def _least(self, through: Callable[[Run], bool] | None) -> int | None:
        ahead = self._shortest(self._from, lambda run: run.end)
        behind = self._shortest(self._to, lambda run: run.begin)
        ways = [
            ahead[run.begin] + run.for_cycle(self._sequence).least + behind[run.end]
            for run in self._runs
            if run.begin in ahead and run.end in behind and (through is None or through(run))
        ]
        return min(ways, default=None)

    def _shortest(self, runs_at: Mapping[int, list[Run]], far: Callable[[Run], int]) -> dict[int, int]:
        """From the starts to every state, within one cycle."""
        found = dict.fromkeys(self._starts & set(runs_at), 0)
        waiting = list(found)
        while waiting:
            state = waiting.pop()
            for run in runs_at.get(state, ()):
                time = found[state] + run.for_cycle(self._sequence).least
                if far(run) not in self._starts and time < found.get(far(run), time + 1):
                    found[far(run)] = time
                    waiting.append(far(run))
        return found

    # Longest ways ----------------------------------------------------------------------------------------------

    def longest(self, through: Callable[[Run], bool] | None = None) -> Longest:
        """Open where a way leads round without coming to the end of a cycle, or a run is open itself."""
        order = self._in_order()
        if order is None:
            return Longest(None, ())
        best: dict[tuple[int, bool], tuple[int, tuple[Run, ...]]] = {}
        for start in self._starts:
            best[start, through is None] = 0, ()
        ends: list[tuple[int, tuple[Run, ...]]] = []
        for state in order:
            for passed in (False, True):
                if (state, passed) not in best:
                    continue
                time, way = best[state, passed]
                for run in self._from.get(state, ()):
                    greatest = run.for_cycle(self._sequence).greatest
                    if greatest is None:
                        return Longest(None, ())
                    reached = time + greatest, (*way, run)
                    key = run.end, passed or (through is not None and through(run))
                    if run.end in self._starts:
                        ends += [reached] if key[1] else []
                    elif reached[0] > best.get(key, (-1, ()))[0]:
                        best[key] = reached
        return Longest(*max(ends, key=lambda end: end[0], default=(0, ())))

    def _in_order(self) -> list[int] | None:
        """The states in the order of a cycle; None where a way leads round within one."""
        order: list[int] = []
        done: set[int] = set()
        for root in sorted(self._starts):
            stack: list[tuple[int, bool]] = [(root, False)]
            way: set[int] = set()
            while stack:
                state, leaving = stack.pop()
                if leaving:
                    way.discard(state)
                    done.add(state)
                    order.append(state)
                elif state in way:
                    return None
                elif state not in done:
                    way.add(state)
                    stack.append((state, True))
                    stack += [(run.end, False) for run in self._from.get(state, ()) if run.end not in self._starts]
        return order[::-1]


def _come_up_again(timed: TimedStates) -> set[int]:
    """The states through which a machine comes again and again: those on a way back to themselves."""
    following: dict[int, set[int]] = {state.number: set() for state in timed.states}
    for run in timed.runs:
        following[run.begin].add(run.end)
    return {state for state in following if state in _reached(following, following[state])}


def _reached(following: Mapping[int, set[int]], begin: Iterable[int]) -> set[int]:
    found = set(begin)
    waiting = list(found)
    while waiting:
        for state in following[waiting.pop()] - found:
            found.add(state)
            waiting.append(state)
    return found
