"""The timing chart as plain records: what is drawn, where, and how sure it is.

These records are all that the forms (picture, terminal, table, waveform) and the printed page know of a run; they are
made by ``seqcheck.chart.build``. Times are whole microseconds from the anchor of the chart, negative before it. Levels
are shares of a row's height in millionths: a coil is at 0 or 1000000, a cylinder wherever its piston is.
"""

from __future__ import annotations

from enum import Enum

from seqcheck.machine.findings import Finding
from seqcheck.machine.records import record
from seqcheck.machine.time import WHOLE_SHARE

#: The levels of a row's line: off, retracted or position ``b``; on, extended or position ``a``; a valve's centre.
LOW, HIGH, MIDDLE = 0, WHOLE_SHARE, WHOLE_SHARE // 2
#: What the lowest and the highest level of a 2/2 valve mean.
TAP = ("closed", "open")


class RowKind(Enum):
    STEPS = "steps"
    COIL = "coil"
    OUTPUT = "output"
    VALVE = "valve"
    CYLINDER = "cylinder"
    SENSOR = "sensor"
    SIGNAL = "signal"
    FLAG = "flag"

    @property
    def sloped(self) -> bool:
        """Whether the line of such a row runs straight from event to event; else it jumps at each of them."""
        return self in (RowKind.VALVE, RowKind.CYLINDER)


@record
class Edge:
    """An event of a row: exactly how early and how late it can come after the anchor (None where an outside signal
    leaves that open), when it comes typically, what it is in words, and the row's level at it. ``lasting`` is False
    where a change is taken back before it had any effect."""

    earliest_us: int | None
    typical_us: int
    latest_us: int | None
    text: str
    level: int = LOW
    lasting: bool = True

    @property
    def drawn_from_us(self) -> int:
        """Where its span begins: at the typical time where nothing says how early it can come."""
        return self.typical_us if self.earliest_us is None else self.earliest_us

    @property
    def drawn_to_us(self) -> int:
        """Where its span ends: at the typical time where nothing says how late it can come."""
        return self.typical_us if self.latest_us is None else self.latest_us

    @property
    def certain(self) -> bool:
        """Whether it always comes at the very same time."""
        return self.earliest_us == self.typical_us == self.latest_us


@record
class Band:
    """A step while it is active. ``name`` is without that of its sequence. ``lane``: steps that run together lie in
    lanes below each other, 0 on top. ``begin`` and ``end`` are None where it reaches beyond the part shown."""

    step: str
    name: str
    label: str | None
    lane: int
    begin: Edge | None
    end: Edge | None


@record
class Decision:
    """Where a sequence takes ``branch`` (from 1, ``of`` so many) of the choice in a ``line`` of the text; ``way`` is
    that branch in words. ``lane``: among the steps. ``branch`` is None where its time ran out before."""

    edge: Edge
    line: int
    branch: int | None
    of: int
    way: str
    lane: int = 0


@record
class Row:
    """One device, or the steps of one sequence (which have ``bands`` and ``decisions`` and no line). ``edges`` in the
    order of their typical times, all within the part shown; the line starts at ``begin_level`` and ends at
    ``end_level``. ``ends``: what the lowest and the highest level mean, in words."""

    kind: RowKind
    name: str
    label: str | None
    address: str | None
    begin_level: int = LOW
    end_level: int = LOW
    edges: tuple[Edge, ...] = ()
    bands: tuple[Band, ...] = ()
    decisions: tuple[Decision, ...] = ()
    ends: tuple[str, str] = ("off", "on")

    @property
    def lanes(self) -> int:
        return max((band.lane for band in self.bands), default=0) + 1


@record
class Mark:
    """Where a finding lies. ``number`` is its place in the report, from 1; ``row`` an index of the chart's rows.
    ``time_us`` and ``row`` are None where it lies nowhere in the part shown."""

    number: int
    finding: Finding
    time_us: int | None
    row: int | None


@record
class PathPoint:
    """An event of the critical path: its row (index), its typical time, how late it can come, the words for it."""

    row: int
    typical_us: int
    latest_us: int | None
    text: str


@record
class Chart:
    """One part of one run: from ``begin_us`` to ``end_us``, both typical. ``anchor`` says in words what the times are
    measured from. ``title`` names the part shown (``settled cycle of main``, say). ``notes``: what a reader must know
    of the times. ``cycle_starts`` are typical times. ``run``: it is one concrete run, so that nothing has a span."""

    machine: str
    file: str
    title: str
    anchor: str
    begin_us: int
    end_us: int
    rows: tuple[Row, ...]
    marks: tuple[Mark, ...] = ()
    path: tuple[PathPoint, ...] = ()
    cycle_starts: tuple[int, ...] = ()
    notes: tuple[str, ...] = ()
    run: bool = False
