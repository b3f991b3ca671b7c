"""The HTML report in a real browser: quiet, asking for nothing, and whole on paper.

Skipped where the system has no Chromium; ``.ci/run`` installs one. The PDF is read back by PDFium.
"""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

import pypdfium2
import pytest
from lxml import etree

from seqcheck.chart.wording import SAFETY
from tests.chart.page_browser import Opened, Tab, browser_found, open_browser
from tests.chart.page_samples import HOSTILE, IMPRINT, LARGE, TWO_MOVES, Sample, example, sample

PROGRAM = browser_found()
pytestmark = [
    pytest.mark.slow,
    pytest.mark.skipif(PROGRAM is None, reason="no browser: install chromium to test the HTML report on paper"),
]

#: Width and height of the sheet as it stands upright, in millimetres (ISO 216).
PAPER = {"A4": (210, 297), "A3": (297, 420)}
POINTS_PER_MM = 72 / 25.4
XHTML = "{http://www.w3.org/1999/xhtml}"
#: Margins of the page as the style sheet sets them, in millimetres: left and right, above, below.
SIDES, ABOVE, BELOW = 10, 14, 13
SLACK = 1.0
#: Sizes of type: 0.9 of 9.5 points on A4 and of 11 points on A3 (the style sheet), against 8 points.
ENLARGED = {"A4": 0.9 * 9.5 / 8, "A3": 0.9 * 11 / 8}

WIDE_NAME = "W" * 190
TEXTS = {
    "two moves": (TWO_MOVES, "two_moves.steps"),
    "thirty cylinders": (LARGE, "large.steps"),
    "hostile": (HOSTILE, "a&b <c> 'd' ]]>.steps"),
    "long names": (TWO_MOVES.replace("gate up", WIDE_NAME).replace("push it", WIDE_NAME), f"{'x' * 120}.steps"),
}
EXAMPLES = (
    "crate_stapler.steps",
    "rinse_skid.steps",
    "tile_press.steps",
    "faulty/coil_handover.steps",
    "faulty/stale_signal.steps",
)


Box = tuple[float, float, float, float]


@dataclass(frozen=True)
class Sheet:
    """A page of a PDF: its size, what stands on it, and the boxes (left, bottom, right, top) of all pieces of text; in
    points, from the corner at the left and below."""

    width: float
    height: float
    text: str
    boxes: tuple[Box, ...]


@dataclass(frozen=True)
class Printed:
    """One report with what the browser made of it. ``enlarged``: the letters of the safety sentence against those of
    the page number, which a browser never makes smaller."""

    shown: Sample
    document: etree._Element
    opened: Opened
    paper: str
    sheets: tuple[Sheet, ...]
    enlarged: float


@pytest.fixture(scope="module")
def tab(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Tab]:
    assert PROGRAM is not None
    with open_browser(PROGRAM, tmp_path_factory.mktemp("browser")) as opened:
        yield opened


@pytest.fixture(scope="module", params=[f"{case}, {paper}" for case in (*TEXTS, *EXAMPLES) for paper in PAPER])
def printed(request: pytest.FixtureRequest, tab: Tab, tmp_path_factory: pytest.TempPathFactory) -> Printed:
    case, _, paper = str(request.param).rpartition(", ")
    shown = sample(*TEXTS[case]) if case in TEXTS else example(case)
    file = tmp_path_factory.mktemp("page") / "report.html"
    file.write_text(shown.page(), "utf-8")
    opened = tab.open(file)
    pdf = tab.pdf(*PAPER[paper])
    return Printed(shown, etree.fromstring(file.read_bytes()), opened, paper, sheets_of(pdf), enlarged(pdf))


def sheets_of(pdf: bytes) -> tuple[Sheet, ...]:
    with pypdfium2.PdfDocument(pdf) as document:
        return tuple(_sheet(page) for page in document)


def _sheet(page: pypdfium2.PdfPage) -> Sheet:
    text = page.get_textpage()
    boxes = tuple(text.get_rect(number) for number in range(text.count_rects()))
    return Sheet(*page.get_size(), text.get_text_range(), boxes)


def enlarged(pdf: bytes) -> float:
    with pypdfium2.PdfDocument(pdf) as document:
        text = document[0].get_textpage()
        told = text.get_text_range()
        sizes = [text.get_charbox(told.index(words), loose=True) for words in (SAFETY[:13], "page 1 of")]
        body, number = (top - bottom for _, bottom, _, top in sizes)
        return body / number


def test_the_browser_has_nothing_to_complain_of_and_fetches_nothing(printed: Printed) -> None:
    assert printed.opened.complaints == []
    (only,) = printed.opened.requests
    assert only.startswith("file://") and only.endswith("/report.html")


def test_the_paper_is_that_of_the_printer_on_its_side(printed: Printed) -> None:
    height, width = PAPER[printed.paper]
    for sheet in printed.sheets:
        assert round(sheet.width / POINTS_PER_MM) == width
        assert round(sheet.height / POINTS_PER_MM) == height


def test_every_page_has_its_number_the_date_and_the_revision(printed: Printed) -> None:
    """And the file, of which a long name may be broken: its first letters."""
    count = len(printed.sheets)
    file = printed.shown.report.file[:3]
    for number, sheet in enumerate(printed.sheets, 1):
        told = _squeezed(sheet.text)
        assert f"page{number}of{count}" in told
        assert f"revision{IMPRINT.revision}" in told
        assert str(IMPRINT.date) in told
        assert _squeezed(file) in told


def test_nothing_runs_over_the_edge_and_no_line_is_cut_through(printed: Printed) -> None:
    """All text lies between the margins, but for what stands on every page, which lies in those above and below."""
    assert [outside for sheet in printed.sheets for outside in _outside(sheet)] == []


def test_nothing_is_so_wide_that_the_browser_makes_everything_smaller(printed: Printed) -> None:
    assert printed.enlarged == pytest.approx(ENLARGED[printed.paper], rel=0.01)


def test_every_row_of_every_table_is_on_paper(printed: Printed) -> None:
    """The whole PDF holds what the cells hold, figures as often as they do."""
    told = _squeezed("".join(sheet.text for sheet in printed.sheets))
    written = [_squeezed(part) for cell in printed.document.iter(f"{XHTML}td") for part in cell.itertext()]
    # Letters from the right come out of a PDF in the order of their places, and so do signs beside them.
    one_way = all(map(_reads_one_way, written))
    read = [part for part in set(written) if one_way or (part.isascii() and part.isalnum())]
    assert read
    assert [part for part in read if part not in told] == []
    figures = {part for part in written if re.fullmatch(r"\d+\.\d+", part)}
    assert all(told.count(figure) >= written.count(figure) for figure in figures)


def test_every_chart_page_names_its_rows(printed: Printed) -> None:
    """Each sheet of the chart is on one page, with the names of its rows and of its sequence."""
    pages = [sheet.text for sheet in printed.sheets if re.search(r"sheet ?\d+ ?of ?\d+", sheet.text)]
    (first,) = (text for text in pages if re.search(r"sheet ?1 ?of ?\d+", text))
    assert "Timing chart" in first
    figures = list(printed.document.iter(f"{XHTML}figure"))
    assert len(pages) == len(figures)
    for page, figure in zip(pages, figures, strict=True):
        names = {str(group.get("data-row")) for group in figure.iter("{*}g") if group.get("data-row")}
        assert names
        assert all(_squeezed(name) in _squeezed(page) for name in names if _reads_one_way(name))
        caption = figure.find(f"{XHTML}figcaption")
        assert caption is not None
        assert _squeezed("".join(caption[-1].itertext())) in _squeezed(page)


def test_the_head_of_a_table_is_on_every_page_that_it_goes_on_to(tab: Tab, tmp_path: Path) -> None:
    file = tmp_path / "report.html"
    file.write_text(sample(LARGE).page(), "utf-8")
    tab.open(file)
    pages = [sheet.text for sheet in sheets_of(tab.pdf(*PAPER["A4"]))]
    filled = [text for text in pages if re.search(r"main\.s\d+\s+(clamp|lift)\d+\s+(out|in)", text)]
    assert len(filled) > 1
    assert all("measured" in text and "initials" in text for text in filled)


def test_a_page_that_asks_and_complains_is_found_out(tab: Tab, tmp_path: Path) -> None:
    file = tmp_path / "bad.html"
    file.write_text("<img src='file:///nowhere/picture.png'><script>console.log('x')</script>", "utf-8")
    opened = tab.open(file)
    assert len(opened.requests) == 2
    assert opened.complaints


@pytest.mark.parametrize(
    ("more", "fits"),
    [
        ("<div style='width: 500mm'>x</div>", False),
        (f"<div>{WIDE_NAME}</div>", False),
        ("<div style='position: absolute; top: -4mm'>over the edge</div>", False),
        ("<div style='height: 150vh'>x</div>", True),
    ],
)
def test_a_page_that_does_not_fit_is_found_out(more: str, fits: bool, tab: Tab, tmp_path: Path) -> None:
    """Too wide, or over the edge; a mere page more is not taken for a fault."""
    file = tmp_path / "bad.html"
    file.write_text(sample(TWO_MOVES).page().replace("</header>", f"{more}</header>"), "utf-8")
    tab.open(file)
    pdf = tab.pdf(*PAPER["A4"])
    outside = [one for sheet in sheets_of(pdf) for one in _outside(sheet)]
    assert fits == (not outside and enlarged(pdf) == pytest.approx(ENLARGED["A4"], rel=0.01))


def _outside(sheet: Sheet) -> Iterator[Box]:
    left, right = SIDES * POINTS_PER_MM - SLACK, sheet.width - SIDES * POINTS_PER_MM + SLACK
    lowest, highest = BELOW * POINTS_PER_MM - SLACK, sheet.height - ABOVE * POINTS_PER_MM + SLACK
    for box in sheet.boxes:
        x0, bottom, x1, top = box
        between = lowest <= bottom and top <= highest
        in_the_margin = bottom >= highest - SLACK or top <= lowest + SLACK
        on_the_paper = bottom >= 0 and top <= sheet.height
        if x0 < left or x1 > right or not on_the_paper or not (between or in_the_margin):
            yield box


def _squeezed(text: str) -> str:
    """Without blanks, for where a line is broken is the browser's own business; ligatures taken apart. A hyphen at the
    end of a line (of ``clamp-``, say) comes out of PDFium as U+FFFE."""
    return re.sub(r"\s+", "", unicodedata.normalize("NFKC", text).replace("\ufffe", "-"))


def _reads_one_way(text: str) -> bool:
    return not any("\u0590" <= letter <= "\u08ff" for letter in text)
