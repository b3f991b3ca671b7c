"""What lies over the rows of the picture: the critical path and the numbered findings; and below them the findings in
words.

Takes a chart, a frame and a canvas; draws.
"""

from __future__ import annotations

from collections.abc import Iterator
from itertools import pairwise

from seqcheck.chart.canvas import Canvas, Point, text_width, wrapped
from seqcheck.chart.model import Chart, Mark, PathPoint, RowKind
from seqcheck.chart.svg_rows import INK, SHADE, SHADE_END, level_at
from seqcheck.chart.view import BOX_HEIGHT, SMALL_SIZE, Frame, Spot
from seqcheck.chart.wording import SAFETY, finding_in_a_line, measured_from, time_in_words
from seqcheck.machine.findings import Severity
from seqcheck.machine.records import record

PATH = "#d98e2b"
_RADIUS = 9
_CAPTION_SIZE, _CAPTION_LINE, _INDENT = 13, 19, 28


def draw_path(canvas: Canvas, chart: Chart, frame: Frame) -> None:
    """A broad line below everything, along each row while that row takes the time, with a dot at every event and an
    arrow where it goes to another row."""
    points = [(one, spot) for one in chart.path if (spot := frame.spot_of(one.row))]
    with canvas.group("critical path: the chain of events that makes the longest cycle", data_path="critical"):
        for (one, spot), (other, next_spot) in pairwise(points):
            if one.typical_us > frame.view.end_us or other.typical_us < frame.view.begin_us:
                continue
            _part(canvas, frame, (one, spot), (other, next_spot))
        for one, spot in points:
            if frame.shows(one.typical_us):
                latest = f"{one.text}: at {time_in_words(one.typical_us)}, at the latest {time_in_words(one.latest_us)}"
                with canvas.group(latest):
                    canvas.circle(frame.x(one.typical_us), _height(frame, spot, one.typical_us), 4, fill=PATH)


def _part(canvas: Canvas, frame: Frame, one: tuple[PathPoint, Spot], other: tuple[PathPoint, Spot]) -> None:
    """From one event down or up into the row of the next, then along that row to it."""
    (begin, from_spot), (end, to_spot) = one, other
    since, until = max(begin.typical_us, frame.view.begin_us), min(end.typical_us, frame.view.end_us)
    x = frame.x(since)
    y, turn = _height(frame, from_spot, begin.typical_us), _height(frame, to_spot, since)
    way = [(x, y)] if frame.shows(begin.typical_us) else []
    if to_spot.row.kind is RowKind.STEPS:
        turn = _height(frame, to_spot, end.typical_us)
        if from_spot is not to_spot and way:
            # Not up where it has just come down, nor where it will go down.
            x = (x + frame.x(until)) / 2
            way.append((x, y))
    way += [(x, turn), *_along(frame, to_spot, since, until)]
    canvas.polyline(way, stroke=PATH, stroke_width=5, stroke_opacity=0.75, stroke_linejoin="round")
    if from_spot is not to_spot and frame.shows(begin.typical_us) and abs(turn - y) > 24:
        middle, step = (y + turn) / 2, 5 if turn > y else -5
        canvas.polygon([(x - 6, middle - step), (x + 6, middle - step), (x, middle + step)], fill=INK)


def _along(frame: Frame, spot: Spot, begin_us: int, end_us: int) -> Iterator[Point]:
    """The row's own line; a jump at the very beginning is part of it."""
    for edge in spot.row.edges:
        if spot.row.kind.sloped and begin_us < edge.typical_us < end_us:
            yield frame.x(edge.typical_us), spot.at(edge.level)
        elif not spot.row.kind.sloped and begin_us <= edge.typical_us < end_us:
            yield frame.x(edge.typical_us), _height(frame, spot, edge.typical_us)
            yield frame.x(edge.typical_us), spot.at(edge.level)
    yield frame.x(end_us), _height(frame, spot, end_us)


def _height(frame: Frame, spot: Spot, time_us: int) -> float:
    """Where the row's line is as the event comes; for steps below the box that ends then, or begins."""
    if spot.row.kind is not RowKind.STEPS:
        return spot.at(round(level_at(spot.row, frame, time_us)))
    return spot.lane_tops[spot.lane_at.get(time_us, 0)] + BOX_HEIGHT + 1.5


def draw_marks(canvas: Canvas, chart: Chart, frame: Frame) -> None:
    """A numbered sign at each finding, side by side where they lie close."""
    taken: list[Point] = []
    for mark in chart.marks:
        spot = frame.spot_of(mark.row) if mark.row is not None else None
        if mark.time_us is None or spot is None or not frame.shows(mark.time_us):
            continue
        x = frame.x(mark.time_us)
        beside = _by_a_choice(frame, spot, x)
        # On the upper border of the boxes of steps, so that their names stay readable; clear of the sign of a choice.
        y = spot.top + (4 if spot.row.kind is not RowKind.STEPS else -9 if beside else -2)
        with canvas.group(f"finding {mark.number}: {finding_in_a_line(mark)}", data_finding=str(mark.number)):
            canvas.line(
                x, spot.top + (BOX_HEIGHT if beside else 0), x, spot.top + spot.height, stroke=INK, stroke_width=2.2
            )
            at = x
            while any(
                abs(at - other_x) < 2.2 * _RADIUS and abs(y - other_y) < 2 * _RADIUS for other_x, other_y in taken
            ):
                at += 2.2 * _RADIUS
            taken.append((at, y))
            draw_sign(canvas, mark, at, y)


def _by_a_choice(frame: Frame, spot: Spot, x: float) -> bool:
    return any(abs(frame.x(one.edge.typical_us) - x) < 2 * _RADIUS for one in spot.row.decisions)


def draw_sign(canvas: Canvas, mark: Mark, x: float, y: float) -> None:
    """An error is a filled disc, anything else a ring; what is accepted a broken ring."""
    finding = mark.finding
    filled = finding.severity is Severity.ERROR and finding.accepted is None
    dashes = {"stroke_dasharray": "3 2"} if finding.accepted is not None else {}
    canvas.circle(x, y, _RADIUS, fill=INK if filled else "#ffffff", stroke=INK, stroke_width=1.6, **dashes)
    size = 12 if mark.number < 100 else 9
    fill = "#ffffff" if filled else INK
    canvas.text(x, y + 4.2, str(mark.number), size, text_anchor="middle", font_weight="bold", fill=fill)


@record
class Caption:
    """A line below the picture; ``mark`` where a finding begins, whose sign then stands before it."""

    text: str
    indent: float
    mark: Mark | None = None


def captions(chart: Chart, width: float) -> list[Caption]:
    """How to read it, what its times hold for, what it is not, the findings."""
    lines: list[Caption] = []
    for note in (measured_from(chart), *chart.notes, SAFETY):
        lines += [Caption(part, 0) for part in wrapped(note, width, _CAPTION_SIZE)]
    for mark in chart.marks:
        first, *rest = wrapped(finding_in_a_line(mark), width - _INDENT, _CAPTION_SIZE)
        lines += [Caption(first, _INDENT, mark), *(Caption(part, _INDENT) for part in rest)]
    return lines


def captions_height(chart: Chart, width: float) -> float:
    return len(captions(chart, width)) * _CAPTION_LINE + 40


def draw_captions(canvas: Canvas, chart: Chart, left: float, top: float, width: float) -> None:
    _draw_key(canvas, chart, left, top + 14)
    y = top + 42
    for caption in captions(chart, width):
        if caption.mark is not None:
            draw_sign(canvas, caption.mark, left + 10, y - 4)
        canvas.text(left + caption.indent, y, caption.text, _CAPTION_SIZE, fill=INK)
        y += _CAPTION_LINE


def _draw_key(canvas: Canvas, chart: Chart, left: float, y: float) -> None:
    """The signs of the picture with their meaning, in one line."""
    x = left
    if not chart.run:
        canvas.rect(x, y - 9, 30, 10, fill=SHADE, fill_opacity=0.5)
        for end in (x, x + 30):
            canvas.line(end, y - 9, end, y + 1, stroke=SHADE_END, stroke_width=1)
        x = _key_text(canvas, x + 36, y, "from the earliest to the latest time")
    canvas.line(x, y - 4, x + 30, y - 4, stroke=INK, stroke_width=3.6)
    x = _key_text(canvas, x + 36, y, "on, at " + ("the times of this run" if chart.run else "typical times"))
    if chart.path:
        canvas.line(x, y - 4, x + 30, y - 4, stroke=PATH, stroke_width=5, stroke_opacity=0.75)
        canvas.circle(x + 15, y - 4, 4, fill=PATH)
        x = _key_text(canvas, x + 36, y, "critical path")
    if any(row.decisions for row in chart.rows):
        sign = [(x, y - 4), (x + 8, y - 12), (x + 16, y - 4), (x + 8, y + 4)]
        canvas.polygon(sign, fill="#ffffff", stroke=INK, stroke_width=1.4)
        x = _key_text(canvas, x + 21, y, "choice, with its branch")
    if any(mark.time_us is not None for mark in chart.marks):
        canvas.circle(x + 9, y - 4, _RADIUS - 1, fill=INK)
        _key_text(canvas, x + 24, y, "finding, below")


def _key_text(canvas: Canvas, x: float, y: float, text: str) -> float:
    canvas.text(x, y, text, SMALL_SIZE + 1, fill=INK)
    return x + text_width(text, SMALL_SIZE + 1) + 22
