"""The rows of the picture: lines of devices, and the span of every edge.

Takes a frame and a canvas; draws. Every edge is a group with its three times in microseconds and a title that says
them; its first shape is the span, from the earliest to the latest time, with a closing line at both. An open time is an
arrow.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from itertools import pairwise

from seqcheck.chart.canvas import Canvas, Point
from seqcheck.chart.model import HIGH, LOW, MIDDLE, Edge, Row, RowKind
from seqcheck.chart.view import SMALL_SIZE, Frame, Spot
from seqcheck.chart.wording import OPEN, told

INK, SHADE, SHADE_END, FAINT = "#111111", "#9fb0c2", "#3d4a57", "#a0a0a0"
_ARROW = 13
_ROOM_FOR_OPEN = 52


def draw_spans(canvas: Canvas, frame: Frame, spot: Spot) -> None:
    """What is uncertain in the row of one device."""
    row = spot.row
    with canvas.group(data_row=row.name, data_kind=row.kind.value):
        if row.kind.sloped:
            _levels(canvas, frame, spot)
            for stroke in strokes(row.edges):
                _swept(canvas, frame, spot, stroke)
        for number, edge in enumerate(row.edges):
            if touches(frame, edge):
                following = row.edges[number + 1].typical_us if number + 1 < len(row.edges) else frame.end_us
                _edge(canvas, frame, spot, edge, following)


def draw_span(canvas: Canvas, frame: Frame, edge: Edge, top: float, height: float) -> None:
    """The span of an edge as a shaded box; nothing to be seen where it has none. An open side ends at the typical
    time, and the arrow says so."""
    left, right = frame.held(edge.drawn_from_us), frame.held(edge.drawn_to_us)
    canvas.rect(left, top, right - left, height, fill=SHADE, fill_opacity=0.5)
    for time in (edge.earliest_us, edge.latest_us):
        if time is not None and frame.shows(time) and not edge.certain:
            canvas.line(frame.x(time), top, frame.x(time), top + height, stroke=SHADE_END, stroke_width=1)


def draw_open(canvas: Canvas, frame: Frame, edge: Edge, y: float, following_us: int) -> None:
    """Arrows towards the sides that are open, with the word where the next edge leaves room for it."""
    if not frame.shows(edge.typical_us):
        return
    x = frame.x(edge.typical_us)
    if edge.latest_us is None:
        canvas.arrow(x, y, x + _ARROW, stroke=INK, stroke_width=1.2, fill="none")
        if frame.held(following_us) - x > _ROOM_FOR_OPEN or following_us <= edge.typical_us:
            canvas.text(x + _ARROW + 3, y + 4, OPEN, SMALL_SIZE, fill=INK)
    if edge.earliest_us is None:
        canvas.arrow(x, y, x - _ARROW, stroke=INK, stroke_width=1.2, fill="none")
        canvas.text(x - _ARROW - 3, y + 4, OPEN, SMALL_SIZE, fill=INK, text_anchor="end")


def edge_attributes(edge: Edge) -> dict[str, str]:
    times = {"earliest": edge.earliest_us, "typical": edge.typical_us, "latest": edge.latest_us}
    return {f"data_{name}": OPEN if time is None else str(time) for name, time in times.items()}


def touches(frame: Frame, edge: Edge) -> bool:
    """Whether any of an edge's span is seen."""
    return edge.drawn_from_us <= frame.view.end_us and edge.drawn_to_us >= frame.view.begin_us


def level_at(row: Row, frame: Frame, time_us: int) -> float:
    """Where the line of a row is at a time of the view, its height in pixels aside: the level before any jump."""
    before, since = row.begin_level, frame.chart_begin_us
    for edge in row.edges:
        if edge.typical_us >= time_us:
            return _between(row, before, since, edge.level, edge.typical_us, time_us)
        before, since = edge.level, edge.typical_us
    return _between(row, before, since, row.end_level, frame.chart_end_us, time_us)


def _between(row: Row, before: int, since: int, after: int, until: int, time_us: int) -> float:
    if not row.kind.sloped or until <= since:
        return before
    return before + (after - before) * (time_us - since) / (until - since)


def _edge(canvas: Canvas, frame: Frame, spot: Spot, edge: Edge, following_us: int) -> None:
    """A jump has its span at the level it comes to, so that on and off do not cover each other; on a slope it is a
    thin bar at the height of the event, and the slope's shaded way says the rest."""
    middle = (spot.low + spot.high) / 2
    with canvas.group(told(edge), **edge_attributes(edge)):
        if spot.row.kind.sloped:
            y = spot.at(edge.level)
            draw_span(canvas, frame, edge, y - 2.5, 5)
        else:
            top, bottom = (spot.high, middle - 1) if edge.level == HIGH else (middle + 1, spot.low)
            draw_span(canvas, frame, edge, top, bottom - top)
            y = (top + bottom) / 2
        draw_open(canvas, frame, edge, y, following_us)
        if not edge.lasting and frame.shows(edge.typical_us):
            _cross(canvas, frame.x(edge.typical_us), spot.at(edge.level))


def _cross(canvas: Canvas, x: float, y: float) -> None:
    """A change that is taken back before it has any effect."""
    for rise in (-4, 4):
        canvas.line(x - 4, y - rise, x + 4, y + rise, stroke=INK, stroke_width=1.6)


def _levels(canvas: Canvas, frame: Frame, spot: Spot) -> None:
    """Faint lines at both ends of a stroke or shift, and at a valve's centre."""
    levels = (LOW, HIGH, MIDDLE) if spot.row.kind is RowKind.VALVE and _has_centre(spot.row) else (LOW, HIGH)
    for level in levels:
        y = spot.at(level)
        canvas.line(frame.left, y, frame.right, y, stroke=FAINT, stroke_width=0.6, stroke_dasharray="1 4")


def draw_ends(canvas: Canvas, frame: Frame, spot: Spot) -> None:
    """What the levels of a valve or piston mean, behind the end of the line; not where an open time is told there."""
    opens = any(
        None in (edge.earliest_us, edge.latest_us)
        and frame.shows(edge.typical_us)
        and frame.x(edge.typical_us) > frame.right - _ROOM_FOR_OPEN
        for edge in spot.row.edges
    )
    if spot.row.kind.sloped and not opens:
        levels = dict(zip((LOW, HIGH), spot.row.ends, strict=True))
        if spot.row.kind is RowKind.VALVE and _has_centre(spot.row) and spot.low - spot.high >= 2 * SMALL_SIZE:
            levels[MIDDLE] = "centre"
        for level, words in levels.items():
            canvas.text(frame.right + 4, spot.at(level) + 3, words, SMALL_SIZE, fill=INK)


def _has_centre(row: Row) -> bool:
    return MIDDLE in (row.begin_level, row.end_level, *(edge.level for edge in row.edges))


def strokes(edges: Sequence[Edge]) -> Iterator[list[Edge]]:
    """The edges of each way that a piston or spool travels, from where it sets out to where it is done."""
    way: list[Edge] = []
    for edge in edges:
        if way and edge.level != way[-1].level:
            turned = len(way) > 1 and (edge.level > way[-1].level) != (way[-1].level > way[0].level)
            if turned:
                yield way
                way = [way[-1]]
            way.append(edge)
        else:
            if len(way) > 1:
                yield way
            way = [edge]
    if len(way) > 1:
        yield way


def _swept(canvas: Canvas, frame: Frame, spot: Spot, stroke: Sequence[Edge]) -> None:
    """The area between the earliest and the latest way, both drawn fine: areas that overlap can be told apart."""
    earliest = [(frame.x(edge.drawn_from_us), spot.at(edge.level)) for edge in stroke]
    latest = [(frame.x(edge.drawn_to_us), spot.at(edge.level)) for edge in stroke]
    around = [*earliest, *reversed(latest)]
    area = cut(cut([*around, around[0]], frame.left, 1), frame.right, -1)
    if len(area) > 2:
        canvas.polygon(area, fill=SHADE, fill_opacity=0.3)
    for way in (earliest, latest):
        shown = cut(cut(way, frame.left, 1), frame.right, -1)
        if len(shown) > 1:
            canvas.polyline(shown, stroke=SHADE_END, stroke_width=0.7)


def cut(way: Sequence[Point], border: float, side: int) -> list[Point]:
    """What of a way lies right (1) or left (-1) of an upright border."""
    kept: list[Point] = []
    for number, (x, y) in enumerate(way):
        inside = (x - border) * side >= 0
        if number:
            before_x, before_y = way[number - 1]
            if ((before_x - border) * side >= 0) != inside:
                kept.append((border, before_y + (y - before_y) * (border - before_x) / (x - before_x)))
        if inside:
            kept.append((x, y))
    return kept


def draw_line(canvas: Canvas, frame: Frame, spot: Spot) -> None:
    """The line at typical times; where a coil, output or sensor is on it is thick, so that it is seen from afar."""
    if frame.begin_us >= frame.end_us:
        return
    row = spot.row
    points = [(frame.x(frame.begin_us), spot.at(round(level_at(row, frame, frame.begin_us))))]
    for edge in row.edges:
        if frame.begin_us <= edge.typical_us <= frame.end_us:
            x = frame.x(edge.typical_us)
            if not row.kind.sloped:
                points.append((x, points[-1][1]))
            points.append((x, spot.at(edge.level)))
    last = points[-1][1] if not row.kind.sloped else spot.at(round(level_at(row, frame, frame.end_us)))
    points.append((frame.x(frame.end_us), last))
    canvas.polyline(points, stroke=INK, stroke_width=1.6, stroke_linejoin="round")
    if not row.kind.sloped:
        for (x1, y1), (x2, y2) in pairwise(points):
            if y1 == y2 == spot.high and x2 > x1:
                canvas.line(x1, y1, x2, y2, stroke=INK, stroke_width=3.6)
