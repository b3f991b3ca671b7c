from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import pytest
from rich.cells import cell_len

from seqcheck.machine.findings import Moment, Report, Severity
from seqcheck.report.findings import FIRST_MOMENTS, LAST_MOMENTS
from seqcheck.report.layout import WIDTH, page
from seqcheck.report.tables import margins_lines, times_lines
from seqcheck.report.text import render_text, text_lines
from tests.report.samples import healthy, no_watchdog, short_pulse, unknown_valve, unreadable

Golden = Callable[[str, str], None]


def long_run(length: int) -> tuple[Moment, ...]:
    return tuple(Moment(1500 * number, f"event {number}") for number in range(length))


GOLDEN_REPORTS: dict[str, tuple[Report, ...]] = {
    "healthy.txt": (healthy(no_watchdog()),),
    "findings.txt": (
        healthy(
            short_pulse(certain=True),
            short_pulse(severity=Severity.WARNING, replayed=False, run=long_run(40)),
            short_pulse(kind="unreachable", severity=Severity.WARNING, run=(), replayed=None, margin_us=None),
            no_watchdog(),
        ),
    ),
    "unreadable.txt": (unreadable(unknown_valve(), unknown_valve(None)),),
    "several.txt": (healthy(), healthy(short_pulse()), unreadable()),
}


@pytest.mark.parametrize("name", GOLDEN_REPORTS)
def test_golden_pages_of_check(name: str, golden: Golden) -> None:
    golden(name, render_text(GOLDEN_REPORTS[name]))


def test_golden_page_of_times(golden: Golden) -> None:
    golden("times.txt", page(times_lines(healthy(short_pulse()))))


def test_golden_page_of_margins(golden: Golden) -> None:
    golden("margins.txt", page(margins_lines(healthy())))


def test_a_healthy_machine_takes_under_ten_lines() -> None:
    assert len(text_lines([healthy(no_watchdog())])) < 10


def test_both_pages_of_an_unreadable_text_show_its_problems() -> None:
    expected = text_lines([unreadable()])
    assert times_lines(unreadable()) == expected
    assert margins_lines(unreadable()) == expected


def test_margins_come_tightest_first_and_open_ones_last() -> None:
    report = healthy()
    shown = [line.text.split()[0] for line in margins_lines(report)[4:7]]
    assert shown == ["32", "1241", "open"]


@pytest.mark.parametrize("length", [FIRST_MOMENTS + LAST_MOMENTS, FIRST_MOMENTS + LAST_MOMENTS + 1])
def test_a_run_is_cut_only_where_that_saves_lines(length: int) -> None:
    text = render_text([healthy(short_pulse(run=long_run(length)))])
    assert "left out" not in text
    assert all(f"event {number}\n" in text for number in range(length))


def test_every_severity_certainty_and_replay_is_said_in_words() -> None:
    text = render_text(GOLDEN_REPORTS["findings.txt"])
    for words in ("error (certain) ", "warning (possible) ", "note ", "Broken by  3 ms", "something else gets in"):
        assert words in text


@pytest.mark.parametrize("hostile", ["\x1b[2J\x1b]0;x\x07", "[red]x[/red] [/]", "昇" * 500, "x" * 5000, "a\nb\r\x85c"])
@pytest.mark.parametrize("encoding", ["utf-8", "cp1252", "cp437", "ascii"])
def test_hostile_text_stays_within_the_page(hostile: str, encoding: str) -> None:
    finding = short_pulse(
        subject=hostile, step=hostile, message=hostile, mend=hostile, run=(Moment(0, hostile), Moment(10**15, hostile))
    )
    reports = [
        replace(healthy(finding, replace(no_watchdog(), message=hostile)), file=hostile, machine=hostile),
        replace(unreadable(unknown_valve(hostile)), file=hostile),
    ]
    pages = [text_lines(reports, encoding), times_lines(reports[0], encoding), margins_lines(reports[0], encoding)]
    for lines in pages:
        assert all(cell_len(line.text) <= WIDTH for line in lines)
        assert all(line.text.isprintable() for line in lines)
        page(lines).encode(encoding)
    assert "[red]x[/red] [/]" not in hostile or "[red]x[/red] [/]" in page(pages[0])
