"""What an examination gives back: findings with their runs, margins, handovers, durations, and input errors.

These are plain values. Whoever makes them (checks, language) and whoever shows them (report, chart) meets here.
"""

from __future__ import annotations

from seqcheck.machine.places import Place
from seqcheck.machine.records import record
from seqcheck.machine.severity import Severity as Severity


@record
class Problem:
    """A fault of the input. ``source`` is the line of text at ``place``, None where there is none to show (a missing
    file, say); ``advice`` says what would be right."""

    place: Place
    message: str
    source: str | None = None
    advice: str | None = None


@record
class Moment:
    """One line of a concrete run."""

    time_us: int
    event: str


@record
class Finding:
    """``margin_us`` is negative where something breaks by so much, None where no time is involved or where an
    outside wait leaves it open. ``replayed`` is None where there is no run to play. ``certain``: every timing
    shows it. ``mend`` says what would put it right. ``accepted``: the reason that the text gives for living with it;
    then it is shown, but does not count. ``source`` is the line of text at ``place``, None where nobody has it.
    ``diverts``: runs that show it go on otherwise than what was played, or no further, so that other figures of the
    report hold only for runs without it."""

    kind: str
    severity: Severity
    certain: bool
    subject: str
    step: str | None
    place: Place
    message: str
    margin_us: int | None
    replayed: bool | None
    run: tuple[Moment, ...]
    mend: str | None
    accepted: str | None = None
    source: str | None = None
    diverts: bool = False

    @property
    def happens(self) -> bool:
        """Whether it comes about in a run; what is left out, or merely thin, does not."""
        return self.severity is Severity.ERROR or bool(self.run)


@record
class Margin:
    """The tightest margin of one obligation that the text states at ``place``; None where an outside wait leaves it
    open."""

    kind: str
    subject: str
    step: str | None
    place: Place
    margin_us: int | None


@record
class Handover:
    """From the end of one coil (decay included) to the start of the opposed one."""

    valve: str
    from_coil: str
    to_coil: str
    place: Place
    least_gap_us: int
    greatest_overlap_us: int


@record
class Duration:
    """``greatest`` is None where an outside signal, or a way that can go back again and again, leaves it open. Not
    ``exact``: added up from pieces of which one hangs on the other, so that no run is shorter or longer, but maybe
    none is as short or as long, either."""

    least: int
    typical: int
    greatest: int | None
    exact: bool = True

    def widened(self, other: Duration) -> Duration:
        """From the least of both to the greatest of both; typical as this one."""
        greatest = None if self.greatest is None or other.greatest is None else max(self.greatest, other.greatest)
        return Duration(min(self.least, other.least), self.typical, greatest, self.exact and other.exact)


@record
class ChoiceTime:
    """How long a cycle of ``sequence`` takes in which a choice takes the branch at ``place``, called ``way``. The
    typical time is that of the shortest way: nobody says which ways are typical."""

    sequence: str
    place: Place
    way: str
    duration: Duration


@record
class State:
    """A state that a machine comes to: where sequences begin anew, or where a choice may come out in several ways.
    ``name`` says which; ``choice`` is the place of the choice."""

    number: int
    name: str
    choice: Place | None


@record
class StateRun:
    """A run from one state to the next, by their numbers. ``way``: how the choice at the first of them came out."""

    begin: int
    end: int
    way: str | None
    duration: Duration


@record
class PathPart:
    """One event on the critical path: how late it can come after the start of the cycle, the delay that brings it
    (least, greatest, the latter None where open) and where it stands."""

    event: str
    at_us: int | None
    least: int
    greatest: int | None


@record
class Report:
    """Everything about one file. ``cycles`` and ``steps`` by sequence and qualified step name, in the text's order.
    ``steps`` and ``critical_path`` are empty in a brief one."""

    file: str
    machine: str | None
    findings: tuple[Finding, ...] = ()
    problems: tuple[Problem, ...] = ()
    sheets: tuple[str, ...] = ()
    assumptions: tuple[str, ...] = ()
    cycles: tuple[tuple[str, Duration], ...] = ()
    choices: tuple[ChoiceTime, ...] = ()
    states: tuple[State, ...] = ()
    runs: tuple[StateRun, ...] = ()
    steps: tuple[tuple[str, Duration], ...] = ()
    critical_path: tuple[PathPart, ...] = ()
    handovers: tuple[Handover, ...] = ()
    margins: tuple[Margin, ...] = ()

    @property
    def counting(self) -> tuple[Finding, ...]:
        """The findings that the text does not accept."""
        return tuple(finding for finding in self.findings if finding.accepted is None)

    @property
    def verdict(self) -> str:
        """``unreadable``, ``findings`` where an error or a warning was found that the text does not accept, else
        ``clean``."""
        if self.problems:
            return "unreadable"
        worst = {finding.severity for finding in self.counting}
        return "findings" if worst & {Severity.ERROR, Severity.WARNING} else "clean"
