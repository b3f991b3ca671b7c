"""The HTML report as a document: what is in it, and that text from outside is nothing but text.

Read back by lxml, both as XML (strict) and as HTML.
"""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest
from lxml import etree, html

from seqcheck.arguments import SAFETY as SAFETY_OF_HELP
from seqcheck.chart.page_imprint import Imprint
from seqcheck.chart.page_sheets import at_rest
from seqcheck.chart.view import View
from seqcheck.chart.wording import SAFETY
from seqcheck.machine.findings import Report
from seqcheck.machine.model import steps_of
from seqcheck.report.plain import plain
from tests.chart.charts import PROCESS
from tests.chart.page_samples import EXAMPLES, HOSTILE, IMPRINT, LARGE, TWO_MOVES, Sample, example, sample

XHTML = "{http://www.w3.org/1999/xhtml}"
SVG = "{http://www.w3.org/2000/svg}"


def read(page: str) -> etree._Element:
    """Strictly, as XML: every text has one reading only."""
    return etree.fromstring(page.encode("utf-8"), etree.XMLParser(resolve_entities=False, no_network=True))


def words(element: etree._Element) -> str:
    return " ".join("".join(element.itertext()).split())


def section(page: etree._Element, key: str) -> etree._Element:
    (found,) = page.iterfind(f".//{XHTML}section[@id='{key}']")
    return found


def header(page: etree._Element) -> etree._Element:
    (found,) = page.iterfind(f".//{XHTML}header")
    return found


def rows(page: etree._Element, key: str) -> list[list[str]]:
    """The cells of the first table of a section, its head left out."""
    table = section(page, key).find(f".//{XHTML}table")
    assert table is not None
    return [[words(cell) for cell in row] for row in table.iterfind(f"{XHTML}tbody/{XHTML}tr")]


@pytest.mark.parametrize("name", EXAMPLES)
def test_every_example_has_its_report(name: str) -> None:
    shown = example(name)
    page = read(shown.page())
    told = words(page)
    for finding in shown.report.findings:
        assert plain(finding.message) in told
    for moment in (moment for finding in shown.report.findings for moment in finding.run):
        assert plain(moment.event) in told
    assert shown.machine is not None
    devices = {row[0] for row in rows(page, "devices")}
    for group in (shown.machine.valves, shown.machine.coils, shown.machine.cylinders, shown.machine.sensors):
        assert set(group) <= devices
    for assumption in shown.report.assumptions:
        assert assumption in words(header(page))
    assert len(rows(page, "margins")) == len(shown.report.margins) if shown.report.margins else True


def test_the_safety_sentence_stands_in_front_and_is_that_of_the_help() -> None:
    page = read(sample(TWO_MOVES).page())
    assert SAFETY in words(header(page))
    assert SAFETY == SAFETY_OF_HELP


def test_the_commissioning_table_has_the_figures_the_watchdog_the_sensor_and_room_to_write() -> None:
    """The figures are worked out by hand in ``test_page_moves``."""
    table = rows(read(sample(TWO_MOVES).page()), "commissioning")
    gate_out = ["main.gate+", "gatethe gate", "out", "Y1 on%Q0.0", "B2 on%I0.1"]
    assert table == [
        [*gate_out, "400.0", "441.0", "482.0", "1 s", "", ""],
        ["main.pushpush it in", "ram", "out", "Y2 on", "nonedwell 900 ms", "620.0", "675.0", "730.0", "none", "", ""],
        ["main.pull", "ram", "in", "Y3 on", "B3 on", "522.0", "588.0", "654.0", "2 s", "", ""],
        ["main.gate-", "gatethe gate", "in", "Y1 off%Q0.0", "B1 on%I0.0", "327.0", "365.5", "404.0", "none", "", ""],
    ]


def test_a_move_that_is_cut_short_has_its_row_too() -> None:
    table = rows(read(sample(TWO_MOVES.replace("dwell 900 ms", "dwell 300 ms")).page()), "commissioning")
    assert [row[5] for row in table if row[0].startswith("main.push")] == ["cut short"]
    assert len(table) == 4


@pytest.mark.parametrize("name", ["crate_stapler.steps", "faulty/short_pulse.steps"])
def test_the_header_says_what_was_proved_under_what(name: str) -> None:
    shown = example(name)
    told = words(header(read(shown.page())))
    assert all(sheet in told for sheet in shown.report.sheets)
    assert ("all figures hold only for runs without 1 finding below" in told) == ("faulty" in name)
    assert ("times from the text alone" in told) == (not shown.report.sheets)
    assert ("clean for all times in tolerance" in told) == (shown.report.verdict == "clean")


def test_bounds_that_may_be_wide_are_marked_in_the_tables_that_have_such() -> None:
    folder = Path(__file__).parents[1] / "cases"
    wide = sample((folder / "choose_while_something_is_under_way.steps").read_text(encoding="utf-8")).page()
    assert "wide: safe: added up over states with something under way" in " ".join(wide.split())
    assert wide.count(">wide</td>") == 3
    assert wide.count(">bounds</th>") == 2
    exact = sample((folder / "choose_while_a_dwell_goes_on.steps").read_text(encoding="utf-8")).page()
    assert ">wide<" not in exact and ">bounds<" not in exact


def test_every_device_has_its_tag_address_and_label() -> None:
    table = rows(read(sample(TWO_MOVES).page()), "devices")
    assert ["Y1", "coil", "%Q0.0", "gate up", "V1, to a"] in table
    assert ["B2", "sensor", "%I0.1", "gate is up", "gate, at 100 %"] in table
    assert ["V2", "valve 5/3 closed centre", "", "", ""] in table
    assert ["gate", "cylinder", "", "the gate", "V1"] in table
    assert ["start", "signal", "", "", "from outside"] in table


def test_times_and_margins_are_those_of_the_report() -> None:
    shown = sample(TWO_MOVES)
    page = read(shown.page())
    _, steps = section(page, "times").iterfind(f"{XHTML}table")
    found = [[words(cell) for cell in row] for row in steps.iterfind(f"{XHTML}tbody/{XHTML}tr")]
    assert [row[0] for row in found] == [name for name, _ in shown.report.steps]
    for row, (_, time) in zip(found, shown.report.steps, strict=True):
        shown_times = [None if cell == "open" else float(cell) * 1000 for cell in row[2:5]]
        assert shown_times == [time.least, time.typical, time.greatest]
    margins = sorted(one.margin_us for one in shown.report.margins if one.margin_us is not None)
    assert [float(row[0]) * 1000 for row in rows(page, "margins")] == margins


def test_a_step_that_no_run_leaves_says_so() -> None:
    """The pulse is too short for the valve, so that the step behind it is never come to."""
    shown = sample(HOSTILE)
    assert shown.report.steps == ()
    assert [row[2] for row in rows(read(shown.page()), "times")] == ["never left", "never left"]


@pytest.mark.parametrize("name", ["faulty/short_pulse.steps", "faulty/coil_handover.steps"])
def test_a_finding_carries_its_number_its_place_and_its_run(name: str) -> None:
    shown = example(name)
    articles = list(section(read(shown.page()), "findings").iterfind(f"{XHTML}article"))
    assert len(articles) == len(shown.report.findings)
    for number, (article, finding) in enumerate(zip(articles, shown.report.findings, strict=True), 1):
        head = article.find(f"{XHTML}h3")
        assert head is not None
        assert words(head).startswith(f"{number} {finding.severity.value}")
        assert f"line {finding.place.line}, column {finding.place.column}" in words(head)
        assert len(article.findall(f".//{XHTML}tbody/{XHTML}tr")) == len(finding.run)


def test_names_and_labels_are_text_whatever_they_hold() -> None:
    shown = sample(HOSTILE, ']]> "a\'b" <&> \\ */} מסמך.steps')
    assert shown.report.findings
    for document in (read(shown.page()), html.document_fromstring(shown.page().encode("utf-8"))):
        plain_names = [element.tag.rpartition("}")[2] for element in document.iter(etree.Element)]
        assert not {"script", "img", "iframe", "object", "embed", "form", "foreignObject"} & set(plain_names)
        assert plain_names.count("style") == 1
        assert not [key for element in document.iter(etree.Element) for key in element.attrib if key.startswith("on")]
        told = words(document)
        assert shown.machine is not None
        assert shown.machine.name in told
        for device in (*shown.machine.sensors.values(), *shown.machine.coils.values()):
            assert device.name in told
            assert device.label and device.label in told
        for step in steps_of(shown.machine.sequences[0]):
            assert step.label and step.label in told


def test_names_from_the_right_stand_apart_from_the_sentence_around_them() -> None:
    page = read(sample(HOSTILE).page())
    apart = {"".join(one.itertext()) for one in page.iter(f"{XHTML}bdi")}
    assert {"שסתום", "סליל", "גליל", "חיישן1", "חיישן2"} <= apart
    for told in section(page, "findings").iterfind(f"{XHTML}article/{XHTML}p"):
        assert not any("\u0590" <= letter <= "\u05ff" for letter in told.text or "")


def test_nothing_in_it_asks_for_anything_from_elsewhere() -> None:
    page = read(sample(HOSTILE).page())
    asked = [
        value
        for element in page.iter(etree.Element)
        for key, value in element.attrib.items()
        if key.rpartition("}")[2] in ("href", "src", "srcset", "data", "action", "poster", "background")
    ]
    assert asked
    assert all(value.startswith("#") or value == "data:," for value in asked)
    style = page.find(f".//{XHTML}style")
    assert style is not None and style.text is not None
    assert "url(" not in style.text and "@import" not in style.text
    (policy,) = page.iterfind(f".//{XHTML}meta[@http-equiv='Content-Security-Policy']")
    assert policy.get("content", "").startswith("default-src 'none'; style-src 'unsafe-inline'")


def test_what_stands_on_every_printed_page_cannot_end_its_own_rule() -> None:
    page = read(sample(TWO_MOVES, 'a"b\n</style>}.steps').page(Imprint('1"2', "\\9 {}")))
    style = page.find(f".//{XHTML}style")
    assert style is not None and style.text is not None
    _, rules = style.text.rsplit("@page", 1)
    assert r'content: "a\000022b \00003c\00002fstyle\00003e\00007d.steps"' in rules
    assert r'content: "1\0000222"' in rules
    assert r'content: "revision \00005c9 \00007b\00007d"' in rules
    assert rules.count("{") == rules.count("}")


def test_characters_that_no_page_can_carry_are_spelled_out() -> None:
    """A file name that is no text (a lone surrogate), one that turns the reading direction, a control character."""
    page = sample(TWO_MOVES, "a\udcff\u202eb\x1b.steps").page(Imprint("\x00", "\ud800"))
    assert r"a\udcff\u202eb\x1b.steps" in words(read(page))
    assert not {"\udcff", "\u202e", "\x1b", "\x00"} & set(page)
    page.encode("utf-8")


def test_what_is_not_given_is_left_to_be_written_in() -> None:
    shown = sample(TWO_MOVES)
    given, left = (read(shown.page(imprint)) for imprint in (IMPRINT, Imprint()))
    (there,), (blank,) = (page.findall(f".//{XHTML}dl[@class='imprint']") for page in (given, left))
    assert words(there) == "Filesample.steps RevisionC Date2031-03-07".replace(" ", "")
    assert words(blank) == "Filesample.stepsRevisionDate"
    assert len(blank.findall(f".//{XHTML}span[@class='fill-in']")) == 2
    assert "2031" not in shown.page(Imprint())


def test_a_text_that_cannot_be_read_has_a_page_of_its_errors() -> None:
    shown = sample('machine "x"\nvalve V1 5/2 sprung { coil Y1 }\n<&>')
    page = read(shown.page())
    assert shown.report.problems
    assert len(list(section(page, "errors"))) == 1 + len(shown.report.problems)
    for problem in shown.report.problems:
        assert problem.message in words(page)
    assert "unreadable" in words(page)


def test_a_machine_in_which_nothing_moves_has_no_empty_tables() -> None:
    page = read(sample("output K1\nsequence main { step a { on K1  dwell 1 s } step b { dwell 1 s } }").page())
    keys = [one.get("id") for one in page.iterfind(f".//{XHTML}section")]
    assert keys == ["findings", "chart", "devices", "times", "path"]
    assert all(one.find(f"{XHTML}tbody/{XHTML}tr") is not None for one in page.iter(f"{XHTML}table"))


def test_the_numbers_of_the_table_of_contents_lead_somewhere() -> None:
    page = read(sample(LARGE).page())
    targets = [element.get("id") for element in page.iter(etree.Element) if element.get("id")]
    assert len(targets) == len(set(targets))
    links = [element.get("href", "")[1:] for element in page.iter(f"{XHTML}a")]
    assert links and set(links) <= set(targets)


def rows_on(sheet: etree._Element) -> list[str]:
    return [name for group in sheet.iter(f"{SVG}g") if (name := group.get("data-row"))]


def test_a_long_chart_is_cut_into_sheets_that_leave_nothing_out() -> None:
    shown = sample(LARGE)
    (chart,) = shown.charts
    sheets = section(read(shown.page()), "chart").findall(f"{XHTML}figure")
    assert len(sheets) > 4
    there = {name for sheet in sheets for name in rows_on(sheet)}
    assert {row.name for row in chart.rows if row.edges} <= there
    for sheet in sheets:
        caption = sheet.find(f"{XHTML}figcaption")
        assert caption is not None
        assert "sample.steps, revision C, 2031-03-07" in words(caption)
        drawn = {words(text) for text in sheet.iter(f"{SVG}text")}
        assert set(rows_on(sheet)) <= drawn


def in_another_process(sheet: Path, seed: str) -> bytes:
    program = (
        "import sys; from tests.chart.page_samples import *;"
        "sys.stdout.buffer.write(sample(HOSTILE).page().encode() + sample(TWO_MOVES).page().encode())"
    )
    environment = {**os.environ, "PYTHONHASHSEED": seed, "TZ": f"UTC+{seed}"}
    done = subprocess.run([sys.executable, "-c", program], cwd=sheet, env=environment, capture_output=True, check=True)
    return done.stdout


def test_the_same_input_gives_the_same_bytes(checkout: Path) -> None:
    assert in_another_process(checkout, "1") == in_another_process(checkout, "2")


def test_samples_are_what_their_tests_take_them_for() -> None:
    large: Sample = sample(LARGE)
    assert isinstance(large.report, Report)
    assert large.machine is not None
    assert len(large.machine.cylinders) == 30
    assert len(list(steps_of(large.machine.sequences[0]))) == 60


def test_a_choice_has_its_cycle_times_and_its_way() -> None:
    shown = example("rinse_skid.steps")
    page = read(shown.page())
    _, ways, _ = section(page, "times").iterfind(f"{XHTML}table")
    cells = [[cell.xpath("string()") for cell in row.iterfind(f"{XHTML}td")] for row in ways.iter(f"{XHTML}tr")]
    assert [row[:2] for row in cells if row] == [["main", one.way] for one in shown.report.choices]
    assert shown.report.choices
    about = section(page, "chart").xpath("string()")
    assert "The way shown: in line 27 otherwise (branch 2 of 2)." in about and "A lozenge is a choice" in about


def test_taps_that_rest_are_open_or_closed() -> None:
    """On sheets that leave out what does not change."""
    shown = sample(PROCESS)
    (chart,) = shown.charts
    names = [row.name for row in chart.rows]
    part = View(3_400_000, 3_600_000, (names.index("gate"),))
    words = at_rest(chart, part)
    assert "<strong>open</strong> <bdi>VT</bdi>" in words and "<strong>closed</strong> <bdi>VM</bdi>" in words
