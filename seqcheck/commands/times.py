"""``seqcheck times``: cycle time, the times of each step, the critical path."""

from __future__ import annotations

import argparse

from seqcheck.arguments import SAFETY
from seqcheck.commands.pages import add_page_arguments, show_page

EPILOG = SAFETY
add_arguments = add_page_arguments


def run(options: argparse.Namespace) -> int:
    from seqcheck.report.tables import times_lines

    return show_page(options, times_lines)
