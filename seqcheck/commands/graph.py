"""``seqcheck graph``: the states that a machine comes to and the runs between them, for people and other programs."""

from __future__ import annotations

import argparse
import sys

from seqcheck.arguments import NEVER, SAFETY, add_formats
from seqcheck.commands.examining import examined
from seqcheck.commands.outputs import overwriting, read_for, refused
from seqcheck.commands.pages import add_page_arguments
from seqcheck.commands.statuses import UNREADABLE, ended, exit_status
from seqcheck.machine.findings import Report
from seqcheck.report.delivery import save, send, show, show_beside
from seqcheck.report.destinations import Destination, destinations
from seqcheck.report.formats import FOR_PEOPLE
from seqcheck.report.state_forms import STATE_FORMS
from seqcheck.report.terminal import encoding_of

EPILOG = (
    "graphml and dot are for other programs, times in whole microseconds. Exit status: 0; 2 where something could not"
    f" be read or written.\n\n{SAFETY}"
)


def add_arguments(command: argparse.ArgumentParser) -> None:
    add_page_arguments(command)
    add_formats(command, STATE_FORMS, "write the graph there instead of to standard output")


def run(options: argparse.Namespace) -> int:
    wanted = destinations(options.choices)
    names = (options.file, *options.times)
    refusal = wanted if isinstance(wanted, str) else refused([options.file], names, wanted)
    if refusal or isinstance(wanted, str):
        return ended(UNREADABLE, refusal)
    report = examined(options.file, options)
    status = exit_status([report], (NEVER,))
    for destination in wanted:
        status = ended(status, _delivered(destination, options.file, report))
    return status


def _delivered(destination: Destination, file: str, report: Report) -> str | None:
    """What went wrong with writing comes back, if anything did."""
    from seqcheck.report.plain import plain_report
    from seqcheck.report.states import state_lines

    if destination.form != FOR_PEOPLE and report.problems:
        show_beside(state_lines(report, encoding_of(sys.stderr)))
        return None
    form = STATE_FORMS[destination.form]
    if destination.output:
        trouble = overwriting(destination.output, read_for([file], [report]))
        return trouble or save(form(plain_report(report)), destination.output)
    if destination.form == FOR_PEOPLE:
        return show(state_lines(report, encoding_of(sys.stdout)))
    return send(form(plain_report(report)))
