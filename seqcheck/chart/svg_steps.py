"""The steps of the picture: a box for each, below it the spans of their beginnings and ends.

Takes a frame and a canvas; draws. A name that its box has no room for stands slanted over the steps.
"""

from __future__ import annotations

from collections.abc import Iterator

from seqcheck.chart.canvas import Canvas, fitted, text_width
from seqcheck.chart.model import Band, Decision
from seqcheck.chart.svg_rows import FAINT, INK, draw_open, draw_span, edge_attributes, touches
from seqcheck.chart.view import (
    BAR_HEIGHT,
    BOX_HEIGHT,
    SLANT_RISE,
    SMALL_SIZE,
    STEP_SIZE,
    Frame,
    Spot,
    band_times,
    is_narrow,
    stacked,
)
from seqcheck.chart.wording import told

_SLANT_SPACING = 16
#: Half the width of the sign of a choice.
LOZENGE = 9


def draw_steps(canvas: Canvas, frame: Frame, spot: Spot) -> None:
    """One sequence: its boxes and spans."""
    with canvas.group(data_row=spot.row.name, data_kind=spot.row.kind.value):
        for band in spot.row.bands:
            _box(canvas, frame, spot, band)
        for lane in range(spot.row.lanes):
            _spans(canvas, frame, spot, lane)
        for decision in spot.row.decisions:
            _decision(canvas, frame, spot, decision)


def draw_step_lines(canvas: Canvas, frame: Frame) -> None:
    """Where steps begin, down through all rows."""
    bottoms = [spot.top + spot.height for spot in frame.spots if spot.row.bands]
    for time in sorted(_beginnings(frame)):
        x = frame.x(time)
        canvas.line(x, min(bottoms), x, frame.bottom, stroke=FAINT, stroke_width=0.8, stroke_dasharray="2 4")


def draw_slanted_names(canvas: Canvas, frame: Frame) -> None:
    for x, at, name in slanted_places(frame):
        room = (frame.slanted - 14) / SLANT_RISE + 1
        bottom = frame.top - 8
        canvas.polyline([(x, frame.top), (at - 3, bottom + 2)], stroke=FAINT, stroke_width=0.8)
        turn = f"rotate(-45 {at:.2f} {bottom:.2f})"
        canvas.text(at, bottom, fitted(name, room, STEP_SIZE), STEP_SIZE, fill=INK, transform=turn)


def slanted_places(frame: Frame) -> Iterator[tuple[float, float, str]]:
    """Where its step begins, where its name begins, and the name: from left to right, each as near to its step as the
    one before leaves room."""
    narrow = sorted(
        (frame.x(times[0]), band.name)
        for spot in frame.spots
        for band in spot.row.bands
        if (times := band_times(band, frame.begin_us, frame.end_us)) and _narrow(frame, band)
    )
    free = frame.left
    for x, name in narrow:
        at = max(x + 4, free)
        free = at + _SLANT_SPACING
        yield x, at, name


def _beginnings(frame: Frame) -> set[int]:
    return {
        band.begin.typical_us
        for spot in frame.spots
        for band in spot.row.bands
        if band.begin is not None and frame.shows(band.begin.typical_us)
    }


def _narrow(frame: Frame, band: Band) -> bool:
    return is_narrow(band, frame.begin_us, frame.end_us, frame.us_per_pixel)


def _box(canvas: Canvas, frame: Frame, spot: Spot, band: Band) -> None:
    times = band_times(band, frame.begin_us, frame.end_us)
    if times is None:
        return
    left, right = frame.x(times[0]), frame.x(times[1])
    top = spot.lane_tops[band.lane]
    label = f" ({band.label})" if band.label else ""
    with canvas.group(f"step {band.step}{label}", data_step=band.step):
        canvas.rect(left, top, right - left, BOX_HEIGHT, fill="#ffffff", stroke=INK, stroke_width=1.2)
        if not _narrow(frame, band):
            middle, room = (left + right) / 2, right - left - 8
            named = f"{band.name}: {band.label}" if band.label else band.name
            shown = named if text_width(named, STEP_SIZE) <= room else band.name
            canvas.text(middle, top + 15, shown, STEP_SIZE, text_anchor="middle", fill=INK)


def _decision(canvas: Canvas, frame: Frame, spot: Spot, decision: Decision) -> None:
    """A lozenge with the number of the branch, on the border between the steps."""
    if not frame.shows(decision.edge.typical_us):
        return
    x, y = frame.x(decision.edge.typical_us), spot.lane_tops[decision.lane] + BOX_HEIGHT / 2
    with canvas.group(told(decision.edge), data_choice=str(decision.line), **edge_attributes(decision.edge)):
        around = [(x - LOZENGE, y), (x, y - LOZENGE), (x + LOZENGE, y), (x, y + LOZENGE)]
        canvas.polygon(around, fill="#ffffff", stroke=INK, stroke_width=1.4)
        number = "-" if decision.branch is None else str(decision.branch)
        canvas.text(x, y + 4, number, SMALL_SIZE, text_anchor="middle", font_weight="bold", fill=INK)


def _spans(canvas: Canvas, frame: Frame, spot: Spot, lane: int) -> None:
    """Bars in several heights; a tick stands at the typical time."""
    edges = stacked(spot.row, lane)
    for number, (edge, height) in enumerate(edges):
        if not touches(frame, edge):
            continue
        top = spot.lane_tops[lane] + BOX_HEIGHT + 2.5 + height * (BAR_HEIGHT + 1)
        with canvas.group(told(edge), **edge_attributes(edge)):
            draw_span(canvas, frame, edge, top, BAR_HEIGHT)
            if frame.shows(edge.typical_us):
                x = frame.x(edge.typical_us)
                canvas.line(x, top - 0.5, x, top + BAR_HEIGHT + 0.5, stroke=INK, stroke_width=2)
            following = edges[number + 1][0].typical_us if number + 1 < len(edges) else edge.typical_us
            draw_open(canvas, frame, edge, top + BAR_HEIGHT / 2, following)
