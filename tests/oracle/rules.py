"""The rules of a machine held against one run, while it goes."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial

from seqcheck.machine.conditions import Condition
from seqcheck.machine.rules import CycleLimit, Never, PathLimit, Rule
from tests.oracle.clock import Clock, Turn
from tests.oracle.records import RuleTold

Look = Callable[[Condition], bool]


class Measure:
    """The shortest and the longest of what a rule measures, and whether it has been told of as broken. What lasts too
    long is told at the moment at which it could last no longer, what is too short as it ends."""

    kind = ""

    def __init__(self, clock: Clock, rule: Rule) -> None:
        self.shortest: int | None = None
        self.longest: int | None = None
        self.broken = False
        self.rule = rule
        self._clock = clock

    def note(self, time: int, over: bool = True) -> None:
        """``over``: it lasts no longer."""
        self.longest = time if self.longest is None else max(self.longest, time)
        if over:
            self.shortest = time if self.shortest is None else min(self.shortest, time)

    def tell(self, words: str) -> None:
        self.broken = True
        self._clock.incident(self.kind, self.rule.text, None, words, diverts=False)

    def watch(self, start: int, most: int, lasts: Callable[[], bool], words: str) -> None:
        """Look at the end of the instant at which ``most`` is over."""

        def look() -> None:
            if lasts():
                self.tell(words)

        self._clock.at(max(self._clock.now, start + most), Turn.VERDICT, look, idle=True)

    def told(self) -> RuleTold:
        rule = self.rule
        return RuleTold(self.kind, rule.text, rule.place.line, self.shortest, self.longest, self.broken)

    def event(self) -> None:
        """Something has happened."""

    def instant(self) -> None:
        """Everything of an instant has happened."""

    def finish(self) -> None:
        """The run is over."""


class NeverMeasure(Measure):
    """What is so for an instant of no length is not so."""

    kind = "broken-never"

    def __init__(self, clock: Clock, rule: Never, look: Look) -> None:
        super().__init__(clock, rule)
        self._never = rule
        self._look = look
        self._since: int | None = None

    def instant(self) -> None:
        so = self._look(self._never.condition)
        if so and self._since is None:
            self._since = start = self._clock.now
            words = f"it lasts longer than {self._never.tolerated} us"
            self.watch(start, self._never.tolerated, lambda: self._still(start), words)
        elif not so and self._since is not None:
            self.note(self._clock.now - self._since)
            self._since = None

    def _still(self, start: int) -> bool:
        return self._since == start and self._look(self._never.condition)

    def finish(self) -> None:
        if self._since is not None:
            self.note(self._clock.now - self._since, over=False)


class PathMeasure(Measure):
    """From each time that one becomes true to the next time that the other does, at the same event or later."""

    kind = "over-limit"

    def __init__(self, clock: Clock, rule: PathLimit, look: Look) -> None:
        super().__init__(clock, rule)
        self._limit = rule
        self._look = look
        self._was = look(rule.start), look(rule.end)
        self._pending: list[int] = []

    def event(self) -> None:
        so = self._look(self._limit.start), self._look(self._limit.end)
        began, ended = so[0] and not self._was[0], so[1] and not self._was[1]
        self._was = so
        if began:
            start = self._clock.now
            self._pending.append(start)
            words = f"it takes longer than {self._limit.greatest} us"
            self.watch(start, self._limit.greatest, lambda: start in self._pending, words)
        if ended:
            for start in self._pending:
                self._end(self._clock.now - start)
            self._pending = []

    def _end(self, time: int) -> None:
        self.note(time)
        if self._limit.least is not None and time < self._limit.least:
            self.tell(f"it takes {time} us, less than {self._limit.least} us")

    def finish(self) -> None:
        for start in self._pending:
            self.note(self._clock.now - start, over=False)


class CycleMeasure(Measure):
    """``begun()`` gives the number of the cycle under way, and when what counts of it has begun, None while it has
    not."""

    kind = "over-limit"

    def __init__(self, clock: Clock, rule: CycleLimit, begun: Callable[[], tuple[int, int | None]]) -> None:
        super().__init__(clock, rule)
        self._limit = rule
        self._begun = begun
        self._under_way: tuple[int, int] | None = None

    def event(self) -> None:
        number, begin = self._begun()
        if self._under_way is not None and number != self._under_way[0]:
            self.note(self._clock.now - self._under_way[1])
            self._under_way = None
        if self._under_way is None and begin is not None:
            self._under_way = number, begin
            words = f"it takes longer than {self._limit.greatest} us"
            self.watch(begin, self._limit.greatest, partial(self._still, number), words)

    def _still(self, number: int) -> bool:
        return self._under_way is not None and self._under_way[0] == number

    def finish(self) -> None:
        if self._under_way is not None:
            self.note(self._clock.now - self._under_way[1], over=False)


class Rulebook:
    """All rules of a machine."""

    def __init__(self, measures: tuple[Measure, ...]) -> None:
        self._measures = measures

    def event(self) -> None:
        for measure in self._measures:
            measure.event()

    def instant(self) -> None:
        for measure in self._measures:
            measure.instant()

    def finish(self) -> tuple[RuleTold, ...]:
        for measure in self._measures:
            measure.finish()
        return tuple(measure.told() for measure in self._measures)


def rulebook(
    clock: Clock, rules: tuple[Rule, ...], look: Look, begun: Callable[[str], tuple[int, int | None]]
) -> Rulebook:
    """``begun(sequence)``: see ``CycleMeasure``."""
    measures: list[Measure] = []
    for rule in rules:
        match rule:
            case Never():
                measures.append(NeverMeasure(clock, rule, look))
            case PathLimit():
                measures.append(PathMeasure(clock, rule, look))
            case CycleLimit():
                measures.append(CycleMeasure(clock, rule, partial(begun, rule.sequence)))
    return Rulebook(tuple(measures))
