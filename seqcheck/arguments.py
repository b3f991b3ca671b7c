"""What the arguments of several commands have in common: options, their values, and the help that says so.

Takes a parser of argparse and adds an option to it. Refuses, with exit status 2, a value that is none.
"""

from __future__ import annotations

import argparse
from collections.abc import Iterable, Sequence

TYPE_CHECKING = False  # As typing has it: help does without loading that.
if TYPE_CHECKING:
    from typing import Any, NoReturn

WRONG_ARGUMENTS = 2

STANDARD = "-"
NEVER = "never"

SAFETY = (
    "seqcheck finds timing faults in a sequence. It is no safety function and no proof of one: it replaces no risk"
    " assessment, no guard, no emergency stop circuit and no licensed practitioner; local codes and licensed practice"
    " come first."
)


#: Of help, as on a terminal of 80 columns, for which all pages are made. (To ask for its own width loads more than help
#: is made of.)
_WIDTH = 78


class _Paragraphs(argparse.HelpFormatter):
    """Wraps each paragraph of an epilog by itself."""

    def __init__(self, prog: str, **settings: Any) -> None:
        super().__init__(prog, **{"width": _WIDTH, **settings})

    def _fill_text(self, text: str, width: int, indent: str) -> str:
        return "\n\n".join(super(_Paragraphs, self)._fill_text(part, width, indent) for part in text.split("\n\n"))


class Parser(argparse.ArgumentParser):
    """Says what is wrong with an option without letting its characters act on the terminal."""

    def __init__(self, **settings: Any) -> None:
        super().__init__(formatter_class=_Paragraphs, **settings)

    def error(self, message: str) -> NoReturn:
        from seqcheck.report.plain import plain

        self.exit(WRONG_ARGUMENTS, f"{self.format_usage()}seqcheck: error: {plain(message)}\n")


def add_times(command: argparse.ArgumentParser) -> None:
    command.add_argument(
        "--times",
        action="append",
        default=[],
        metavar="FILE",
        help="a timing sheet on top of those that the text names; may be given again, later ones win",
    )


def add_assume(command: argparse.ArgumentParser) -> None:
    """Names a sheet of ordinary times among those of ``--times``."""
    from seqcheck.language.ordinary import MEDIA

    command.add_argument(
        "--assume",
        action=_Assume,
        choices=MEDIA,
        help="let ordinary times of pneumatic or hydraulic equipment (common practice, no source) stand in for those"
        " that nobody gives yet; the report says which",
    )


def add_formats(command: argparse.ArgumentParser, formats: Iterable[str], output_help: str) -> None:
    """``--format`` and ``--output``, as pairs in ``options.choices``."""
    from seqcheck.report.destinations import FORMAT, OUTPUT
    from seqcheck.report.formats import FOR_PEOPLE

    command.add_argument(FORMAT, action=_Choice, choices=list(formats), help=f"default: {FOR_PEOPLE}")
    command.add_argument(OUTPUT, action=_Choice, metavar="FILE", help=output_help)


def add_fail_on(command: argparse.ArgumentParser) -> None:
    from seqcheck.machine.severity import Severity

    command.add_argument(
        "--fail-on",
        action="append",
        metavar="SEVERITY|KIND",
        help="what gives exit status 1: findings of this severity (error, warning, note) or above it, those of this"
        f" kind, or {NEVER}; may be given again, all count (default: {Severity.ERROR.value})",
    )


def add_reserve(command: argparse.ArgumentParser) -> None:
    command.add_argument(
        "--reserve",
        type=duration,
        default=0,
        metavar="DURATION",
        help="the least time that has to be left before anything breaks (5 ms, say): less is a warning",
    )


def add_jobs(command: argparse.ArgumentParser) -> None:
    command.add_argument(
        "--jobs", type=count, metavar="N", help="examine so many texts at once (default: as many as there are cores)"
    )


class _Choice(argparse.Action):
    """Keeps ``--format`` and ``--output`` in the order in which they are given."""

    def __init__(self, option_strings: Sequence[str], dest: str, **settings: Any) -> None:
        super().__init__(option_strings, "choices", default=(), **settings)

    def __call__(self, parser: object, options: argparse.Namespace, value: Any, option: str | None = None) -> None:
        options.choices = (*options.choices, (self.option_strings[0], value))


class _Assume(argparse.Action):
    """``--assume air`` is the timing sheet ``assume:air``; a second one takes the place of the first."""

    def __call__(self, parser: object, options: argparse.Namespace, value: Any, option: str | None = None) -> None:
        from seqcheck.language.ordinary import PREFIX, medium_of

        others = [sheet for sheet in options.times if medium_of(sheet) is None]
        options.times = [f"{PREFIX}{value}", *others]


def count(written: str) -> int:
    if not written.isdecimal() or len(written) > 9 or int(written) < 1:
        raise argparse.ArgumentTypeError(f"{written!r} is no count: write 1 or more")
    return int(written)


def duration(written: str) -> int:
    """An option's duration in microseconds."""
    from seqcheck.language.durations import parse_duration

    time = parse_duration(written.strip())
    if time is None or time < 0:
        raise argparse.ArgumentTypeError(f"{written!r} is no duration: write a number and us, ms, s or min, as in 5ms")
    return time
