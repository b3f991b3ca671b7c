"""From an examined machine to its chart.

Takes a report with what is behind it, and the part to show; gives the chart. Every edge of it has the exact bounds of
the engine: the greatest separation from the anchor to the event, and from the event to the anchor. Refuses what cannot
be shown, in words (``Unplaceable``).
"""

from __future__ import annotations

import difflib
from bisect import bisect_left
from collections.abc import Iterable, Iterator, Mapping, Sequence

from seqcheck.chart.apart import left_out, part_shown
from seqcheck.chart.asked import Part, Unplaceable
from seqcheck.chart.changes import Change
from seqcheck.chart.decisions import decision_words, way_shown
from seqcheck.chart.events import Line, Sequenced, lines, sequences
from seqcheck.chart.marks import critical_events, names_of, spots
from seqcheck.chart.model import Band, Chart, Decision, Edge, Mark, PathPoint, Row, RowKind
from seqcheck.chart.run import window_of_run
from seqcheck.chart.window import Window, window_of
from seqcheck.engine.bounds import both_ways, closed, greatest_separations
from seqcheck.engine.trace import Choice, Visit
from seqcheck.machine.findings import Report
from seqcheck.machine.records import record
from seqcheck.pipeline import Studied, StudiedPart


def chart_of(studied: Studied, report: Report, part: Part) -> Chart:
    """The typical run, or one whose choices go as is asked, with the bounds of all runs that have its order of events.
    Raises ``Unplaceable``."""
    shown = part_shown(studied, part)
    window = window_of(shown.machine, shown.studies, part)
    return _Drawing(window, part.rows).chart(report, _notes(studied, report, shown, window))


def chart_of_run(studied: Studied, report: Report, part: Part, number: int) -> Chart:
    """The run that shows finding ``number`` of the report, played again with its own delays, as one run without any
    spans. Raises ``Unplaceable`` where there is no such run."""
    window, at = window_of_run(studied, report, number)
    return _Drawing(window, part.rows, (number, at)).chart(report, _notes_on_run(studied, report, window, number))


def _notes(studied: Studied, report: Report, shown: StudiedPart, window: Window) -> tuple[str, ...]:
    notes = [*left_out(studied, shown), *way_shown(window, others=True)]
    if any(study.settlement.recipe.turned for study in shown.studies):
        notes.append("More than one order of events is possible here; the chart shows one.")
    own = (
        one for one, behind in zip(report.findings, studied.broken, strict=True) if studied.parts[behind.part] is shown
    )
    if any(one.diverts and not one.certain for one in own):
        notes.append("The times hold for runs in which each finding comes about, or does not, as at typical times.")
    return tuple(notes)


def _notes_on_run(studied: Studied, report: Report, window: Window, number: int) -> tuple[str, ...]:
    shown = studied.parts[studied.broken[number - 1].part]
    notes = [*left_out(studied, shown), *way_shown(window, others=False)]
    if report.findings[number - 1].replayed is False:
        notes.append("Something else gets in the way of this run before the finding comes about.")
    return tuple(notes)


@record
class _Placed:
    """A row with the events of its edges, so that the path finds its way."""

    row: Row
    events: Mapping[int, str]


class _Drawing:
    """One window, its rows chosen and its events bounded once for all. ``shown``: the finding whose run this is, and
    the time of the run at which it lies; None for the bounds of all runs."""

    def __init__(self, window: Window, names: Sequence[str], shown: tuple[int, int] | None = None) -> None:
        self._window = window
        self._machine = window.study.machine
        self._study = window.study
        self._shown_finding = shown
        self._run = shown is not None
        self._zero = window.study.time(window.anchor)
        self._sequences = list(sequences(self._study))
        self._lines = list(lines(self._study))
        self._choose(names)
        self._bounds = self._all_bounds()

    def chart(self, report: Report, notes: tuple[str, ...]) -> Chart:
        window = self._window
        placed = [*map(self._steps_row, self._sequences), *map(self._device_row, self._lines)]
        return Chart(
            machine=self._machine.name,
            file=self._machine.file,
            title=window.title,
            anchor=window.anchored,
            begin_us=window.begin - self._zero,
            end_us=window.end - self._zero,
            rows=tuple(one.row for one in placed),
            marks=tuple(self._marks(report, placed)),
            path=tuple(self._path(placed)),
            cycle_starts=tuple(start - self._zero for start in window.starts if window.begin <= start <= window.end),
            notes=(*notes, "No time passes in this part.") if window.begin == window.end else notes,
            run=self._run,
        )

    # Choosing and bounding -------------------------------------------------------------------------------------

    def _choose(self, names: Sequence[str]) -> None:
        there = [one.sequence.name for one in self._sequences] + [line.name for line in self._lines]
        for name in names:
            if name not in there:
                near = difflib.get_close_matches(name, there, 1, 0.6)
                advice = f"did you mean {near[0]}?" if near else "rows are named after devices and sequences"
                raise Unplaceable(f"there is no row {name}; {advice}")
        if names:
            self._sequences = [one for one in self._sequences if one.sequence.name in names]
            self._lines = [line for line in self._lines if line.name in names]

    def _all_bounds(self) -> dict[tuple[int, int], int]:
        """Both separations between the anchor and every event that is shown."""
        anchor = self._window.anchor
        if self._run:
            return {}
        events = {event for event in self._all_events() if self._shown(event)}
        return greatest_separations(self._study.trace.graph, both_ways((anchor, event) for event in events))

    def _all_events(self) -> Iterator[int]:
        for line in self._lines:
            yield from (change.event for change in line.changes)
        for one in self._sequences:
            for visit in one.visits:
                yield visit.entered.event
                if visit.left is not None:
                    yield visit.left.event
            yield from (choice.left.event for choice in one.choices if choice.left is not None)

    def _shown(self, event: int) -> bool:
        return self._window.begin <= self._study.time(event) <= self._window.end

    def _edge(self, event: int, text: str, level: int = 0, lasting: bool = True) -> Edge:
        typical = self._study.time(event) - self._zero
        if self._run:
            return Edge(typical, typical, typical, text, level, lasting)
        back = closed(self._bounds[event, self._window.anchor])
        latest = closed(self._bounds[self._window.anchor, event])
        return Edge(None if back is None else -back, typical, latest, text, level, lasting)

    # Rows ------------------------------------------------------------------------------------------------------

    def _device_row(self, line: Line) -> _Placed:
        changes = sorted(line.changes, key=lambda change: self._study.time(change.event))
        shown = [one for one in changes if self._window.begin <= self._study.time(one.event) < self._window.end]
        row = Row(
            line.kind,
            line.name,
            line.label,
            line.address,
            begin_level=self._level(line, changes, self._window.begin),
            end_level=self._level(line, changes, self._window.end),
            edges=tuple(self._edge(one.event, one.text, one.level, one.lasting) for one in shown),
            ends=line.ends,
        )
        # What comes in the very moment in which the part shown ends is no edge of it, but may be what ends it.
        own = [one for one in changes if self._shown(one.event)] if line.kind.sloped else shown
        return _Placed(row, {change.event: change.text for change in own if not change.found})

    def _level(self, line: Line, changes: Sequence[Change], time: int) -> int:
        """Where the row's line is at a typical time, before whatever happens at that very time."""
        number = bisect_left(changes, time, key=lambda change: self._study.time(change.event))
        before = changes[number - 1].level if number else line.start
        if not line.kind.sloped or number in (0, len(changes)):
            return before
        since, until = (self._study.time(changes[at].event) for at in (number - 1, number))
        return before + (changes[number].level - before) * (time - since) // (until - since)

    def _steps_row(self, one: Sequenced) -> _Placed:
        lanes: list[int] = []
        bands: list[Band] = []
        events: dict[int, str] = {}
        for visit in one.visits:
            begin, end = self._active(visit)
            if begin == self._window.end:
                events.setdefault(visit.entered.event, f"step {visit.step.name} entered")
            if (end <= self._window.begin and begin < self._window.begin) or begin >= self._window.end:
                continue
            lane = next((number for number, free in enumerate(lanes) if free <= begin), len(lanes))
            lanes[lane : lane + 1] = [end]
            bands.append(self._band(visit, lane))
            entered = events.get(visit.entered.event)
            also = f"{entered}, " if entered and entered.endswith("entered") else ""
            events[visit.entered.event] = f"{also}step {visit.step.name} entered"
            if visit.left is not None:
                events.setdefault(visit.left.event, _left(visit))
        decisions = tuple(self._decision(choice, bands) for choice in one.choices if self._decides(choice))
        row = Row(RowKind.STEPS, one.sequence.name, one.sequence.label, None, bands=tuple(bands), decisions=decisions)
        return _Placed(row, events)

    def _decides(self, choice: Choice) -> bool:
        return choice.left is not None and self._window.begin <= self._study.time(choice.left.event) < self._window.end

    def _decision(self, choice: Choice, bands: Sequence[Band]) -> Decision:
        """In the lane of the step that ends or begins by it."""
        assert choice.left is not None
        words, line, count = decision_words(choice), choice.choose.place.line, len(choice.conditions)
        branch = None if choice.taken is None else choice.taken + 1
        edge = self._edge(choice.left.event, f"choice in line {line}: {words}")
        lanes = [
            band.lane
            for band in bands
            if edge.typical_us in (one.typical_us for one in (band.begin, band.end) if one is not None)
        ]
        return Decision(edge, line, branch, count, words, min(lanes, default=0))

    def _active(self, visit: Visit) -> tuple[int, int]:
        begin = self._study.time(visit.entered.event)
        end = self._window.end + 1 if visit.left is None else self._study.time(visit.left.event)
        return begin, end

    def _band(self, visit: Visit, lane: int) -> Band:
        step = visit.step
        entered, left = visit.entered.event, visit.left.event if visit.left is not None else None
        return Band(
            step=step.name,
            name=step.name.partition(".")[2],
            label=step.label,
            lane=lane,
            begin=self._edge(entered, f"step {step.name} entered") if self._shown(entered) else None,
            end=self._edge(left, _left(visit)) if left is not None and self._shown(left) else None,
        )

    # Findings and path -----------------------------------------------------------------------------------------

    def _marks(self, report: Report, placed: Sequence[_Placed]) -> Iterator[Mark]:
        """All findings; in a run only the one that it shows."""
        if self._shown_finding is not None:
            number, time = self._shown_finding
            finding = report.findings[number - 1]
            yield Mark(number, finding, time - self._zero, _row_of(placed, names_of(finding, self._machine.rules)))
            return
        places = spots(self._window, report.findings)
        for number, (finding, spot) in enumerate(zip(report.findings, places, strict=True), start=1):
            row = None if spot is None else _row_of(placed, spot.names)
            at = None if spot is None or row is None else spot.time - self._zero
            yield Mark(number, finding, at, row)

    def _path(self, placed: Sequence[_Placed]) -> Iterator[PathPoint]:
        if self._run:
            return
        for event in critical_events(self._window):
            if not self._shown(event):
                continue
            for number, one in enumerate(placed):
                text = one.events.get(event)
                if text is not None:
                    edge = self._edge(event, text)
                    yield PathPoint(number, edge.typical_us, edge.latest_us, text)


def _left(visit: Visit) -> str:
    return f"step {visit.step.name} left{', its time run out' if visit.expired else ''}"


def _row_of(placed: Iterable[_Placed], names: Sequence[str]) -> int | None:
    """The row of the first name that has one: a device's, or that of the sequence whose step it is."""
    numbers = {one.row.name: number for number, one in reversed(list(enumerate(placed)))}
    candidates = (name if name in numbers else name.partition(".")[0] for name in names)
    return next((numbers[name] for name in candidates if name in numbers), None)
