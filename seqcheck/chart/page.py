"""The HTML report: one file for the screen and for paper, which needs no network and no script.

Takes a report, its machine (None where the text could not be read), charts, the times of its moves, and what is to
stand on every page; gives the text of the page, the same bytes for the same input. Prints on A4 and A3, landscape.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from importlib.resources import files

from seqcheck import __version__
from seqcheck.chart.model import Chart
from seqcheck.chart.page_commissioning import MEANING, commissioning_table
from seqcheck.chart.page_findings import findings_section, problems_section
from seqcheck.chart.page_imprint import Imprint, imprint_block, imprint_line, page_rules
from seqcheck.chart.page_markup import NOTHING, Markup, columns, element, lines, name, text
from seqcheck.chart.page_moves import MoveTimes
from seqcheck.chart.page_sheets import chart_sheets
from seqcheck.chart.page_tables import (
    choices_table,
    critical_path_table,
    cycles_table,
    devices_table,
    handovers_table,
    margins_table,
    steps_table,
)
from seqcheck.chart.wording import SAFETY
from seqcheck.machine.findings import Report, Severity
from seqcheck.machine.model import Machine
from seqcheck.report.amounts import ADDED_UP, OPEN, WIDE, counted
from seqcheck.report.summary import summary_rows, verdict
from seqcheck.report.tables import times_in

JOB = (
    "What can go wrong in the timing of this sequence, how much is left before it does, and how long everything takes:"
    " proved for all times within their tolerances at once."
)

_Section = tuple[str, str, str, Markup]


def html_page(
    report: Report,
    machine: Machine | None,
    charts: Sequence[Chart],
    moves: MoveTimes,
    imprint: Imprint,
) -> str:
    """The whole file as one text that ends with a newline."""
    title = report.machine or report.file
    sections = [section for section in _sections(report, machine, charts, moves, imprint) if section[3]]
    body = lines((_opening(report, title, imprint), _contents(sections), *map(_section, sections), _closing()))
    head = element("title", text(f"{title}: timing report"))
    style = element("style", Markup(f"\n{_style_sheet()}\n{page_rules(report, imprint)}\n"))
    return (
        '<!DOCTYPE html>\n<html xmlns="http://www.w3.org/1999/xhtml" lang="en">\n<head>\n<meta charset="utf-8"/>\n'
        f'{_POLICY}\n<meta name="viewport" content="width=device-width, initial-scale=1"/>\n'
        f'<link rel="icon" href="data:,"/>\n{head}\n{style}\n</head>\n<body>\n{body}\n</body>\n</html>\n'
    )


#: A browser then refuses whatever would go out to a network or run as a script.
_POLICY = (
    '<meta http-equiv="Content-Security-Policy" content="'
    "default-src 'none'; style-src 'unsafe-inline'; img-src data:; base-uri 'none'; form-action 'none'\"/>"
)


def _style_sheet() -> str:
    return files("seqcheck.chart").joinpath("page.css").read_text("utf-8").strip()


def _opening(report: Report, title: str, imprint: Imprint) -> Markup:
    """The job, the verdict and the figures that one asks for first."""
    rows = [] if report.problems else [*summary_rows(report), ("Proved under", _proved_under(report))]
    facts = [element("dt", text(label)) + element("dd", text(value)) for label, value in rows]
    return element(
        "header",
        lines(
            (
                element("h1", name(title)),
                imprint_block(report, imprint),
                element("p", text(JOB)),
                element("p", text(SAFETY), class_="safety"),
                element("p", text(verdict(report)), class_=f"verdict {_weight(report)}"),
                element("dl", *map(Markup, facts), class_="figures") if facts else NOTHING,
            )
        ),
    )


def _weight(report: Report) -> str:
    if report.problems or any(finding.severity is Severity.ERROR for finding in report.counting):
        return "bad"
    return "good" if report.verdict == "clean" else "doubtful"


def _contents(sections: Sequence[_Section]) -> Markup:
    """Links for the screen; paper does without."""
    links = (element("a", text(heading), href=f"#{key}") for key, heading, _, _ in sections)
    return element("nav", Markup(" ".join(links)), aria_label="Contents")


def _section(section: _Section) -> Markup:
    key, heading, meaning, content = section
    about = element("p", text(meaning), class_="meaning") if meaning else NOTHING
    return element("section", lines((element("h2", text(heading)), about, content)), id=key)


def _closing() -> Markup:
    return element("footer", element("p", text(f"Written by seqcheck {__version__}.")))


def _sections(
    report: Report, machine: Machine | None, charts: Sequence[Chart], moves: MoveTimes, imprint: Imprint
) -> Iterator[_Section]:
    """Key, heading, what the figures mean, content; without content a section is left out."""
    if report.problems or machine is None:
        yield "errors", "Errors in the input", "", problems_section(report)
        return
    yield "findings", "Findings", "", findings_section(report)
    milliseconds = "Times in milliseconds."
    yield "chart", "Timing chart", "", chart_sheets(charts, imprint_line(report, imprint))
    yield "commissioning", "Commissioning", MEANING, _commissioning(machine, moves)
    yield "devices", "Devices", "", columns(devices_table(machine))
    yield (
        "times",
        "Cycle and step times",
        " ".join((milliseconds, *_marks(report))),
        lines((cycles_table(report), choices_table(report), steps_table(report, machine))),
    )
    ends = "From the end of one coil, its decay included, to the start of the opposed one."
    yield "handovers", "Handovers", f"{ends} {milliseconds}", handovers_table(report.handovers)
    left = "How much later or earlier each thing may come before it breaks, tightest first; below 0 it is broken."
    yield "margins", "Margins", f"{left} {milliseconds}", columns(margins_table(report))
    latest = "The chain of events that makes the longest cycle as long as it can be. Times in milliseconds."
    yield "path", "Critical path", latest, columns(critical_path_table(report))


def _commissioning(machine: Machine, moves: MoveTimes) -> Markup:
    """The table, and who has filled it in under which conditions."""
    asked = commissioning_table(machine, moves)
    if not asked:
        return NOTHING
    labels = ("Supply pressure", "Temperature", "Measured with", "Name", "Date", "Signature")
    fields = (
        element("span", text(label), element("span", NOTHING, class_="fill-in"), class_="field") for label in labels
    )
    return lines((asked, element("p", *fields, class_="fields")))


def _marks(report: Report) -> Iterator[str]:
    """What stands for figures, or beside them."""
    times = times_in(report)
    if any(time.greatest is None for time in times):
        yield f"{OPEN}: a signal from outside decides."
    if not all(time.exact for time in times):
        yield f"{WIDE}: {ADDED_UP}."


def _proved_under(report: Report) -> str:
    """Where the times came from, what was assumed, and what the figures leave out."""
    told = [f"times from {', '.join(report.sheets)}" if report.sheets else "times from the text alone"]
    told += report.assumptions
    if diverting := [finding for finding in report.findings if finding.diverts]:
        told.append(f"all figures hold only for runs without {counted(len(diverting), 'finding')} below")
    return "; ".join(told)
