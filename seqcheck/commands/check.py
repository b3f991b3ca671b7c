"""``seqcheck check``: what can go wrong, as one report or several."""

from __future__ import annotations

import argparse
import sys
from collections.abc import Sequence
from functools import partial

from seqcheck.arguments import SAFETY, add_assume, add_fail_on, add_formats, add_jobs, add_reserve, add_times
from seqcheck.commands.examining import all_examined
from seqcheck.commands.outputs import overwriting, read_for, refused
from seqcheck.commands.statuses import STATUSES, UNREADABLE, ended, exit_status, failing, no_kind
from seqcheck.language.folders import sequences_named
from seqcheck.machine.findings import Report, Severity
from seqcheck.report.delivery import save, send, show
from seqcheck.report.destinations import FORMAT, OUTPUT, Destination, destinations
from seqcheck.report.formats import FOR_PEOPLE, FORMATS, Counts
from seqcheck.report.terminal import encoding_of

EPILOG = f"{STATUSES}\n\n{SAFETY}"


def add_arguments(command: argparse.ArgumentParser) -> None:
    command.add_argument(
        "files",
        nargs="+",
        metavar="FILE",
        help="a sequence text, a folder (all *.steps in it and below) or a pattern; - reads standard input",
    )
    add_times(command)
    add_assume(command)
    written = f"write the report there instead of to standard output; {FORMAT} X {OUTPUT} F may be given again"
    add_formats(command, FORMATS, written)
    add_fail_on(command)
    add_reserve(command)
    add_jobs(command)


def run(options: argparse.Namespace) -> int:
    fail_on: Sequence[str] = options.fail_on or (Severity.ERROR.value,)
    wanted = destinations(options.choices)
    named = sequences_named(options.files)
    texts = [name for name in named if isinstance(name, str)]
    refusal = wanted if isinstance(wanted, str) else refused(options.files, (*texts, *options.times), wanted)
    refusal = refusal or no_kind(fail_on)
    if refusal or isinstance(wanted, str):
        return ended(UNREADABLE, refusal)
    brief = all(one.form == FOR_PEOPLE for one in wanted)
    examined = iter(all_examined(texts, options, brief))
    reports = [
        next(examined) if isinstance(one, str) else Report(one.place.file, None, problems=(one,)) for one in named
    ]
    status = exit_status(reports, fail_on)
    files = [one if isinstance(one, str) else one.place.file for one in named]
    for destination in wanted:
        status = ended(status, _delivered(destination, files, reports, partial(failing, fail_on=fail_on)))
    return status


def _delivered(destination: Destination, files: Sequence[str], reports: Sequence[Report], counts: Counts) -> str | None:
    """``files``: the names of the texts, one for each report. What went wrong comes back, if anything did."""
    output = destination.output
    if output:
        trouble = overwriting(output, read_for(files, reports))
        return trouble or save(FORMATS[destination.form](reports, counts), output)
    if destination.form == FOR_PEOPLE:
        from seqcheck.report.text import text_lines

        return show(text_lines(reports, encoding_of(sys.stdout)))
    return send(FORMATS[destination.form](reports, counts))
