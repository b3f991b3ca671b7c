"""The table, read back with the csv module."""

from __future__ import annotations

import csv
import io
from pathlib import Path

import pytest

from seqcheck.chart.model import RowKind
from seqcheck.chart.table import HEADS, csv_table
from tests.chart.charts import HOSTILE, MIXED, TEXTS, band_edges, chart


def read(text: str) -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(text, newline="")))


@pytest.mark.parametrize("name", sorted(TEXTS))
def test_every_event_with_its_bounds(tmp_path: Path, name: str) -> None:
    drawn = chart(tmp_path, TEXTS[name])
    rows = read(csv_table(drawn))
    assert tuple(rows[0]) == HEADS
    found = sorted((row["row"], row["earliest_us"], row["typical_us"], row["latest_us"]) for row in rows)
    wanted = sorted(
        (row.name, *("" if time is None else str(time) for time in (edge.earliest_us, edge.typical_us, edge.latest_us)))
        for row in drawn.rows
        for edge in (band_edges(row) if row.kind is RowKind.STEPS else row.edges)
    )
    assert found == wanted
    typical = [int(row["typical_us"]) for row in rows]
    assert typical == sorted(typical)


def test_figures_of_the_worked_case(tmp_path: Path) -> None:
    """Added by hand from 8..12 + 0.5..1 + 18..28 + 380..450 + 2..4 + 0..12 ms."""
    rows = {row["event"]: row for row in read(csv_table(chart(tmp_path, TEXTS["clamp"])))}
    line = rows["clamp fully extended"]
    assert (line["earliest_us"], line["latest_us"]) == ("406500", "491000")
    assert (rows["step main.clamp+ left"]["earliest_us"], rows["step main.clamp+ left"]["latest_us"]) == (
        "408500",
        "507000",
    )
    assert (rows["Y1 energized"]["address"], rows["Y1 energized"]["kind"]) == ("%Q0.0", "coil")


def test_hostile_names_come_back_and_none_is_a_formula(tmp_path: Path) -> None:
    rows = read(csv_table(chart(tmp_path, HOSTILE)))
    labels = {row["label"] for row in rows}
    assert "]]> & 'one' </svg> $end" in labels and "<a href='javascript:alert(1)'>" in labels
    assert {"סליל", "שסתום", "גליל"} <= {row["row"] for row in rows}
    assert not [field for row in rows for name in HEADS[:5] if (field := row[name]).startswith(("=", "+", "-", "@"))]


def test_a_label_that_begins_like_a_formula_is_marked(tmp_path: Path) -> None:
    text = TEXTS["clamp"].replace('"crate clamp"', '"=1+2"')
    assert "'=1+2" in {row["label"] for row in read(csv_table(chart(tmp_path, text)))}


def test_lines_end_as_rfc_4180_says(tmp_path: Path) -> None:
    text = csv_table(chart(tmp_path, MIXED))
    assert text.count("\r\n") == text.count("\n") == len(read(text)) + 1
