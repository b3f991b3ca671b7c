"""The chart of the HTML report, cut into sheets of paper.

Takes charts and the line that stands over each sheet; gives a picture for each part of time, with the names of the rows
and the steps in each. Where the rows of a long chart fill several sheets, a sheet shows those that change in its part
of time, and says in words how the others stand. A sheet has the shape of A4 and A3 paper on its side: it fills either.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import replace

from seqcheck.chart.model import HIGH, LOW, MIDDLE, TAP, Chart, Row, RowKind
from seqcheck.chart.page_markup import NOTHING, Markup, element, lines, name, text
from seqcheck.chart.svg import svg
from seqcheck.chart.view import AXIS_HEIGHT, View, begins_block, framed, views_side_by_side
from seqcheck.chart.wording import measured_from
from seqcheck.language.durations import format_duration
from seqcheck.report.plain import plain_record

#: In pixels; 1060 on the 277 mm that an A4 page has between its margins set the row names in 9.6 point.
SHEET_WIDTH, SHEET_HEIGHT = 1060, 640
#: By how much the rows of a sheet may be too many, and all be drawn smaller.
CLOSER = 1.25

_ON_OR_OFF = {LOW: "off", HIGH: "on"}
_STANDS = {
    RowKind.CYLINDER: {LOW: "retracted", MIDDLE: "half way", HIGH: "extended"},
    RowKind.VALVE: {LOW: "at b", MIDDLE: "at centre", HIGH: "at a"},
}
_TAP_STANDS = {LOW: "closed", HIGH: "open"}


def chart_sheets(charts: Sequence[Chart], imprint: str) -> Markup:
    """Every chart from its beginning to its end, and of each part of time all rows before the next."""
    return lines(sheet for chart in charts for sheet in _sheets(plain_record(chart, "utf-8"), imprint))


def sheet_views(chart: Chart) -> tuple[View, ...]:
    """What is on each sheet."""
    parts = [replace(part, captions=False) for part in views_side_by_side(chart, SHEET_WIDTH)]
    everything = tuple(index for index, row in enumerate(chart.rows) if row.kind is not RowKind.STEPS)
    if all(_height(chart, part, everything) <= SHEET_HEIGHT * CLOSER for part in parts):
        return tuple(replace(part, rows=everything) for part in parts)
    return tuple(view for part in parts for view in _cut(chart, part, everything))


def _sheets(chart: Chart, imprint: str) -> Iterator[Markup]:
    views = sheet_views(chart)
    yield element("p", text(" ".join((measured_from(chart), *_reading(chart), *chart.notes))), class_="meaning")
    for number, view in enumerate(views, 1):
        begin, end = format_duration(view.begin_us), format_duration(view.end_us)
        captions = (f"{chart.title}, {begin} to {end}", imprint, f"sheet {number} of {len(views)}")
        caption = element("figcaption", *(element("span", text(one)) for one in captions))
        yield element("figure", caption, Markup(svg(chart, view)), at_rest(chart, view), class_="sheet")


def _reading(chart: Chart) -> Iterator[str]:
    if chart.run:
        yield "Lines are drawn at the times of this run."
    else:
        yield "Lines are drawn at typical times; what is shaded reaches from the earliest to the latest."
    if chart.path:
        yield "The broad line below them is the critical path."
    if any(row.decisions for row in chart.rows):
        yield "A lozenge is a choice, with the number of its branch."
    if any(mark.time_us is not None for mark in chart.marks):
        yield "Numbered marks are the findings above."


def _cut(chart: Chart, part: View, everything: Sequence[int]) -> Iterator[View]:
    """The rows that change in this part of time, on as many sheets as they need; a valve stays with what it moves. The
    last rows are drawn a little smaller rather than alone on a sheet."""
    group: tuple[int, ...] = ()
    waiting = list(_blocks(chart, [index for index in everything if _changes(chart.rows[index], part)]))
    while waiting:
        everything_left = (*group, *(index for block in waiting for index in block))
        if _height(chart, part, everything_left) <= SHEET_HEIGHT * CLOSER:
            group = everything_left
            break
        block = waiting.pop(0)
        if _height(chart, part, group + block) <= SHEET_HEIGHT:
            group += block
        elif group:
            yield replace(part, rows=group)
            group, waiting = (), [block, *waiting]
        else:
            waiting = [block[: len(block) // 2], block[len(block) // 2 :], *waiting]
    yield replace(part, rows=group)


def _height(chart: Chart, part: View, rows: tuple[int, ...]) -> float:
    return framed(chart, replace(part, rows=rows)).bottom + AXIS_HEIGHT


def _blocks(chart: Chart, rows: Sequence[int]) -> Iterator[tuple[int, ...]]:
    block: tuple[int, ...] = ()
    for index in rows:
        if block and begins_block(chart.rows[block[-1]].kind, chart.rows[index].kind):
            yield block
            block = ()
        block = (*block, index)
    if block:
        yield block


def _changes(row: Row, part: View) -> bool:
    return any(part.begin_us <= edge.typical_us <= part.end_us for edge in row.edges)


def at_rest(chart: Chart, view: View) -> Markup:
    """How the rows stand that do not change in this part of time; NOTHING where all rows are drawn."""
    found: dict[str, list[str]] = {}
    for row in chart.rows:
        if row.kind is not RowKind.STEPS and not _changes(row, view):
            level = next(
                (edge.level for edge in reversed(row.edges) if edge.typical_us <= view.begin_us), row.begin_level
            )
            named = _TAP_STANDS if row.ends == TAP else _STANDS.get(row.kind, _ON_OR_OFF)
            words = named.get(level, "between its ends")
            found.setdefault(words, []).append(row.name)
    shown = view.rows is not None and len(view.rows) == sum(row.kind is not RowKind.STEPS for row in chart.rows)
    if shown or not found:
        return NOTHING
    parts = (
        Markup(f"{element('strong', text(words))} {Markup(', '.join(map(name, found[words])))}")
        for words in sorted(found)
    )
    return element("p", text("Unchanged here at typical times: "), Markup("; ".join(parts)), class_="at-rest")
