"""``seqcheck margins``: how far each thing is from breaking, and the handovers between coils."""

from __future__ import annotations

import argparse

from seqcheck.arguments import SAFETY
from seqcheck.commands.pages import add_page_arguments, show_page

EPILOG = SAFETY
add_arguments = add_page_arguments


def run(options: argparse.Namespace) -> int:
    from seqcheck.report.tables import margins_lines

    return show_page(options, margins_lines)
