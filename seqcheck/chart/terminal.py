"""The chart in letters, for a terminal or a text file.

Takes a chart, the encoding of where it goes and its width in cells; gives lines of a page. Every column stands for an
equal time. Levels are drawn solid where they are sure and thin where an edge may come earlier or later; in ASCII where
the encoding lacks the signs.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import fields

from seqcheck.chart.model import HIGH, LOW, MIDDLE, TAP, Band, Chart, Edge, Row, RowKind
from seqcheck.chart.view import band_times, ticks, whole_time
from seqcheck.chart.wording import finding_in_a_line, measured_from, time_in_words
from seqcheck.machine.findings import Severity
from seqcheck.machine.records import record
from seqcheck.machine.time import WHOLE_SHARE
from seqcheck.report.layout import BLANK, Line, Tone, padded, paragraph
from seqcheck.report.plain import plain_record

LEAST_WIDTH = 60
_MOST_NAME = 16
_TICK_EVERY = 13
_STROKE_LINES = 3
_TONES = {Severity.ERROR: Tone.ERROR, Severity.WARNING: Tone.WARNING, Severity.NOTE: Tone.NOTE}


@record
class Signs:
    """``on`` and ``off`` are sure, ``perhaps_`` not; ``still``: a spool stands; ``swept``: a piston may be there."""

    on: str
    perhaps_on: str
    off: str
    perhaps_off: str
    still: str
    perhaps_still: str
    swept: str
    path: str
    choice: str
    open: str


FULL = Signs("█", "▓", "▁", "░", "─", "╌", "░", "◆", "◇", "→")
ASCII = Signs("#", "+", "_", ".", "-", "~", ".", "*", "?", ">")


def chart_lines(chart: Chart, encoding: str = "utf-8", width: int = 80, ascii_only: bool = False) -> tuple[Line, ...]:
    """``chart`` may hold any text; it is made plain for the encoding first."""
    shown: Chart = plain_record(chart, "ascii" if ascii_only else encoding)
    signs = ASCII if ascii_only or not _carries_all(encoding) else FULL
    return tuple(_Page(shown, signs, max(width, LEAST_WIDTH)).lines())


def _carries_all(encoding: str) -> bool:
    try:
        "".join(getattr(FULL, sign.name) for sign in fields(Signs)).encode(encoding)
    except (UnicodeEncodeError, LookupError):
        return False
    return True


class _Page:
    def __init__(self, chart: Chart, signs: Signs, width: int) -> None:
        self._chart = chart
        self._signs = signs
        names = [*(row.name for row in chart.rows), ""]
        self._indent = min(max(len(name) for name in names), _MOST_NAME) + 1
        self._columns = width - self._indent - 1
        self._begin, self._end = whole_time(chart)
        self._length = max(self._end - self._begin, 1)

    def lines(self) -> Iterator[Line]:
        chart = self._chart
        yield from paragraph(f"{chart.file}: {chart.machine}: {chart.title}", hanging=4, tone=Tone.TITLE)
        yield BLANK
        yield from self._axis()
        for index, row in enumerate(chart.rows):
            yield from self._row(index, row)
        yield BLANK
        yield from self._key()
        yield from self._captions()

    # Columns ---------------------------------------------------------------------------------------------------

    def _column(self, time_us: int) -> int:
        return min((time_us - self._begin) * self._columns // self._length, self._columns - 1)

    def _times(self, column: int) -> tuple[int, int]:
        """From when to when a column stands."""
        return (
            self._begin + column * self._length // self._columns,
            self._begin + (column + 1) * self._length // self._columns,
        )

    def _axis(self) -> Iterator[Line]:
        words, marks = [" "] * (self._columns + 8), [" "] * self._columns
        for time, text in ticks(self._begin, self._end, self._columns // _TICK_EVERY):
            column = self._column(time)
            if column + len(text) <= self._columns + 1:
                words[column : column + len(text)] = list(text)
            marks[column] = "|"
        yield Line((" " * self._indent + "".join(words)).rstrip())
        yield Line((" " * self._indent + "".join(marks)).rstrip())

    def _named(self, name: str, drawn: str) -> Line:
        shown = name if len(name) < self._indent else f"{name[: self._indent - 2]}~"
        return Line((padded(shown, self._indent) + drawn).rstrip())

    # Rows ------------------------------------------------------------------------------------------------------

    def _row(self, index: int, row: Row) -> Iterator[Line]:
        if row.kind is RowKind.STEPS:
            yield from self._steps(row)
        elif row.kind is RowKind.CYLINDER:
            yield from self._stroke(index, row)
        else:
            letters = [self._level_letter(row, column) for column in range(self._columns)]
            self._put_edges(index, row, letters)
            yield self._named(row.name, "".join(letters))
        marks = self._marks(index)
        if marks:
            yield Line(" " * self._indent + marks, Tone.ERROR)

    def _steps(self, row: Row) -> Iterator[Line]:
        for lane in range(row.lanes):
            letters = [" "] * self._columns
            for band in row.bands:
                if band.lane == lane:
                    self._put_band(band, letters)
            for decision in row.decisions:
                if decision.lane == lane:
                    letters[self._column(decision.edge.typical_us)] = self._signs.choice
            yield self._named(row.name if lane == 0 else "", "".join(letters))

    def _put_band(self, band: Band, letters: list[str]) -> None:
        times = band_times(band, self._chart.begin_us, self._chart.end_us)
        if times is None:
            return
        begin, end = self._column(times[0]), self._column(times[1])
        letters[begin] = "|"
        room = end - begin - 1
        if room > 0:
            shown = band.name if len(band.name) <= room else band.name[:room]
            letters[begin + 1 : end] = list(shown.ljust(room))
        if letters[end] == " ":
            letters[end] = "|"

    def _level_letter(self, row: Row, column: int) -> str:
        """For a pulse that is shorter than its column, on."""
        signs = self._signs
        since, until = self._times(column)
        unsure = any(edge.drawn_from_us < until and edge.drawn_to_us > since for edge in row.edges if not edge.certain)
        beside = since >= self._chart.end_us or until <= self._chart.begin_us
        if row.kind is RowKind.VALVE:
            return signs.perhaps_still if unsure else " " if beside else signs.still
        if beside:
            return signs.perhaps_off if unsure else " "
        before = [edge for edge in row.edges if edge.typical_us < until]
        level = before[-1].level if before else row.begin_level
        if level == HIGH or any(edge.typical_us >= since and edge.level == HIGH for edge in before):
            return signs.perhaps_on if unsure else signs.on
        return signs.perhaps_off if unsure else signs.off

    def _put_edges(self, index: int, row: Row, letters: list[str]) -> None:
        """A valve by a slope where it sets out and the letter of what it reaches; the critical path, open times."""
        if row.kind is RowKind.VALVE:
            letters[self._column(self._chart.begin_us)] = _position(row, row.begin_level)
            levels = [*(edge.level for edge in row.edges), row.end_level]
            for edge, following in zip(row.edges, levels[1:], strict=True):
                slope = "/" if following > edge.level else "\\"
                letters[self._column(edge.typical_us)] = (
                    _position(row, edge.level) if following == edge.level else slope
                )
        for edge in row.edges:
            column = self._column(edge.typical_us)
            if edge.latest_us is None and column + 1 < self._columns:
                letters[column + 1] = self._signs.open
        for point in self._chart.path:
            if point.row == index and row.kind is not RowKind.VALVE:
                letters[self._column(point.typical_us)] = self._signs.path

    def _stroke(self, index: int, row: Row) -> Iterator[Line]:
        """Three lines, retracted at the bottom; slanted where it moves."""
        ways = [_way(self._chart, row, which) for which in ("drawn_from_us", "typical_us", "drawn_to_us")]
        drawn = [[" "] * self._columns for _ in range(_STROKE_LINES)]
        for column in range(self._columns):
            since, until = self._times(column)
            middle = (since + until) // 2
            places = [_place(_at(way, middle)) for way in ways]
            if _unsure_stroke(row, since, until):
                for line in range(min(places), max(places) + 1):
                    drawn[line][column] = self._signs.swept
            if self._chart.begin_us <= middle < self._chart.end_us:
                before, behind = _at(ways[1], since), _at(ways[1], until)
                letter = "/" if behind > before else "\\" if behind < before else self._signs.still
                drawn[places[1]][column] = letter
        for point in self._chart.path:
            if point.row == index:
                column = self._column(point.typical_us)
                drawn[_place(_at(ways[1], point.typical_us))][column] = self._signs.path
        for number, letters in enumerate(reversed(drawn)):
            yield self._named(row.name if number == 1 else "", "".join(letters))

    def _marks(self, index: int) -> str:
        letters: dict[int, str] = {}
        for mark in self._chart.marks:
            if mark.row == index and mark.time_us is not None:
                sign = f"^{mark.number}"
                column = min(self._column(mark.time_us), self._columns + 1 - len(sign))
                for offset, letter in enumerate(sign):
                    letters[column + offset] = letter
        if not letters:
            return ""
        return "".join(letters.get(column, " ") for column in range(max(letters) + 1))

    # Below the rows --------------------------------------------------------------------------------------------

    def _key(self) -> Iterator[Line]:
        signs = self._signs
        words = [f"on {signs.on * 2}", f"off {signs.off * 2}"]
        if not self._chart.run:
            words.append(f"may still be otherwise {signs.perhaps_on}{signs.perhaps_off}{signs.perhaps_still}")
        if self._chart.path:
            words.append(f"critical path {signs.path}")
        if any(row.decisions for row in self._chart.rows):
            words.append(f"choice {signs.choice}")
        if any(row.ends == TAP for row in self._chart.rows):
            words.append("o open x closed")
        if any(edge.latest_us is None for row in self._chart.rows for edge in row.edges):
            words.append(f"open {signs.open}")
        yield from paragraph(", ".join(words))

    def _captions(self) -> Iterator[Line]:
        chart = self._chart
        for note in (measured_from(chart), *chart.notes):
            yield from paragraph(note)
        if chart.path:
            steps = [point for point in chart.path if chart.rows[point.row].kind is RowKind.STEPS]
            chain = "; ".join(f"{point.text} {time_in_words(point.latest_us)}" for point in steps)
            yield from paragraph(f"Critical path, at its latest: {chain}", hanging=2)
        for mark in chart.marks:
            tone = Tone.PLAIN if mark.finding.accepted is not None else _TONES[mark.finding.severity]
            yield from paragraph(f"{mark.number}  {finding_in_a_line(mark)}", hanging=3, tone=tone)


def _unsure_stroke(row: Row, since: int, until: int) -> bool:
    edges = row.edges
    return bool(edges) and min(edge.drawn_from_us for edge in edges) < until and edges[-1].drawn_to_us > since


def _position(row: Row, level: int) -> str:
    """``:`` where a motor valve stands between its ends."""
    letters = {LOW: "x", HIGH: "o"} if row.ends == TAP else {LOW: "b", MIDDLE: "c", HIGH: "a"}
    return letters.get(level, ":")


def _place(level: int) -> int:
    """Which of the three lines, 0 at the bottom."""
    return 0 if level < WHOLE_SHARE // 5 else 2 if level > WHOLE_SHARE * 4 // 5 else 1


def _way(chart: Chart, row: Row, which: str) -> list[tuple[int, int]]:
    """The knots of a piston's way if all its events come at this one of their times."""
    knots = [(chart.begin_us, row.begin_level)]
    for edge in row.edges:
        knots.append((max(_time(edge, which), knots[-1][0]), edge.level))
    return knots


def _time(edge: Edge, which: str) -> int:
    time: int = getattr(edge, which)
    return time


def _at(way: list[tuple[int, int]], time_us: int) -> int:
    before = way[0]
    for knot in way:
        if knot[0] > time_us:
            run = knot[0] - before[0]
            return before[1] + (knot[1] - before[1]) * (time_us - before[0]) // max(run, 1) if run else knot[1]
        before = knot
    return before[1]
