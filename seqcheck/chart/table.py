"""The chart as a table of comma-separated values: every event with its earliest, typical and latest time.

Takes a chart; gives CSV (RFC 4180) with one line of heads. Times are whole microseconds from the anchor; an open one is
an empty field. A field that a spreadsheet would take for a formula begins with an apostrophe.
"""

from __future__ import annotations

import csv
import io
from collections.abc import Iterator

from seqcheck.chart.model import Chart, Edge, Row, RowKind

HEADS = ("row", "kind", "address", "label", "event", "earliest_us", "typical_us", "latest_us")
_BEGINS_A_FORMULA = ("=", "+", "-", "@", "\t", "\r")


def csv_table(chart: Chart) -> str:
    """In the order of typical times, and of the rows where these are equal."""
    stream = io.StringIO()
    writer = csv.writer(stream, lineterminator="\r\n")
    writer.writerow(HEADS)
    events = [(edge, row) for row in chart.rows for edge in _edges(row)]
    for edge, row in sorted(events, key=lambda event: event[0].typical_us):
        texts = (row.name, row.kind.value, row.address or "", row.label or "", edge.text)
        times = ("" if time is None else time for time in (edge.earliest_us, edge.typical_us, edge.latest_us))
        writer.writerow((*map(_harmless, texts), *times))
    return stream.getvalue()


def _edges(row: Row) -> Iterator[Edge]:
    if row.kind is not RowKind.STEPS:
        yield from row.edges
        return
    for band in row.bands:
        yield from (edge for edge in (band.begin, band.end) if edge is not None)
    yield from (decision.edge for decision in row.decisions)


def _harmless(text: str) -> str:
    return f"'{text}" if text.startswith(_BEGINS_A_FORMULA) else text
