"""What of a chart a picture shows, and where everything stands in it.

Takes a chart with the part of it to draw and the room for it; gives places in pixels. A long chart is cut into views
side by side; the row names and the steps are in each of them, and a view may leave out rows of devices.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import field
from itertools import accumulate, pairwise

from seqcheck.chart.canvas import text_width
from seqcheck.chart.model import Band, Chart, Edge, Row, RowKind
from seqcheck.language.durations import format_duration
from seqcheck.machine.records import record
from seqcheck.machine.time import WHOLE_SHARE

NAME_SIZE, SMALL_SIZE, STEP_SIZE = 13, 11, 12
#: Room at the left for the names of the rows, and at the right for an open edge at the very end.
LEAST_NAMES, MOST_NAMES, RIGHT = 96, 190, 46
AXIS_HEIGHT = 24
#: What an arrow with the word needs that says that a time is open.
ROOM_FOR_OPEN = 46
BOX_HEIGHT, BAR_HEIGHT = 22, 5
#: Spans below steps stand in at most so many heights.
_MOST_HEIGHTS = 4
_HEIGHTS = {RowKind.VALVE: 38, RowKind.CYLINDER: 60}
_CLOSE_HEIGHTS = {RowKind.VALVE: 30, RowKind.CYLINDER: 42}
_LEVEL_HEIGHT, _CLOSE_LEVEL_HEIGHT = 30, 24
#: From so many rows on they stand closer.
_MANY_ROWS = 30
#: What a step should have on average, and the least and greatest width of a whole picture's time axis.
_STEP_WIDTH, LEAST_WIDTH, MOST_WIDTH = 62, 860, 12_000
#: Over the first row, where findings have their signs on its upper border.
_ROOM_FOR_SIGNS = 20
#: How high slanted names may reach, and how much they rise for their length (about 45 degrees).
_MOST_SLANTED, SLANT_RISE = 110, 0.71


@record
class View:
    """``rows``: indices of the chart's rows, all if None; rows of steps are always shown. ``width``: of the whole
    picture in pixels, as the chart needs if None. ``captions``: with its title above and the findings below."""

    begin_us: int
    end_us: int
    rows: tuple[int, ...] | None = None
    width: float | None = None
    captions: bool = True


@record
class Spot:
    """A row of the picture: ``index`` among the chart's rows, from ``top`` over ``height``; its line between the
    heights ``low`` and ``high``. ``lane_tops``: where each lane of steps begins; ``lane_at``: by time, the lane of the
    first step that ends then, or else begins."""

    index: int
    row: Row
    top: float
    height: float
    lane_tops: tuple[float, ...] = ()
    lane_at: Mapping[int, int] = field(default_factory=dict)

    @property
    def low(self) -> float:
        return self.top + self.height - 7

    @property
    def high(self) -> float:
        return self.top + 7

    def at(self, level: int) -> float:
        return self.low + (self.high - self.low) * level / WHOLE_SHARE


@record
class Frame:
    """``left`` to ``right`` is the time axis, ``top`` to ``bottom`` the rows, steps first; ``slanted``: the height
    over them for step names that their boxes have no room for. ``begin_us`` to ``end_us``: the part of the view in
    which the lines of the chart run; what lies beside it has only spans."""

    view: View
    begin_us: int
    end_us: int
    chart_begin_us: int
    chart_end_us: int
    left: float
    right: float
    top: float
    bottom: float
    slanted: float
    spots: tuple[Spot, ...]

    @property
    def us_per_pixel(self) -> float:
        return max(self.view.end_us - self.view.begin_us, 1) / (self.right - self.left)

    def x(self, time_us: int) -> float:
        return self.left + (time_us - self.view.begin_us) / self.us_per_pixel

    def held(self, time_us: int) -> float:
        """The same, held within the picture."""
        return min(max(self.x(time_us), self.left), self.right)

    def shows(self, time_us: int) -> bool:
        return self.view.begin_us <= time_us <= self.view.end_us

    def spot_of(self, index: int) -> Spot | None:
        return next((spot for spot in self.spots if spot.index == index), None)


def whole_view(chart: Chart) -> View:
    return View(*whole_time(chart))


def whole_time(chart: Chart) -> tuple[int, int]:
    """From the earliest time at which anything of the chart can come to the latest, but not further than the part shown
    is long: spans that reach beyond are cut. Open ones stand at their typical times."""
    edges = [edge for row in chart.rows for edge in (*row.edges, *edges_of_bands(row.bands))]
    earliest, latest = (edge.drawn_from_us for edge in edges), (edge.drawn_to_us for edge in edges)
    length = chart.end_us - chart.begin_us
    begin, end = min((chart.begin_us, *earliest)), max((chart.end_us, *latest))
    return max(begin, chart.begin_us - length), min(end, chart.end_us + length)


def edges_of_bands(bands: Sequence[Band]) -> tuple[Edge, ...]:
    """The edges of steps in the order of time, those once that several steps share."""
    edges = {
        (edge.typical_us, edge.earliest_us, edge.latest_us): edge
        for band in reversed(bands)
        for edge in (band.end, band.begin)
        if edge is not None
    }
    return tuple(edges[key] for key in sorted(edges, key=lambda key: key[0]))


def views_side_by_side(chart: Chart, width: float) -> tuple[View, ...]:
    """The chart cut in time so that every view, ``width`` pixels wide, is as roomy as the chart needs; all views
    cover equal times."""
    axis = width - names_width(chart.rows) - RIGHT
    count = max(1, round(axis_width(chart) / axis + 0.3))
    begin, end = whole_time(chart)
    cuts = [begin + (end - begin) * number // count for number in range(count + 1)]
    return tuple(View(begin, end, None, width) for begin, end in pairwise(cuts))


def begins_block(before: RowKind | None, kind: RowKind) -> bool:
    """Whether a row of this kind begins something new after one of the kind ``before``."""
    if before is None or kind in (RowKind.OUTPUT, RowKind.SIGNAL, RowKind.FLAG):
        return before is not kind
    return kind is RowKind.COIL and before is not RowKind.COIL


def axis_width(chart: Chart) -> float:
    """How wide the time axis of the whole chart should be to give its steps room."""
    steps = sum(len(row.bands) for row in chart.rows)
    return min(max(steps * _STEP_WIDTH, LEAST_WIDTH), MOST_WIDTH)


def names_width(rows: Sequence[Row]) -> float:
    widest = max(
        (max(text_width(first, NAME_SIZE), text_width(second, SMALL_SIZE)) for first, second in map(row_texts, rows)),
        default=0,
    )
    return min(max(widest + 22, LEAST_NAMES), MOST_NAMES)


def row_texts(row: Row) -> tuple[str, str]:
    """What stands before a row: its name, and below its address and label."""
    return row.name, " ".join(part for part in (row.address, row.label) if part)


def framed(chart: Chart, view: View, above: float = 0) -> Frame:
    """``above``: room for a title over everything."""
    rows = [
        (index, row)
        for index, row in enumerate(chart.rows)
        if row.kind is RowKind.STEPS or view.rows is None or index in view.rows
    ]
    left = names_width(chart.rows) + (ROOM_FOR_OPEN if _opens_left(rows, view) else 0)
    width = view.width or left + axis_width(chart) + RIGHT
    right = width - RIGHT
    us_per_pixel = max(view.end_us - view.begin_us, 1) / (right - left)
    signs = _ROOM_FOR_SIGNS if any(mark.row == index for mark in chart.marks for index, _ in rows[:1]) else 0
    slanted = max(_slanted([row for _, row in rows], view, us_per_pixel), signs)
    top = above + AXIS_HEIGHT + slanted
    spots = []
    y = top
    for index, row in rows:
        height = _height(chart, row)
        lanes = accumulate(lane_heights(row), initial=y) if row.kind is RowKind.STEPS else ()
        spots.append(Spot(index, row, y, height, tuple(lanes), _lane_at(row)))
        y += height
    begin, end = max(view.begin_us, chart.begin_us), min(view.end_us, chart.end_us)
    whole = chart.begin_us, chart.end_us
    return Frame(view, begin, end, *whole, left, right, top, y, slanted, tuple(spots))


def _lane_at(row: Row) -> dict[int, int]:
    begins = {band.begin.typical_us: band.lane for band in reversed(row.bands) if band.begin is not None}
    return begins | {band.end.typical_us: band.lane for band in reversed(row.bands) if band.end is not None}


def stacked(row: Row, lane: int) -> tuple[tuple[Edge, int], ...]:
    """The edges of the steps in a lane, each with the height in which its span stands, 0 on top: the first that is
    free, so that neighbours are told apart, or the one that is free soonest."""
    free: list[int] = []
    found = []
    for edge in edges_of_bands([band for band in row.bands if band.lane == lane]):
        height = next((at for at, until in enumerate(free) if until < edge.drawn_from_us), len(free))
        if height == _MOST_HEIGHTS:
            height = free.index(min(free))
        free[height : height + 1] = [edge.drawn_to_us]
        found.append((edge, height))
    return tuple(found)


def lane_heights(row: Row) -> tuple[float, ...]:
    """How high each lane of a row of steps is, its spans included."""
    counts = [max((height for _, height in stacked(row, lane)), default=0) + 1 for lane in range(row.lanes)]
    return tuple(BOX_HEIGHT + 5 + count * (BAR_HEIGHT + 1) for count in counts)


def _opens_left(rows: Sequence[tuple[int, Row]], view: View) -> bool:
    """Whether an edge that may come at any time before stands so near to the left that its arrow needs room there."""
    near = view.begin_us + (view.end_us - view.begin_us) // 20
    return any(
        edge.earliest_us is None and view.begin_us <= edge.typical_us <= near
        for _, row in rows
        for edge in (*row.edges, *edges_of_bands(row.bands))
    )


def _height(chart: Chart, row: Row) -> float:
    if row.kind is RowKind.STEPS:
        return sum(lane_heights(row)) + 2
    close = len(chart.rows) > _MANY_ROWS
    heights, level = (_CLOSE_HEIGHTS, _CLOSE_LEVEL_HEIGHT) if close else (_HEIGHTS, _LEVEL_HEIGHT)
    return heights.get(row.kind, level)


def _slanted(rows: Sequence[Row], view: View, us_per_pixel: float) -> float:
    """The height for the slanted names of the steps whose boxes are too narrow for them."""
    narrow = [
        text_width(band.name, STEP_SIZE)
        for row in rows
        for band in row.bands
        if is_narrow(band, view.begin_us, view.end_us, us_per_pixel)
    ]
    return min(max(narrow) * SLANT_RISE + 14, _MOST_SLANTED) if narrow else 0


def band_times(band: Band, begin_us: int, end_us: int) -> tuple[int, int] | None:
    """From when to when a step is seen active in a view; None where it is not."""
    begin = band.begin.typical_us if band.begin else begin_us
    end = band.end.typical_us if band.end else end_us
    begin, end = max(begin, begin_us), min(end, end_us)
    inside = begin < end or (begin == end and begin_us <= begin < end_us and band.begin is not None)
    return (begin, end) if inside else None


def is_narrow(band: Band, begin_us: int, end_us: int, us_per_pixel: float) -> bool:
    """Whether its box, as far as it is seen, has no room for its name."""
    times = band_times(band, begin_us, end_us)
    return times is not None and (times[1] - times[0]) / us_per_pixel < text_width(band.name, STEP_SIZE) + 8


def ticks(begin_us: int, end_us: int, most: int) -> tuple[tuple[int, str], ...]:
    """At most so many round times from one to another, with their writing."""
    length = max(end_us - begin_us, 1)
    step = next(
        factor * 10**power for power in range(15) for factor in (1, 2, 5) if factor * 10**power * max(most, 1) >= length
    )
    first = -(-begin_us // step) * step
    return tuple((time, format_duration(time)) for time in range(first, end_us + 1, step))
