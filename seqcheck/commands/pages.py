"""What the commands that print one page about one text have in common."""

from __future__ import annotations

import argparse
import sys
from collections.abc import Callable, Sequence
from typing import TYPE_CHECKING

from seqcheck.arguments import NEVER, add_assume, add_times
from seqcheck.commands.examining import examined
from seqcheck.commands.statuses import ended, exit_status
from seqcheck.machine.findings import Report
from seqcheck.report.delivery import show
from seqcheck.report.terminal import encoding_of

if TYPE_CHECKING:
    from seqcheck.report.layout import Line


def add_page_arguments(command: argparse.ArgumentParser) -> None:
    command.add_argument("file", metavar="FILE", help="a sequence text; - reads standard input")
    add_times(command)
    add_assume(command)


def show_page(options: argparse.Namespace, lines: Callable[[Report, str], Sequence[Line]]) -> int:
    """The page goes to standard output; it passes no verdict."""
    report = examined(options.file, options)
    return ended(exit_status([report], (NEVER,)), show(lines(report, encoding_of(sys.stdout))))
