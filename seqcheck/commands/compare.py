"""``seqcheck compare``: what a change did to findings, margins and times."""

from __future__ import annotations

import argparse
import contextlib
import sys
from collections.abc import Sequence
from functools import partial
from pathlib import Path

from seqcheck.arguments import SAFETY, add_assume, add_fail_on, add_formats, add_jobs, add_reserve, add_times, duration
from seqcheck.commands.examining import all_examined
from seqcheck.commands.outputs import overwriting, refused
from seqcheck.commands.statuses import FINE, FOUND, UNREADABLE, ended, failing, no_kind
from seqcheck.compare.differences import FileComparison
from seqcheck.machine.findings import Severity
from seqcheck.report.delivery import save, send, show
from seqcheck.report.destinations import Destination, destinations
from seqcheck.report.formats import COMPARISON_FORMATS, FOR_PEOPLE
from seqcheck.report.progress import working_on
from seqcheck.report.terminal import encoding_of

_STATUSES = (
    "Exit status: 0 nothing worse; 1 a margin shrank or a greatest cycle time grew by more than --allow, or something"
    " is found at or above --fail-on that was not before; 2 something could not be read, or the report not be written."
)
EPILOG = f"{_STATUSES}\n\n{SAFETY}"


def add_arguments(command: argparse.ArgumentParser) -> None:
    command.add_argument("old", metavar="OLD", help="a sequence text, a folder, or a report stored with --format json")
    command.add_argument("new", metavar="NEW", help="a sequence text or a folder")
    add_times(command)
    add_assume(command)
    add_formats(command, COMPARISON_FORMATS, "write the comparison there")
    add_fail_on(command)
    command.add_argument(
        "--allow",
        type=duration,
        default=0,
        metavar="DURATION",
        help="by how much a margin may shrink and a greatest cycle time grow (default: not at all)",
    )
    add_reserve(command)
    add_jobs(command)


def run(options: argparse.Namespace) -> int:
    fail_on: Sequence[str] = options.fail_on or (Severity.ERROR.value,)
    wanted = destinations(options.choices)
    names = (options.old, options.new)
    refusal = wanted if isinstance(wanted, str) else refused(names, (*names, *options.times), wanted)
    refusal = refusal or no_kind(fail_on)
    if refusal or isinstance(wanted, str):
        return ended(UNREADABLE, refusal)
    from seqcheck.compare.compare import Examining, compare
    from seqcheck.compare.results import Bar

    examining = Examining(options.times, options.reserve, partial(all_examined, options=options))
    bar = Bar(options.allow, partial(failing, fail_on=fail_on))
    with contextlib.nullcontext() if Path(options.new).is_dir() else working_on(options.new, sys.stderr):
        files = compare(*names, examining, bar)
    verdicts = {file.verdict for file in files}
    status = UNREADABLE if "unreadable" in verdicts else FOUND if "worse" in verdicts else FINE
    for destination in wanted:
        status = ended(status, _delivered(destination, files))
    return status


def _delivered(destination: Destination, files: Sequence[FileComparison]) -> str | None:
    render = COMPARISON_FORMATS[destination.form]
    if destination.output:
        read = (name for file in files for name in (file.old, file.new, *file.sheets) if name)
        return overwriting(destination.output, read) or save(render(files), destination.output)
    if destination.form == FOR_PEOPLE:
        from seqcheck.report.comparison import comparison_lines

        return show(comparison_lines(files, encoding_of(sys.stdout)))
    return send(render(files))
