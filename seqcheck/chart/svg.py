"""The timing chart as a picture: one SVG that stands by itself or within a page.

Takes a chart and what of it to show; gives the SVG text. It carries a viewBox and its own size, a title and a title for
every edge, and reads in black and white: what is on is thick, what is uncertain is shaded between two lines, findings
are numbered. It refers to nothing outside, and two of them in one page do not disturb each other.
"""

from __future__ import annotations

from seqcheck.chart.canvas import Canvas, escaped, fitted, number, text_width
from seqcheck.chart.model import Chart, RowKind
from seqcheck.chart.svg_marks import captions_height, draw_captions, draw_marks, draw_path
from seqcheck.chart.svg_rows import FAINT, INK, draw_ends, draw_line, draw_spans
from seqcheck.chart.svg_steps import draw_slanted_names, draw_step_lines, draw_steps, slanted_places
from seqcheck.chart.view import (
    AXIS_HEIGHT,
    NAME_SIZE,
    RIGHT,
    SMALL_SIZE,
    Frame,
    Spot,
    View,
    begins_block,
    framed,
    row_texts,
    ticks,
    whole_view,
)

_TITLE_HEIGHT, _TITLE_SIZE = 34, 17
_TICK_EVERY = 95
_ROOM_FOR_NEXT = 70
_FONTS = "Arial, 'Liberation Sans', 'DejaVu Sans', sans-serif"


def svg(chart: Chart, view: View | None = None) -> str:
    """The part of the chart that ``view`` shows; all of it, with title and findings, if None."""
    view = view or whole_view(chart)
    frame = framed(chart, view, _TITLE_HEIGHT if view.captions else 0)
    width = frame.right + RIGHT
    below = frame.bottom + AXIS_HEIGHT
    height = below + (captions_height(chart, width - 20) if view.captions else 0)
    canvas = Canvas()
    canvas.rect(0, 0, width, height, fill="#ffffff")
    _draw_grid(canvas, chart, frame)
    devices = [spot for spot in frame.spots if spot.row.kind is not RowKind.STEPS]
    for spot in devices:
        draw_spans(canvas, frame, spot)
    draw_path(canvas, chart, frame)
    for spot in frame.spots:
        _draw_name(canvas, frame, spot)
        if spot.row.kind is RowKind.STEPS:
            draw_steps(canvas, frame, spot)
    for spot in devices:
        draw_line(canvas, frame, spot)
        draw_ends(canvas, frame, spot)
    draw_slanted_names(canvas, frame)
    draw_marks(canvas, chart, frame)
    if view.captions:
        _draw_title(canvas, chart, width)
        draw_captions(canvas, chart, 10, below, width - 20)
    return _document(chart, frame, canvas.render(), width, height)


def _document(chart: Chart, frame: Frame, content: str, width: float, height: float) -> str:
    size = f'width="{number(width)}" height="{number(height)}" viewBox="0 0 {number(width)} {number(height)}"'
    scale = (
        f'data-left="{number(frame.left)}" data-right="{number(frame.right)}"'
        f' data-begin="{frame.view.begin_us}" data-end="{frame.view.end_us}"'
    )
    title = escaped(f"{chart.machine}: timing chart of {chart.title}")
    return (
        f'<svg xmlns="http://www.w3.org/2000/svg" {size} role="img" aria-label="{title}" {scale}'
        f' font-family="{_FONTS}">\n<title>{title}</title>\n{content}</svg>\n'
    )


def _draw_title(canvas: Canvas, chart: Chart, width: float) -> None:
    title = fitted(f"{chart.machine}: {chart.title}", width * 0.7, _TITLE_SIZE)
    room = width - text_width(title, _TITLE_SIZE * 1.1) - 40
    canvas.text(10, 22, title, _TITLE_SIZE, font_weight="bold", fill=INK)
    canvas.text(width - 10, 22, fitted(chart.file, room, NAME_SIZE), NAME_SIZE, text_anchor="end", fill=INK)


def _draw_grid(canvas: Canvas, chart: Chart, frame: Frame) -> None:
    """Round times above and below, the beginnings of steps down through all rows, a line over every row."""
    above = frame.top - frame.slanted
    times = ticks(frame.view.begin_us, frame.view.end_us, int((frame.right - frame.left) // _TICK_EVERY))
    for time, words in times:
        x = frame.x(time)
        for y in (above - 9, frame.bottom + 17):
            canvas.text(x, y, words, SMALL_SIZE + 1, text_anchor="middle", fill=INK)
        canvas.line(x, above - 5, x, above, stroke=INK, stroke_width=1)
        canvas.line(x, frame.bottom, x, frame.bottom + 5, stroke=INK, stroke_width=1)
    draw_step_lines(canvas, frame)
    _draw_cycles(canvas, chart, frame, above)
    canvas.line(frame.left, above, frame.right, above, stroke=INK, stroke_width=1)
    canvas.line(frame.left, frame.bottom, frame.right, frame.bottom, stroke=INK, stroke_width=1)
    before = None
    for spot in frame.spots:
        begins = spot.row.kind is RowKind.STEPS or before is RowKind.STEPS or begins_block(before, spot.row.kind)
        look = (INK, 0.9) if begins and before is not None else (FAINT, 0.5)
        canvas.line(0, spot.top, frame.right, spot.top, stroke=look[0], stroke_width=look[1])
        before = spot.row.kind


def _draw_cycles(canvas: Canvas, chart: Chart, frame: Frame, above: float) -> None:
    """Where one cycle ends and the next begins."""
    for time in chart.cycle_starts[1:]:
        if frame.shows(time):
            x = frame.x(time)
            canvas.line(x, above, x, frame.bottom, stroke=INK, stroke_width=1.4, stroke_dasharray="8 3")
            if time == chart.end_us and frame.right - x > _ROOM_FOR_NEXT:
                slanted = [at for _, at, _ in slanted_places(frame)]
                beside = max(x + 5, slanted[-1] + 14) if slanted else x + 5
                canvas.text(beside, frame.top - 6 if slanted else above + 13, "next cycle", SMALL_SIZE, fill=INK)


def _draw_name(canvas: Canvas, frame: Frame, spot: Spot) -> None:
    first, second = row_texts(spot.row)
    room = frame.left - 14
    middle = spot.top + spot.height / 2
    if spot.row.kind is RowKind.STEPS:
        middle, second = spot.top + 14, spot.row.label or ""
    with canvas.group(f"{spot.row.kind.value} {first}" + (f", {second}" if second else "")):
        y = middle - 2 if second else middle + 4
        canvas.text(8, y, fitted(first, room, NAME_SIZE), NAME_SIZE, font_weight="bold", fill=INK)
        if second:
            canvas.text(8, y + 12, fitted(second, room, SMALL_SIZE), SMALL_SIZE, fill=INK)
