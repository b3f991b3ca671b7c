"""The arguments of every command: what may be written, what it means, and the help that says so.

Takes the words of a command line; gives them as argparse reads them. Refuses, with exit status 2, what is none of a
command's arguments.
"""

from __future__ import annotations

import argparse
from collections.abc import Sequence
from typing import Any, NoReturn

from seqcheck import __version__
from seqcheck.machine.findings import Severity
from seqcheck.report.destinations import FORMAT, OUTPUT
from seqcheck.report.formats import COMPARISON_FORMATS, FOR_PEOPLE, FORMATS
from seqcheck.report.plain import plain

WRONG_ARGUMENTS = 2

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

_COMPARE_STATUSES = (
    "Exit status: 0 nothing worse; 1 a margin shrank or a greatest cycle time grew by more than --allow, or something"
    " is found at or above --fail-on that was not before; 2 something could not be read, or the report not be written."
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
        self.exit(WRONG_ARGUMENTS, f"{self.format_usage()}seqcheck: error: {plain(message)}\n")


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
    compare = "what a change did to findings, margins and times"
    _add_compare(commands.add_parser("compare", help=compare, epilog=f"{_COMPARE_STATUSES}\n\n{SAFETY}"))
    explain = commands.add_parser("explain", help="what a kind of finding means, and how it is mended", epilog=SAFETY)
    explain.add_argument("kind", nargs="?", metavar="KIND", help="a kind of finding (all are listed if left out)")
    return whole


def read_arguments(arguments: Sequence[str] | None) -> argparse.Namespace:
    """As argparse reads them; files may also stand behind options (``check a.steps --times t.yaml b.steps``)."""
    whole = parser()
    options, rest = whole.parse_known_args(arguments)
    files = [name for name in rest if name == STANDARD or not name.startswith("-")]
    if rest and (options.command != "check" or files != rest):
        whole.error(f"unrecognized arguments: {' '.join(rest)}")
    if files:
        options.files = [*options.files, *files]
    return options


def _add_check(command: argparse.ArgumentParser) -> None:
    command.add_argument(
        "files",
        nargs="+",
        metavar="FILE",
        help="a sequence text, a folder (all *.steps in it and below) or a pattern; - reads standard input",
    )
    _add_times(command)
    command.add_argument(FORMAT, action=_Choice, choices=list(FORMATS), help=f"default: {FOR_PEOPLE}")
    command.add_argument(
        OUTPUT,
        action=_Choice,
        metavar="FILE",
        help=f"write the report there instead of to standard output; {FORMAT} X {OUTPUT} F may be given again",
    )
    _add_fail_on(command)
    _add_reserve_and_jobs(command)


def _add_fail_on(command: argparse.ArgumentParser) -> None:
    command.add_argument(
        "--fail-on",
        action="append",
        metavar="SEVERITY|KIND",
        help="what gives exit status 1: findings of this severity (error, warning, note) or above it, those of this"
        f" kind, or {NEVER}; may be given again, all count (default: {Severity.ERROR.value})",
    )


def _add_compare(command: argparse.ArgumentParser) -> None:
    command.add_argument("old", metavar="OLD", help="a sequence text, a folder, or a report stored with --format json")
    command.add_argument("new", metavar="NEW", help="a sequence text or a folder")
    _add_times(command)
    command.add_argument(FORMAT, action=_Choice, choices=list(COMPARISON_FORMATS), help=f"default: {FOR_PEOPLE}")
    command.add_argument(OUTPUT, action=_Choice, metavar="FILE", help="write the comparison there")
    _add_fail_on(command)
    command.add_argument(
        "--allow",
        type=_duration,
        default=0,
        metavar="DURATION",
        help="by how much a margin may shrink and a greatest cycle time grow (default: not at all)",
    )
    _add_reserve_and_jobs(command)


def _add_reserve_and_jobs(command: argparse.ArgumentParser) -> None:
    command.add_argument(
        "--reserve",
        type=_duration,
        default=0,
        metavar="DURATION",
        help="the least time that has to be left before anything breaks (5 ms, say): less is a warning",
    )
    command.add_argument(
        "--jobs", type=_count, metavar="N", help="examine so many texts at once (default: as many as there are cores)"
    )


class _Choice(argparse.Action):
    """Keeps ``--format`` and ``--output`` in the order in which they are given."""

    def __init__(self, option_strings: Sequence[str], dest: str, **settings: Any) -> None:
        super().__init__(option_strings, "choices", default=(), **settings)

    def __call__(self, parser: object, options: argparse.Namespace, value: Any, option: str | None = None) -> None:
        options.choices = (*options.choices, (self.option_strings[0], value))


def _count(written: str) -> int:
    if not written.isdecimal() or len(written) > 9 or int(written) < 1:
        raise argparse.ArgumentTypeError(f"{written!r} is no count: write 1 or more")
    return int(written)


def _duration(written: str) -> int:
    """An option's duration in microseconds."""
    from seqcheck.language.durations import parse_duration

    time = parse_duration(written.strip())
    if time is None or time < 0:
        raise argparse.ArgumentTypeError(f"{written!r} is no duration: write a number and us, ms, s or min, as in 5ms")
    return time


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
