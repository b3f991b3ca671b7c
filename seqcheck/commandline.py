"""The command ``seqcheck``: reads its arguments, has the files examined, writes the report, gives an exit status.

Exit status 0: nothing at or above ``--fail-on``; 1: something; 2: an input or an option could not be read, or the
report not be written. Faults of the input are part of the report. Modules that take long to load are imported once
they are needed.
"""

from __future__ import annotations

import argparse
import sys
from collections.abc import Iterable, Iterator, Sequence
from pathlib import Path
from typing import Any, NoReturn

from seqcheck import __version__
from seqcheck.machine.findings import Report, Severity
from seqcheck.report.delivery import complain, finish, provide_streams, save, send, show
from seqcheck.report.formats import FOR_PEOPLE, FORMATS
from seqcheck.report.plain import plain
from seqcheck.report.progress import working_on
from seqcheck.report.terminal import encoding_of

FINE = 0
FOUND = 1
UNREADABLE = 2
INTERRUPTED = 130

STANDARD = "-"
NEVER = "never"

SAFETY = (
    "seqcheck finds timing faults in a sequence. It is no safety function and no proof of one: it replaces no risk"
    " assessment, no guard, no emergency stop circuit and no licensed practitioner; local codes and licensed practice"
    " come first."
)
_STATUSES = (
    "Exit status: 0 nothing found at or above --fail-on; 1 something found; 2 the text, a timing sheet, a file or an"
    " option could not be read, or the report not be written."
)


class _Paragraphs(argparse.HelpFormatter):
    """Wraps each paragraph of an epilog by itself."""

    def _fill_text(self, text: str, width: int, indent: str) -> str:
        return "\n\n".join(super(_Paragraphs, self)._fill_text(part, width, indent) for part in text.split("\n\n"))


class _Parser(argparse.ArgumentParser):
    """Says what is wrong with an option without letting its characters act on the terminal."""

    def __init__(self, **settings: Any) -> None:
        super().__init__(formatter_class=_Paragraphs, **settings)

    def error(self, message: str) -> NoReturn:
        self.exit(UNREADABLE, f"{self.format_usage()}seqcheck: error: {plain(message)}\n")


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command with these arguments (those of the process if None) and give its exit status."""
    provide_streams()
    try:
        return _run(arguments)
    except KeyboardInterrupt:
        return INTERRUPTED
    except Exception as fault:
        if sys.flags.dev_mode:
            raise
        return _ended(UNREADABLE, f"this is a fault of seqcheck, not of your text: {_about(fault)}")


def parser() -> argparse.ArgumentParser:
    """The arguments of every command."""
    whole = _Parser(
        prog="seqcheck",
        description="Proves the timing of solenoid valve sequences for all times within their tolerances.",
        epilog=f"{_STATUSES}\n\n{SAFETY}",
    )
    whole.add_argument("--version", action="version", version=f"seqcheck {__version__}")
    commands = whole.add_subparsers(dest="command", metavar="COMMAND", required=True)
    _add_check(commands.add_parser("check", help="find what can go wrong", epilog=f"{_STATUSES}\n\n{SAFETY}"))
    times = "cycle time, each step's times, the critical path"
    _add_page(commands.add_parser("times", help=times, epilog=SAFETY))
    margins = "how far each thing is from breaking, tightest first"
    _add_page(commands.add_parser("margins", help=margins, epilog=SAFETY))
    return whole


def exit_status(reports: Sequence[Report], fail_on: str) -> int:
    """``UNREADABLE`` if any file was; else ``FOUND`` if any finding is as severe as ``fail_on`` or more."""
    if any(report.verdict == "unreadable" for report in reports):
        return UNREADABLE
    if fail_on == NEVER:
        return FINE
    ranks = list(Severity)
    counting = ranks[: ranks.index(Severity(fail_on)) + 1]
    return FOUND if any(finding.severity in counting for report in reports for finding in report.findings) else FINE


def _add_check(command: argparse.ArgumentParser) -> None:
    command.add_argument("files", nargs="+", metavar="FILE", help="a sequence text; - reads standard input")
    _add_times(command)
    command.add_argument("--format", choices=list(FORMATS), default=FOR_PEOPLE, help="default: %(default)s")
    command.add_argument("--output", metavar="FILE", help="write the report there instead of to standard output")
    command.add_argument(
        "--fail-on",
        choices=[*(severity.value for severity in Severity), NEVER],
        default=Severity.ERROR.value,
        help="the least severity that gives exit status 1 (default: %(default)s)",
    )


def _add_page(command: argparse.ArgumentParser) -> None:
    command.add_argument("file", metavar="FILE", help="a sequence text; - reads standard input")
    _add_times(command)


def _add_times(command: argparse.ArgumentParser) -> None:
    command.add_argument(
        "--times",
        action="append",
        default=[],
        metavar="FILE",
        help="a timing sheet on top of those that the text names; may be given again, later ones win",
    )


def _run(arguments: Sequence[str] | None) -> int:
    try:
        options = _options(arguments)
    except SystemExit as stop:
        # Help, version and complaints of argparse; what they printed may still wait in the stream.
        finish()
        return stop.code if isinstance(stop.code, int) else UNREADABLE
    if options.command == "check":
        return _check(options)
    return _page(options)


def _options(arguments: Sequence[str] | None) -> argparse.Namespace:
    """As argparse reads them; files may also stand behind options (``check a.steps --times t.yaml b.steps``)."""
    whole = parser()
    options, rest = whole.parse_known_args(arguments)
    files = [name for name in rest if name == STANDARD or not name.startswith("-")]
    if rest and (options.command != "check" or files != rest):
        whole.error(f"unrecognized arguments: {' '.join(rest)}")
    if files:
        options.files = [*options.files, *files]
    return options


def _check(options: argparse.Namespace) -> int:
    files: list[str] = options.files
    output: str | None = None if options.output == STANDARD else options.output
    refusal = _refused(files, options.times, output)
    if refusal:
        return _ended(UNREADABLE, refusal)
    reports = [_examined(file, options.times) for file in files]
    status = exit_status(reports, options.fail_on)
    if output:
        trouble = _overwriting(output, _read_for(files, reports)) or save(FORMATS[options.format](reports), output)
    elif options.format == FOR_PEOPLE:
        from seqcheck.report.text import text_lines

        trouble = show(text_lines(reports, encoding_of(sys.stdout)))
    else:
        trouble = send(FORMATS[options.format](reports))
    return _ended(status, trouble)


def _page(options: argparse.Namespace) -> int:
    from seqcheck.report.tables import margins_lines, times_lines

    report = _examined(options.file, options.times)
    lines = times_lines if options.command == "times" else margins_lines
    return _ended(exit_status([report], NEVER), show(lines(report, encoding_of(sys.stdout))))


def _ended(status: int, trouble: str | None) -> int:
    if trouble is None:
        return status
    complain(trouble)
    return UNREADABLE


def _examined(file: str, sheets: Sequence[str]) -> Report:
    from seqcheck.pipeline import examine

    with working_on(file, sys.stderr):
        return examine(file, sheets)


def _refused(files: Sequence[str], sheets: Sequence[str], output: str | None) -> str | None:
    """Why these arguments make no sense together."""
    if files.count(STANDARD) > 1:
        return "standard input (-) can be read only once"
    if output is None:
        return None
    return _overwriting(output, (*files, *sheets)) if output else "--output needs the name of a file"


def _overwriting(output: str, inputs: Iterable[str]) -> str | None:
    return f"--output would overwrite an input: {output}" if any(_same_file(output, one) for one in inputs) else None


def _read_for(files: Sequence[str], reports: Sequence[Report]) -> Iterator[str]:
    """The sheets that the texts themselves name, as they may be found from here."""
    for file, report in zip(files, reports, strict=True):
        for name in (*report.sheets, *(problem.place.file for problem in report.problems)):
            yield name
            yield str(Path(file).parent / name)


def _same_file(one: str, other: str) -> bool:
    try:
        return Path(one).samefile(other)
    except (OSError, ValueError):
        return False


def _about(fault: Exception) -> str:
    """What happened and in which line of the program, for a report of the fault."""
    trace = fault.__traceback__
    while trace is not None and trace.tb_next is not None:
        trace = trace.tb_next
    where = f" ({Path(trace.tb_frame.f_code.co_filename).name}:{trace.tb_lineno})" if trace else ""
    return f"{type(fault).__name__}: {fault}{where}"
