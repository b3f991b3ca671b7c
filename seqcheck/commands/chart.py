"""``seqcheck chart``: the timing chart, on the terminal or in a file whose ending says the form."""

from __future__ import annotations

import argparse
import shutil
import sys
from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING

from seqcheck.arguments import SAFETY, count
from seqcheck.commands.outputs import overwriting, read_for
from seqcheck.commands.pages import add_page_arguments
from seqcheck.commands.statuses import FINE, UNREADABLE, ended
from seqcheck.report.delivery import save, show
from seqcheck.report.terminal import encoding_of

if TYPE_CHECKING:
    from seqcheck.chart.model import Chart
    from seqcheck.machine.findings import Report
    from seqcheck.pipeline import Studied

EPILOG = (
    "Forms by the ending of --output: .svg a picture, .html a report for screen and paper, .csv a table of all events,"
    " .vcd a waveform, .txt the page of the terminal. Exit status: 0; 2 where something could not be read, shown or"
    f" written.\n\n{SAFETY}"
)
_HTML = (".html", ".htm")
_ENDINGS = (".svg", *_HTML, ".csv", ".vcd", ".txt")
_WIDTH, _MOST_WIDTH = 80, 200


def add_arguments(command: argparse.ArgumentParser) -> None:
    add_page_arguments(command)
    command.add_argument("--output", metavar="FILE", help=f"write the chart there: {', '.join(_ENDINGS)}")
    command.add_argument("--cycles", type=count, default=1, metavar="N", help="so many settled cycles (default: 1)")
    command.add_argument("--from", dest="from_step", metavar="STEP", help="begin where this step is entered")
    command.add_argument("--to", dest="to_step", metavar="STEP", help="end where this step is left")
    command.add_argument(
        "--anchor", metavar="STEP", help="count times from entering this step (default: the start of the cycle)"
    )
    command.add_argument(
        "--rows", action="append", default=[], metavar="NAME,...", help="only these devices and sequences"
    )
    command.add_argument(
        "--choice",
        action="append",
        default=[],
        metavar="PLACE=BRANCH,...",
        help="which way a choice goes: the line of its choose, or a step inside it, and the number of a branch, or"
        " otherwise; the same place again: one after another (default: the first branch)",
    )
    command.add_argument("--witness", type=count, metavar="N", help="the run that shows finding N")
    command.add_argument("--ascii", action="store_true", help="draw the page of the terminal in plain ASCII")
    command.add_argument("--date", metavar="TEXT", help="the date on the pages of the HTML report")
    command.add_argument("--revision", metavar="TEXT", help="the revision on the pages of the HTML report")


def run(options: argparse.Namespace) -> int:
    refusal = _refused(options)
    if refusal:
        return ended(UNREADABLE, refusal)
    from seqcheck.chart.asked import Unplaceable
    from seqcheck.pipeline import study
    from seqcheck.report.progress import working_on

    with working_on(options.file, sys.stderr):
        report, studied = study(options.file, options.times)
        if studied is None:
            return _unreadable(report)
        try:
            chart = _chart(report, studied, options)
        except Unplaceable as refused:
            return ended(UNREADABLE, str(refused))
    if options.output is None:
        from seqcheck.chart.terminal import chart_lines

        return ended(FINE, show(chart_lines(chart, encoding_of(sys.stdout), _width(), options.ascii)))
    trouble = overwriting(options.output, read_for([options.file], [report]))
    return ended(FINE, trouble or save(_written(report, studied, chart, options), options.output))


def _refused(options: argparse.Namespace) -> str | None:
    """What makes no sense whatever the text says."""
    ending = "" if options.output is None else Path(options.output).suffix.lower()
    if options.output is not None and ending not in _ENDINGS:
        return f"--output {options.output}: its ending says no form of a chart; there are {', '.join(_ENDINGS)}"
    if (options.date or options.revision) and ending not in _HTML:
        return "--date and --revision stand on the pages of the HTML report: write --output FILE.html"
    if options.witness and (
        options.from_step or options.to_step or options.anchor or options.choice or options.cycles > 1
    ):
        return "--witness shows one run, its whole cycle: leave out --from, --to, --anchor, --choice and --cycles"
    return overwriting(options.output, (options.file, *options.times)) if options.output else None


def _chart(report: Report, studied: Studied, options: argparse.Namespace) -> Chart:
    from seqcheck.chart.asked import Part
    from seqcheck.chart.build import chart_of, chart_of_run

    part = Part(
        cycles=options.cycles,
        from_step=options.from_step,
        to_step=options.to_step,
        anchor=options.anchor,
        rows=_listed(options.rows),
        choices=_listed(options.choice),
    )
    if options.witness:
        return chart_of_run(studied, report, part, options.witness)
    return chart_of(studied, report, part)


def _listed(names: Sequence[str]) -> tuple[str, ...]:
    return tuple(name for one in names for name in one.split(",") if name)


def _written(report: Report, studied: Studied, chart: Chart, options: argparse.Namespace) -> str:
    """The chart in the form that the ending asks for; plain text, whatever the names hold."""
    from seqcheck.report.layout import page
    from seqcheck.report.plain import plain_record

    ending = Path(options.output).suffix.lower()
    shown: Chart = plain_record(chart, "utf-8")
    if ending in _HTML:
        return _html(report, studied, shown, options)
    if ending == ".svg":
        from seqcheck.chart.svg import svg

        return svg(shown)
    if ending == ".csv":
        from seqcheck.chart.table import csv_table

        return csv_table(shown)
    if ending == ".vcd":
        from seqcheck.chart.waveform import vcd

        return vcd(shown)
    from seqcheck.chart.terminal import chart_lines

    return page(chart_lines(shown, "utf-8", _WIDTH, options.ascii))


def _html(report: Report, studied: Studied, chart: Chart, options: argparse.Namespace) -> str:
    from seqcheck.chart.page import html_page
    from seqcheck.chart.page_imprint import Imprint
    from seqcheck.chart.page_moves import move_times

    moves = move_times(studied.machine, studied.studies)
    return html_page(report, studied.machine, (chart,), moves, Imprint(options.date, options.revision))


def _unreadable(report: Report) -> int:
    from seqcheck.report.text import text_lines

    return ended(UNREADABLE, show(text_lines([report], encoding_of(sys.stdout))))


def _width() -> int:
    """That of the terminal, if it is one."""
    if not sys.stdout.isatty():
        return _WIDTH
    return min(shutil.get_terminal_size((_WIDTH, 24)).columns, _MOST_WIDTH)
