"""What is under way in a sequence: a step while it is active, a choice that stands."""

from __future__ import annotations

from dataclasses import dataclass, field

from seqcheck.machine.conditions import Condition
from seqcheck.machine.steps import Choose, Step, Watchdog
from tests.oracle.clock import Ticket
from tests.oracle.conditions import Literal, holds, literals_of, literals_of_all
from tests.oracle.knowledge import Knowledge
from tests.oracle.outside import Awaited
from tests.oracle.reads import Read
from tests.oracle.routes import Thread


def place_of(choose: Choose) -> str:
    return f"{choose.place.line}:{choose.place.column}"


@dataclass(slots=True, eq=False)
class Wait:
    """``expired``: its watchdog has run out and names a step; ``gone``: the read that goes there has come."""

    thread: Thread
    read: Read
    knowledge: Knowledge
    awaited: Awaited = field(default_factory=Awaited)
    expired: bool = False
    gone: bool = False
    watchdog_ticket: Ticket | None = None
    came: set[Literal] = field(default_factory=set)
    steady_end: Ticket | None = None

    @property
    def name(self) -> str:
        raise NotImplementedError

    @property
    def watchdog(self) -> Watchdog | None:
        raise NotImplementedError

    @property
    def literals(self) -> tuple[Literal, ...]:
        raise NotImplementedError

    @property
    def entered(self) -> int:
        return self.read.time

    def ready(self) -> bool:
        """Whether it is left now."""
        raise NotImplementedError

    def has_come_to_hold(self, by: int) -> bool:
        """Whether it holds as a watchdog judges it: inputs changed, seen or not, the times over."""
        raise NotImplementedError

    def grounds(self) -> tuple[Literal, ...]:
        """The literals that it is left on."""
        return tuple(literal for literal in self.literals if self.sees(literal))

    def sees(self, literal: Literal) -> bool:
        arrival = self.awaited.of(literal)
        return self.knowledge.is_known(literal) if arrival is None else arrival.seen

    def has_at_input(self, literal: Literal) -> bool:
        arrival = self.awaited.of(literal)
        return self.knowledge.at_input(literal) if arrival is None else arrival.level


@dataclass(slots=True, eq=False, kw_only=True)
class ActiveVisit(Wait):
    """A step. ``sent`` are the cylinders that its own commands have sent out (True) or in, ``arrived`` and
    ``entered_range`` what has come of such moves, ``came`` what was seen to come."""

    step: Step
    cycle: int
    left: int | None = None
    dwell_over: bool = False
    steady_since: int | None = None
    steady_over: bool = False
    sent: dict[str, bool] = field(default_factory=dict)
    arrived: set[tuple[str, bool]] = field(default_factory=set)
    entered_range: set[tuple[str, bool]] = field(default_factory=set)
    _literals: tuple[Literal, ...] = field(init=False)

    def __post_init__(self) -> None:
        self._literals = literals_of(self.step.until)

    @property
    def name(self) -> str:
        return self.step.name

    @property
    def watchdog(self) -> Watchdog | None:
        return self.step.watchdog

    @property
    def literals(self) -> tuple[Literal, ...]:
        return self._literals

    def holds(self) -> bool:
        """Whether the whole condition is seen to hold."""
        return holds(self.step.until, self.sees)

    def needs(self, literal: Literal) -> bool:
        """Whether the condition holds on this literal and would not without it."""
        return self.sees(literal) and not holds(self.step.until, lambda each: each != literal and self.sees(each))

    def ready(self) -> bool:
        if self.expired or not self.read.passed or not self.dwell_over or not self.holds():
            return False
        return self.step.steady is None or self.steady_over

    def has_come_to_hold(self, by: int) -> bool:
        if not holds(self.step.until, self.has_at_input):
            return False
        if self.step.dwell is not None and self.entered + self.step.dwell > by:
            return False
        if self.step.steady is None:
            return True
        return self.steady_since is not None and self.steady_since + self.step.steady <= by


@dataclass(slots=True, eq=False, kw_only=True)
class ActiveChoice(Wait):
    """A ``choose``, the ``occasion``-th time it is come to; ``asked`` is what it asked from outside then, ``index`` the
    branch that is taken."""

    choose: Choose
    occasion: int
    asked: dict[str, bool] = field(default_factory=dict)
    index: int | None = None
    _literals: tuple[Literal, ...] = field(init=False)

    def __post_init__(self) -> None:
        self._literals = literals_of_all(self._conditions())

    def _conditions(self) -> tuple[Condition | None, ...]:
        return tuple(choice.condition for choice in self.choose.choices)

    @property
    def name(self) -> str:
        return f"choose {place_of(self.choose)}"

    @property
    def watchdog(self) -> Watchdog | None:
        return self.choose.watchdog

    @property
    def literals(self) -> tuple[Literal, ...]:
        return self._literals

    def grounds(self) -> tuple[Literal, ...]:
        """Those of the branch that is taken."""
        index = self.first() if self.index is None else self.index
        condition = None if index is None else self.choose.choices[index].condition
        return tuple(literal for literal in literals_of(condition) if self.sees(literal))

    def first(self) -> int | None:
        """The first branch whose condition is seen to hold."""
        return next((number for number, each in enumerate(self._conditions()) if holds(each, self.sees)), None)

    def at_arrival(self) -> int | None:
        """Likewise, as the choice is come to; signals from outside are as they were asked."""

        def value(literal: Literal) -> bool:
            if literal.subject in self.asked:
                return self.asked[literal.subject] is literal.wanted
            return self.knowledge.is_known(literal)

        return next((number for number, each in enumerate(self._conditions()) if holds(each, value)), None)

    def ready(self) -> bool:
        return not self.expired and self.read.passed and self.first() is not None

    def has_come_to_hold(self, by: int) -> bool:
        return any(holds(each, self.has_at_input) for each in self._conditions())


@dataclass(slots=True)
class SteadyWatch:
    """Whether a condition is seen to hold without anything from outside, and since when, whatever step is active."""

    condition: Condition | None
    since: int | None = None
