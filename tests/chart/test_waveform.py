"""The waveform: strict rules of our own (IEEE 1364-2005, clause 18; both readers are lenient), then read back by pyvcd
and by vcdvcd, two readers from outside, at random times."""

from __future__ import annotations

import io
import random
import re
from bisect import bisect_right
from collections.abc import Iterator
from pathlib import Path

import pytest
from vcd.reader import TokenKind, tokenize
from vcdvcd import VCDVCD

from seqcheck.chart.asked import Part
from seqcheck.chart.model import HIGH, LOW, MIDDLE, Chart, Row, RowKind
from seqcheck.chart.waveform import vcd
from tests.bench.stations import in_a_row
from tests.chart.charts import HOSTILE, MIXED, TEXTS, all_edges, chart, chart_of_finding

_DECLARED = re.compile(r"\$var (wire|real) ([0-9]+) ([!-~]+) ([!-~]+)( \[1:0\])? \$end")


def strictly_valid(text: str) -> dict[str, str]:
    """The codes of all variables with their names; asserts what the standard demands."""
    assert text.isascii()
    head, _, body = text.partition("$enddefinitions $end\n")
    assert body and re.search(r"^\$timescale (1|10|100) (s|ms|us|ns|ps|fs) \$end$", head, re.M)
    names: dict[str, str] = {}
    depth = 0
    for line in head.splitlines():
        if line.startswith("$scope"):
            depth += 1
            assert re.fullmatch(r"\$scope module [A-Za-z_]\w* \$end", line)
        elif line.startswith("$upscope"):
            depth -= 1
        elif line.startswith("$var"):
            declared = _DECLARED.fullmatch(line)
            assert declared and depth == 1, line
            assert declared[3] not in names
            names[declared[3]] = declared[4]
        else:
            assert re.fullmatch(r"\$(version|comment|timescale) [^$]+ \$end", line), line
    assert depth == 0
    _check_changes(body.splitlines(), set(names))
    return names


def _check_changes(lines: list[str], codes: set[str]) -> None:
    assert lines[:2] == ["#0", "$dumpvars"]
    end = lines.index("$end")
    assert {_code(line) for line in lines[2:end]} == codes and end - 2 == len(codes)
    last = 0
    for line in lines[end + 1 :]:
        if line.startswith("#"):
            assert line[1:].isdecimal() and int(line[1:]) > last
            last = int(line[1:])
        else:
            assert _code(line) in codes


def _code(line: str) -> str:
    change = re.fullmatch(r"[01x]([!-~]+)|b[01x]+ ([!-~]+)|r-?[0-9]+(?:\.[0-9]+)? ([!-~]+)", line)
    assert change, line
    return next(code for code in change.groups() if code)


def by_pyvcd(text: str) -> dict[str, list[tuple[int, str]]]:
    codes: dict[str, str] = {}
    found: dict[str, list[tuple[int, str]]] = {}
    time = 0
    for token in tokenize(io.BytesIO(text.encode())):
        if token.kind is TokenKind.VAR:
            codes[token.var.id_code] = token.var.reference
            found[token.var.reference] = []
        elif token.kind is TokenKind.CHANGE_TIME:
            time = token.time_change
        elif token.kind is TokenKind.CHANGE_SCALAR:
            found[codes[token.scalar_change.id_code]].append((time, token.scalar_change.value))
        elif token.kind is TokenKind.CHANGE_VECTOR:
            value = token.vector_change.value
            written = f"{value:02b}" if isinstance(value, int) else value
            found[codes[token.vector_change.id_code]].append((time, written))
        elif token.kind is TokenKind.CHANGE_REAL:
            found[codes[token.real_change.id_code]].append((time, str(token.real_change.value)))
    return found


def by_vcdvcd(file: Path) -> dict[str, list[tuple[int, str]]]:
    read = VCDVCD(str(file))
    return {name.partition(".")[2].partition("[")[0]: list(read[name].tv) for name in read.signals}


def value_at(changes: list[tuple[int, str]], time: int) -> str:
    return changes[bisect_right([at for at, _ in changes], time) - 1][1]


def wanted_at(chart: Chart, time: int) -> Iterator[tuple[str, str | float]]:
    """From the records of the chart, by name."""
    for row in chart.rows:
        if row.kind is RowKind.STEPS:
            for band in row.bands:
                begin = chart.begin_us if band.begin is None else band.begin.typical_us
                end = chart.end_us + 1 if band.end is None else band.end.typical_us
                if begin <= time < end:
                    yield band.step, "1"
        else:
            yield row.name, _device_at(row, time)


def _device_at(row: Row, time: int) -> str | float:
    past = [edge for edge in row.edges if edge.typical_us <= time]
    level = past[-1].level if past else row.begin_level
    if row.kind is RowKind.CYLINDER:
        return level / 10_000
    if row.kind is not RowKind.VALVE:
        return "1" if level else "0"
    later = row.edges[len(past)].level if len(past) < len(row.edges) else row.end_level
    if past and later != level:
        return "xx"
    return {HIGH: "10", MIDDLE: "01", LOW: "00"}.get(level, "xx")


@pytest.mark.parametrize("name", sorted(TEXTS))
def test_both_readers_give_the_values_of_the_chart(tmp_path: Path, name: str) -> None:
    drawn = chart(tmp_path, TEXTS[name], Part(cycles=2) if name == "mixed" else None)
    text = vcd(drawn)
    names = strictly_valid(text)
    file = tmp_path / "run.vcd"
    file.write_text(text, "ascii", newline="")
    draw = random.Random(7)
    changes = [
        edge.typical_us + late for _, edge in all_edges(drawn) for late in (-1, 0) if edge.typical_us > drawn.begin_us
    ]
    times = [draw.randrange(drawn.begin_us, drawn.end_us) for _ in range(200)] + changes
    for read in (by_pyvcd(text), by_vcdvcd(file)):
        assert set(read) == set(names.values())
        for time in times:
            wanted = {spelled(one): value for one, value in wanted_at(drawn, time)}
            for one, changes in read.items():
                value = value_at(changes, time - drawn.begin_us)
                expected = wanted.get(one, "0")
                if isinstance(expected, float):
                    assert float(value) == pytest.approx(expected, abs=1e-6)
                else:
                    assert value == expected or int_or_none(value) == int_or_none(expected) is not None, (one, time)


def int_or_none(value: str) -> int | None:
    """vcdvcd keeps a vector as it is written, pyvcd gives its number."""
    return int(value, 2) if set(value) <= {"0", "1"} else None


def spelled(name: str) -> str:
    return "".join(one if one.isascii() else f"_u{ord(one):04x}_" for one in name)


def test_hostile_names_do_not_end_a_declaration(tmp_path: Path) -> None:
    names = strictly_valid(vcd(chart(tmp_path, HOSTILE)))
    assert spelled("סליל") in names.values()


def test_many_variables_have_codes_of_their_own(tmp_path: Path) -> None:
    text = 'machine "Fifteen stations"\n' + in_a_row(60, 15)
    names = strictly_valid(vcd(chart(tmp_path, text)))
    assert len(names) > 150 and max(map(len, names)) == 2


def test_the_run_of_a_finding(tmp_path: Path) -> None:
    """In it the coil goes off before the valve is there: the valve is never anything but b or on its way."""
    text = (Path(__file__).parents[2] / "examples" / "faulty" / "short_pulse.steps").read_text("utf-8")
    read = by_pyvcd(vcd(chart_of_finding(tmp_path, text, 1)))
    assert {value for _, value in read["VS"]} == {"00", "xx"}
    (on, off) = (time for time, _ in read["YS1"][1:3])
    assert [time for time, _ in read["VS"]] == [0, on, off]


def test_the_same_chart_gives_the_same_bytes(tmp_path: Path) -> None:
    assert vcd(chart(tmp_path, MIXED)) == vcd(chart(tmp_path, MIXED))
