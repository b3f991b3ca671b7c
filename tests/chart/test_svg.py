"""The picture, read back: geometry with svgelements (general-purpose SVG reader), structure and text with lxml."""

from __future__ import annotations

import io
from dataclasses import replace
from itertools import pairwise
from pathlib import Path

import pytest
from lxml import etree
from svgelements import SVG, Rect

from seqcheck.arguments import SAFETY
from seqcheck.chart.asked import Part
from seqcheck.chart.canvas import Canvas, escaped, fitted, text_width
from seqcheck.chart.model import Chart, Edge, RowKind
from seqcheck.chart.svg import svg
from seqcheck.chart.svg_rows import cut
from seqcheck.chart.view import View, views_side_by_side, whole_time, whole_view
from seqcheck.chart.wording import span_in_words, told
from tests.bench.stations import in_a_row
from tests.chart.charts import (
    CLAMP,
    EXAMPLES,
    HOSTILE,
    MIXED,
    PROCESS,
    QUESTION,
    SORTER,
    SORTING,
    TEXTS,
    all_edges,
    band_edges,
    chart,
    chart_of_finding,
    edges_of,
)

NAMESPACE = {"s": "http://www.w3.org/2000/svg"}
ELEMENTS = {"svg", "title", "g", "line", "rect", "circle", "polyline", "polygon", "text"}


def parsed(picture: str) -> etree._Element:
    return etree.fromstring(picture.encode("utf-8"))


def edge_groups(root: etree._Element) -> list[etree._Element]:
    return list(root.xpath(".//s:g[@data-typical]", namespaces=NAMESPACE))


def written_times(group: etree._Element) -> tuple[str, ...]:
    return tuple(group.get(f"data-{name}") for name in ("earliest", "typical", "latest"))


def expected_times(edge: Edge) -> tuple[str, ...]:
    return tuple("open" if time is None else str(time) for time in (edge.earliest_us, edge.typical_us, edge.latest_us))


@pytest.mark.parametrize("name", sorted(TEXTS))
def test_spans_in_the_picture_are_the_bounds(tmp_path: Path, name: str) -> None:
    """The first rectangle of each edge, from pixels back to microseconds, by a reader that knows nothing of us."""
    drawn = chart(tmp_path, TEXTS[name])
    picture = svg(drawn)
    root = parsed(picture)
    left, right, begin, end = (float(root.get(f"data-{one}")) for one in ("left", "right", "begin", "end"))
    scale = (end - begin) / (right - left)
    spans: dict[str, list[tuple[int, int]]] = {}
    for group in SVG.parse(io.BytesIO(picture.encode("utf-8"))).select(lambda one: "data-typical" in one.values):
        box = next((one for one in group.select() if isinstance(one, Rect)), None) if hasattr(group, "select") else None
        if box is not None:
            first, last = (round(begin + (x - left) * scale) for x in (box.x, box.x + box.width))
            spans.setdefault(str(group.values["data-typical"]), []).append((first, last))
    wanted = [(str(edge.typical_us), (edge.drawn_from_us, edge.drawn_to_us)) for _, edge in all_edges(drawn)]
    assert wanted and all(span in spans[typical] for typical, span in wanted if span[0] != span[1])
    assert {written_times(one) for one in edge_groups(root)} == {expected_times(edge) for _, edge in all_edges(drawn)}


@pytest.mark.parametrize("name", sorted(TEXTS))
def test_every_edge_has_a_title_with_its_times(tmp_path: Path, name: str) -> None:
    drawn = chart(tmp_path, TEXTS[name])
    root = parsed(svg(drawn))
    for row in drawn.rows:
        groups = edge_groups(next(one for one in root.iter("{*}g") if one.get("data-row") == row.name))
        titles = [group.findtext("s:title", namespaces=NAMESPACE) for group in groups]
        if row.kind is RowKind.STEPS:
            assert {title.rpartition(": ")[2] for title in titles} == {span_in_words(edge) for edge in edges_of(row)}
            assert set(titles) <= {escaped_back(told(edge)) for edge in band_edges(row)}
        else:
            assert titles == [escaped_back(told(edge)) for edge in row.edges]


def escaped_back(text: str) -> str:
    """What a reader of XML gets of it: turning marks are replaced."""
    return str(etree.fromstring(f"<t>{escaped(text)}</t>").text)


@pytest.mark.parametrize("name", sorted(TEXTS))
def test_lines_run_through_typical_times(tmp_path: Path, name: str) -> None:
    """Each row's line has a knot at the typical time of each of its edges, at its level."""
    drawn = chart(tmp_path, TEXTS[name])
    root = parsed(svg(drawn))
    left, right, begin, end = (float(root.get(f"data-{one}")) for one in ("left", "right", "begin", "end"))
    knots = {
        round(float(point.split(",")[0]), 3)
        for line in root.iterfind("s:polyline", NAMESPACE)
        for point in line.get("points").split()
    }
    for row in drawn.rows:
        for edge in row.edges:
            x = left + (edge.typical_us - begin) * (right - left) / (end - begin)
            assert any(abs(x - knot) < 0.01 for knot in knots), (row.name, edge)


def test_hostile_names_come_out_as_text(tmp_path: Path) -> None:
    drawn = chart(tmp_path, HOSTILE)
    picture = svg(drawn)
    root = parsed(picture)
    assert {etree.QName(one).localname for one in root.iter()} <= ELEMENTS
    texts = [one.text or "" for one in root.iter("{*}text")]
    for name in ("סליל", "שסתום", "גליל", "חיישן1", "סדרה"):
        assert name in texts
    assert any(text.startswith("<b>&amp; ]]> </svg></title><script>alert(1)") for text in texts)
    titles = [one.text for one in root.iter("{*}title")]
    assert "coil סליל, %Q0.0 ]]> & 'one' </svg> $end" in titles
    assert "]]>" not in picture and "<script" not in picture
    assert not [one for one in root.iter() if any("href" in name or name.startswith("on") for name in one.attrib)]


def test_characters_that_xml_cannot_carry(tmp_path: Path) -> None:
    canvas = Canvas()
    canvas.text(1, 2, "a\x00b\x1f\u202ec\ufffe<&\"'\n", 10)
    (text,) = parsed(f"<svg>{canvas.render()}</svg>")
    assert text.text == "a\ufffdb\ufffd\ufffdc\ufffd<&\"' "


def test_it_stands_alone(tmp_path: Path) -> None:
    root = parsed(svg(chart(tmp_path, MIXED)))
    assert root.get("viewBox") == f"0 0 {root.get('width')} {root.get('height')}"
    assert root.get("role") == "img" and root.get("aria-label") == root.findtext("{*}title")
    assert not [one for one in root.iter() if one.get("id") or one.get("href") or "url(" in (one.get("fill") or "")]


def test_the_safety_sentence_is_that_of_the_help(tmp_path: Path) -> None:
    words = " ".join(one.text or "" for one in parsed(svg(chart(tmp_path, MIXED))).iter("{*}text"))
    assert SAFETY in words


@pytest.mark.parametrize("file", EXAMPLES, ids=lambda file: file.stem)
def test_nothing_reaches_beyond_the_picture(tmp_path: Path, file: Path) -> None:
    for sheet in file.parent.glob("*.yaml"):
        (tmp_path / sheet.name).write_bytes(sheet.read_bytes())
    root = parsed(svg(chart(tmp_path, file.read_text("utf-8"))))
    width, height = float(root.get("width")), float(root.get("height"))
    for one in root.iter("{*}text"):
        x, y, size = (float(one.get(name)) for name in ("x", "y", "font-size"))
        long = text_width(one.text or "", size) * {"middle": 0.5, "end": 1}.get(one.get("text-anchor", ""), 0)
        begin = x - long
        assert begin >= 0 and 0 < y <= height, (one.text, x, y)
        if one.get("transform") is None:
            assert begin + text_width(one.text or "", size) <= width, one.text
    for one in root.iter("{*}line", "{*}rect"):
        for name in ("x", "x1", "x2"):
            assert 0 <= float(one.get(name, "0")) <= width
        for name in ("y", "y1", "y2"):
            assert 0 <= float(one.get(name, "0")) <= height


def test_no_type_is_smaller_than_eleven_pixels(tmp_path: Path) -> None:
    for text in TEXTS.values():
        assert min(float(one.get("font-size")) for one in parsed(svg(chart(tmp_path, text))).iter("{*}text")) >= 11


def test_an_open_time_is_an_arrow_with_the_word(tmp_path: Path) -> None:
    drawn = chart(tmp_path, QUESTION)
    root = parsed(svg(drawn))
    for group in edge_groups(root):
        is_open = "open" in written_times(group)
        assert bool(group.findall("s:polyline", NAMESPACE)) == is_open
    assert [one.text for one in root.iter("{*}text")].count("open") >= 3


def test_marks_carry_the_number_text_and_margin(tmp_path: Path) -> None:
    drawn = chart(tmp_path, HOSTILE)
    root = parsed(svg(drawn))
    found = {one.get("data-finding"): one.findtext("s:title", namespaces=NAMESPACE) for one in root.iter("{*}g")}
    shown = {str(mark.number) for mark in drawn.marks if mark.time_us is not None}
    assert shown and set(found) - {None} == shown
    assert "short-pulse" in found["3"] and "broken by 12.5 ms" in found["3"]
    captions = " ".join(one.text or "" for one in root.iter("{*}text"))
    for mark in drawn.marks:
        assert mark.finding.message[:20] in captions


def test_the_path_goes_from_event_to_event(tmp_path: Path) -> None:
    drawn = chart(tmp_path, MIXED)
    (path,) = parsed(svg(drawn)).xpath("//s:g[@data-path]", namespaces=NAMESPACE)
    assert len(path.findall("s:g", NAMESPACE)) == len(drawn.path)
    ends = [line.get("points").split() for line in path.findall("s:polyline", NAMESPACE)]
    assert len(ends) == len(drawn.path) - 1
    for before, after in pairwise(ends):
        assert abs(float(before[-1].split(",")[0]) - float(after[0].split(",")[0])) < 0.01


def test_a_run_has_no_shading(tmp_path: Path) -> None:
    text = (Path(__file__).parents[2] / "examples" / "faulty" / "short_pulse.steps").read_text("utf-8")
    picture = svg(chart_of_finding(tmp_path, text, 1))
    assert "earliest to the latest" not in picture
    for group in edge_groups(parsed(picture)):
        assert all(float(one.get("width")) == 0 for one in group.findall("s:rect", NAMESPACE))


@pytest.fixture(scope="module")
def long_chart(tmp_path_factory: pytest.TempPathFactory) -> Chart:
    """30 cylinders, 60 steps."""
    return chart(tmp_path_factory.mktemp("long"), 'machine "Fifteen stations"\n' + in_a_row(60, 15))


def test_views_side_by_side_cover_the_whole_chart(long_chart: Chart) -> None:
    views = views_side_by_side(long_chart, 1060)
    assert len(views) > 2
    assert (views[0].begin_us, views[-1].end_us) == whole_time(long_chart)
    assert all(one.end_us == other.begin_us for one, other in pairwise(views))
    for view in views:
        root = parsed(svg(long_chart, replace(view, captions=False)))
        assert root.get("width") == "1060"
        names = {one.get("data-row") for one in root.iter("{*}g")}
        assert {row.name for row in long_chart.rows} <= names


def test_a_view_may_leave_out_rows_but_not_the_steps(long_chart: Chart) -> None:
    view = replace(whole_view(long_chart), rows=(4, 5, 9), captions=False)
    root = parsed(svg(long_chart, view))
    names = [one.get("data-row") for one in root.iter("{*}g") if one.get("data-row")]
    assert sorted(names) == sorted(["main", *(long_chart.rows[index].name for index in (4, 5, 9))])
    assert float(root.get("height")) < 400


def test_an_edge_is_seen_in_every_view_that_its_span_reaches(long_chart: Chart) -> None:
    seen: set[tuple[str, ...]] = set()
    for view in views_side_by_side(long_chart, 1060):
        groups = edge_groups(parsed(svg(long_chart, view)))
        seen |= {written_times(group) for group in groups}
        wanted = {
            expected_times(edge)
            for _, edge in all_edges(long_chart)
            if edge.drawn_from_us <= view.end_us and edge.drawn_to_us >= view.begin_us
        }
        assert {written_times(group) for group in groups} == wanted
    assert seen == {expected_times(edge) for _, edge in all_edges(long_chart)}


def test_the_same_chart_gives_the_same_bytes(tmp_path: Path) -> None:
    assert svg(chart(tmp_path, MIXED)) == svg(chart(tmp_path, MIXED))
    one = chart(tmp_path, MIXED, Part(cycles=2))
    assert svg(one, whole_view(one)) == svg(one)


def test_a_part_of_no_length_can_be_drawn(tmp_path: Path) -> None:
    drawn = chart(
        tmp_path, (Path(__file__).parents[2] / "examples" / "faulty" / "endless_loop.steps").read_text("utf-8")
    )
    assert drawn.begin_us == drawn.end_us
    assert "No time passes" in svg(drawn)
    assert parsed(svg(drawn, View(0, 0))) is not None


@pytest.mark.parametrize(
    ("way", "right", "left"),
    [
        ([(0.0, 0.0), (10.0, 10.0)], [(4.0, 4.0), (10.0, 10.0)], [(0.0, 0.0), (4.0, 4.0)]),
        ([(5.0, 1.0), (6.0, 2.0)], [(5.0, 1.0), (6.0, 2.0)], []),
        ([(4.0, 1.0), (4.0, 2.0)], [(4.0, 1.0), (4.0, 2.0)], [(4.0, 1.0), (4.0, 2.0)]),
    ],
)
def test_ways_are_cut_at_a_border(
    way: list[tuple[float, float]], right: list[tuple[float, float]], left: list[tuple[float, float]]
) -> None:
    assert cut(way, 4.0, 1) == right
    assert cut(way, 4.0, -1) == left


def test_text_is_fitted() -> None:
    assert fitted("clamp", 100, 12) == "clamp"
    shorter = fitted("a very long name of a device", 60, 12)
    assert shorter.endswith("…") and text_width(shorter, 12) <= 60
    assert fitted("anything", 1, 12) == ""
    assert text_width("漢字", 10) == 20


def test_a_choice_is_a_lozenge_with_its_branch(tmp_path: Path) -> None:
    drawn = chart(tmp_path, SORTER, Part(choices=("rest=2", "rest=1")))
    root = parsed(svg(drawn))
    signs = [one for one in root.iter("{*}g") if one.get("data-choice")]
    assert [one.findtext("s:text", namespaces=NAMESPACE) for one in signs] == ["2", "1"]
    assert [one.get("data-typical") for one in signs] == ["120000", "270000"]
    assert all(one.get("data-choice") == str(SORTING) for one in signs)
    titles = [one.findtext("s:title", namespaces=NAMESPACE) for one in signs]
    assert titles[0] == "choice in line 10: otherwise (branch 2 of 2): always 120 ms"
    assert "choice, with its branch" in "".join(root.itertext())
    assert "choice, with its branch" not in "".join(parsed(svg(chart(tmp_path, CLAMP))).itertext())


def test_the_ends_of_valves_and_pistons_are_named(tmp_path: Path) -> None:
    root = parsed(svg(chart(tmp_path, PROCESS)))
    words = [one.text for one in root.iter("{*}text")]
    assert [words.count(word) for word in ("open", "closed", "a", "b", "in", "out", "centre")] == [2, 2, 2, 2, 1, 2, 0]
    assert [one.text for one in parsed(svg(chart(tmp_path, MIXED))).iter("{*}text")].count("centre") == 1


def test_the_sign_of_a_finding_leaves_that_of_a_choice_clear(tmp_path: Path) -> None:
    drawn = chart(tmp_path, next(file for file in EXAMPLES if file.stem == "choice_race").read_text("utf-8"))
    root = parsed(svg(drawn))
    (finding,) = (one for one in root.iter("{*}g") if one.get("data-finding"))
    (choice,) = (one for one in root.iter("{*}g") if one.get("data-choice"))
    circle = finding.find("s:circle", namespaces=NAMESPACE)
    polygon = choice.find("s:polygon", namespaces=NAMESPACE)
    assert circle is not None and polygon is not None
    below = float(circle.get("cy")) + float(circle.get("r"))
    assert below <= min(float(point.split(",")[1]) for point in polygon.get("points").split())
