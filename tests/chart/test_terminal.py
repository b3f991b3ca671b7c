"""The chart in letters."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest
from rich.cells import cell_len

from seqcheck.chart.asked import Part
from seqcheck.chart.terminal import ASCII, FULL, chart_lines
from tests.chart.charts import CLAMP, EXAMPLES, HOSTILE, MIXED, QUESTION, TEXTS, chart, chart_of_finding

Golden = Callable[[str, str], None]


def page(folder: Path, text: str, encoding: str = "utf-8", width: int = 80) -> str:
    return "".join(f"{line.text}\n" for line in chart_lines(chart(folder, text), encoding, width))


@pytest.mark.parametrize("name", ["clamp", "mixed", "process", "question", "sorter"])
def test_pages(golden: Golden, tmp_path: Path, name: str, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    golden(f"{name}.txt", page(Path(), TEXTS[name]))
    golden(f"{name}.ascii.txt", page(Path(), TEXTS[name], "ascii"))


@pytest.mark.parametrize("encoding", ["utf-8", "ascii", "latin-1", "cp437"])
@pytest.mark.parametrize("file", EXAMPLES, ids=lambda file: file.stem)
def test_every_example_fits_its_page(
    tmp_path: Path, file: Path, encoding: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    """The drawn rows in any width, the words in 80 columns."""
    monkeypatch.chdir(tmp_path)
    for sheet in file.parent.glob("*.yaml"):
        Path(sheet.name).write_bytes(sheet.read_bytes())
    drawn = chart(Path(), file.read_text("utf-8"))
    for width in (60, 80, 132):
        lines = [line.text for line in chart_lines(drawn, encoding, width)]
        blanks = [number for number, line in enumerate(lines) if not line]
        rows = lines[blanks[0] : lines.index(next(line for line in lines if line.startswith("on ")))]
        assert len(rows) > len(drawn.rows)
        assert all(cell_len(line) <= width for line in rows)
        assert all(cell_len(line) <= 80 for line in lines if line not in rows)
        "".join(lines).encode(encoding)


def test_rows_are_as_wide_as_the_terminal(tmp_path: Path) -> None:
    drawn = chart(tmp_path, CLAMP)
    for width in (60, 80, 150):
        rows = [line.text for line in chart_lines(drawn, "utf-8", width) if line.text.startswith("B1 ")]
        assert len(rows) == 1 and width - 3 <= cell_len(rows[0]) <= width


def test_a_row_is_on_where_the_chart_is(tmp_path: Path) -> None:
    """The coil is on from 10.75 ms to the end of the step; sure in between."""
    (row,) = (line.text for line in chart_lines(chart(tmp_path, CLAMP)) if line.text.startswith("Y1"))
    assert set(row[6:]) <= {FULL.on, FULL.perhaps_on, FULL.off, FULL.perhaps_off, FULL.path, " "}
    first, last = row.index(FULL.on), row.rindex(FULL.on)
    assert set(row[first : last + 1]) == {FULL.on}
    assert FULL.off not in row[first:last]


def test_ascii_when_asked_for(tmp_path: Path) -> None:
    lines = chart_lines(chart(tmp_path, MIXED), "utf-8", 80, ascii_only=True)
    assert all(line.text.isascii() for line in lines)
    assert any(ASCII.on * 4 in line.text for line in lines)


def test_hostile_names_are_plain_in_every_encoding(tmp_path: Path) -> None:
    text = HOSTILE.replace("'one'", "\x1b[31m \u202e")
    for encoding in ("utf-8", "ascii"):
        shown = page(tmp_path, text, encoding)
        shown.encode(encoding)
        assert "\x1b" not in shown and "\u202e" not in shown


def test_findings_are_marked_and_told(tmp_path: Path) -> None:
    text = (Path(__file__).parents[2] / "examples" / "faulty" / "short_pulse.steps").read_text("utf-8")
    shown = page(tmp_path, text)
    assert "^1" in shown and "1 error (possible) short-pulse of VS" in shown and "4.5 ms" in shown
    run = "\n".join(line.text for line in chart_lines(chart_of_finding(tmp_path, text, 1)))
    assert "the run that shows finding 1" in run and "^1" in run and FULL.perhaps_on not in run


def test_open_times_are_marked(tmp_path: Path) -> None:
    shown = page(tmp_path, QUESTION)
    assert f"open {FULL.open}" in shown and shown.count(FULL.open) > 1


def test_a_part_of_no_length(tmp_path: Path) -> None:
    text = (Path(__file__).parents[2] / "examples" / "faulty" / "endless_loop.steps").read_text("utf-8")
    assert "No time passes" in page(tmp_path, text)


def test_many_cycles_in_one_line(tmp_path: Path) -> None:
    lines = chart_lines(chart(tmp_path, CLAMP, Part(cycles=20)))
    assert any(line.text.startswith("main") for line in lines)
