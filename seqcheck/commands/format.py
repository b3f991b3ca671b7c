"""``seqcheck format``: texts in one canonical layout.

Takes texts, folders and patterns; writes each text anew whose layout is another, or only says which they are. Line
ends and a byte order mark stay as the file has them.
"""

from __future__ import annotations

import argparse
import sys

from seqcheck.arguments import SAFETY, STANDARD
from seqcheck.commands.statuses import FINE, FOUND, UNREADABLE, ended
from seqcheck.language.folders import sequences_named
from seqcheck.language.problems import Problems
from seqcheck.language.source import Source, read_source
from seqcheck.machine.findings import Problem
from seqcheck.report.delivery import send
from seqcheck.report.files import write_file
from seqcheck.report.plain import plain, plain_record
from seqcheck.report.terminal import encoding_of, write_lines

EPILOG = (
    "No word and no comment is changed. Exit status: 0 every text has the layout now; 1 with --check: some have not;"
    f" 2 a text could not be read or written, and stays as it is.\n\n{SAFETY}"
)


def add_arguments(command: argparse.ArgumentParser) -> None:
    command.add_argument(
        "files",
        nargs="+",
        metavar="FILE",
        help="a sequence text, a folder (all *.steps in it and below) or a pattern; - reads standard input, and"
        " writes to standard output",
    )
    command.add_argument("--check", action="store_true", help="write nothing, only name the texts with another layout")


def run(options: argparse.Namespace) -> int:
    if options.files.count(STANDARD) > 1:
        return ended(UNREADABLE, "standard input (-) can be read only once")
    statuses = [_one(name, options.check) for name in sequences_named(options.files)]
    return UNREADABLE if UNREADABLE in statuses else max(statuses, default=FINE)


def _one(name: str | Problem, only_check: bool) -> int:
    from seqcheck.language.layout import laid_out

    source = read_source(name) if isinstance(name, str) else name
    if isinstance(source, Problem):
        return _unreadable((source,))
    problems = Problems()
    problems.opened(source.name, source.text)
    text = laid_out(source, problems)
    if text is None:
        return _unreadable(problems.sorted())
    text = _as_in(source, text)
    changed = text != source.whole
    if only_check:
        return ended(FOUND, send(f"{plain(source.name)}\n")) if changed else FINE
    if source.name == STANDARD:
        return ended(FINE, send(text))
    return _written(source.name, text) if changed else FINE


def _as_in(source: Source, text: str) -> str:
    """The text with the line ends and the byte order mark of the file; of several line ends, the first."""
    first = source.text.find("\n")
    ending = "\r\n" if first > 0 and source.text[first - 1] == "\r" else "\n"
    return ("\ufeff" if source.marked else "") + text.replace("\n", ending)


def _written(name: str, text: str) -> int:
    try:
        write_file(name, text)
    except (OSError, ValueError) as fault:
        return ended(UNREADABLE, f"cannot write {name}: {getattr(fault, 'strerror', None) or fault}")
    return ended(FINE, send(f"laid out {plain(name)}\n"))


def _unreadable(problems: tuple[Problem, ...]) -> int:
    from seqcheck.report.problems import problem_lines

    encoding = encoding_of(sys.stderr)
    for problem in problems:
        write_lines(problem_lines(plain_record(problem, encoding), encoding), sys.stderr)
    return UNREADABLE
