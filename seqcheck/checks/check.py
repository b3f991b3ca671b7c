"""What a check is: a finding kind with the obligations that it states of a study, or what it sees there without times.

An obligation says that one event has to come before another, by at least so much. Checks state them; ``prove`` bounds
them all at once and makes findings of those that do not hold.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass

from seqcheck.checks.study import Study
from seqcheck.engine.bounds import Rows
from seqcheck.engine.graph import EventGraph
from seqcheck.machine.findings import Finding, Moment, Severity
from seqcheck.machine.model import Machine
from seqcheck.machine.places import Place
from seqcheck.machine.records import record


@dataclass(slots=True, eq=False)
class Wording:
    """What to say when an obligation does not hold: the message with ``{by}``, the time by which it fails, and what
    would mend it, given that time. ``timeless`` is the message without the time, where taking out `` {by}`` does not
    give it."""

    message: str
    mend: Callable[[int], str] | None = None
    timeless: str | None = None

    def broken(self, by: str) -> str:
        return self.message.replace("{by}", by)

    def thin(self, left: str) -> str:
        """What to say when it holds, but with too little time left."""
        return f"only {left} left: beyond that {self.timeless or self.message.replace(' {by}', '')}"


@record
class Instead:
    """What a run comes to that breaks an order by which it would be another run: ``text`` in place of the steps that
    are entered at event ``at``, and ``shown`` to tell of what was really played whether it came to that."""

    at: int
    text: str
    shown: Callable[[Study], bool]


@dataclass(slots=True, eq=False)
class Obligation:
    """``first`` at least ``least`` microseconds before ``second``. ``step`` and ``place``: the command or exit that
    brings it about. ``lever``: the event behind which ``second`` comes and whose time the text sets, if one does.
    ``severity``: where it is not that of the kind. ``diverts``: a run that breaks it goes on otherwise than one that
    keeps it, and only the one or the other is played; ``stops``: it goes on no further, and is played on all the
    same. ``as_if``: an event that the play has called off, and that is taken to have come all the same: runs in which
    it does break it just so. ``assumed``: orders that this play takes for granted, but that are in question here;
    ``kept``: those without which it says nothing. Not ``always``: some runs have no such pair of events."""

    subject: str
    step: str | None
    place: Place
    first: int
    second: int
    #: Made once it is broken, as most never are.
    wording: Callable[[], Wording]
    least: int = 0
    lever: int | None = None
    #: Or, just as well, one of these pairs as far apart.
    others: tuple[tuple[int, int], ...] = ()
    severity: Severity | None = None
    diverts: bool = True
    stops: bool = False
    as_if: int | None = None
    instead: Instead | None = None
    assumed: tuple[tuple[int, int], ...] = ()
    kept: tuple[tuple[int, int], ...] = ()
    always: bool = True

    @property
    def pairs(self) -> tuple[tuple[int, int], ...]:
        return ((self.first, self.second), *self.others)

    def margin(self, rows: Rows) -> int:
        """By the pair that keeps it best; ``rows``: how much later than its second event the first of each can be."""
        return max([-rows[second, first] for first, second in self.pairs]) - self.least

    def least_margin(self, graph: EventGraph) -> int:
        """What plain intervals leave: the margin is no less."""
        return max([graph.least_lead(first, second) for first, second in self.pairs]) - self.least


@record
class Sight:
    """What a check sees without holding times against each other. ``run``: what happens, where that shows it, and
    ``replayed``: whether it came to that when it was played (as typical times always are); ``at``: the event by which
    it has come about, None where it is there from the start; ``stops``: the run then goes on no further."""

    subject: str
    step: str | None
    place: Place
    message: str
    run: tuple[Moment, ...] = ()
    mend: str | None = None
    certain: bool = True
    at: int | None = None
    severity: Severity | None = None
    margin_us: int | None = None
    replayed: bool = True
    stops: bool = False


def no_obligations(study: Study) -> Iterable[Obligation]:
    return ()


def no_sights(study: Study) -> Iterable[Sight]:
    return ()


def no_omissions(studies: Sequence[Study]) -> Iterable[Sight]:
    return ()


def nothing_to_read(machine: Machine) -> Iterable[Sight]:
    return ()


@record
class Together:
    """What no play shows alone: ``plays`` that do, and ``sights`` of what it comes to over several of them."""

    plays: tuple[Study, ...] = ()
    sights: tuple[Sight, ...] = ()


def nothing_together(studies: Sequence[Study]) -> Together:
    return Together()


@record
class Check:
    """``title``: the kind in a few words. ``obligations`` and ``sights`` are of one play, ``omissions`` of all plays
    of a part together: what none of them comes to; ``together``: what only several of them come to. ``reading``: what
    the whole machine shows as it is written, before any play. Any function may be left out."""

    kind: str
    severity: Severity
    title: str
    obligations: Callable[[Study], Iterable[Obligation]] = no_obligations
    sights: Callable[[Study], Iterable[Sight]] = no_sights
    omissions: Callable[[Sequence[Study]], Iterable[Sight]] = no_omissions
    together: Callable[[Sequence[Study]], Together] = nothing_together
    reading: Callable[[Machine], Iterable[Sight]] = nothing_to_read

    def finding(self, sight: Sight) -> Finding:
        return Finding(
            kind=self.kind,
            severity=sight.severity or self.severity,
            certain=sight.certain,
            subject=sight.subject,
            step=sight.step,
            place=sight.place,
            message=sight.message,
            margin_us=sight.margin_us,
            replayed=sight.replayed if sight.run else None,
            run=sight.run,
            mend=sight.mend,
            diverts=sight.stops,
        )
