"""Having texts examined as the options say, with a sign of life on a terminal."""

from __future__ import annotations

import argparse
import sys
from collections.abc import Sequence
from functools import partial

from seqcheck.machine.findings import Report
from seqcheck.report.progress import working_on, working_through


def examined(file: str, options: argparse.Namespace, brief: bool = False) -> Report:
    """One text; ``--reserve`` is 0 where the command has no such option."""
    from seqcheck.pipeline import examine

    with working_on(file, sys.stderr):
        return examine(file, options.times, getattr(options, "reserve", 0), brief)


def all_examined(texts: Sequence[str], options: argparse.Namespace, brief: bool = False) -> Sequence[Report]:
    """In the order of the texts, in as many processes as ``--jobs`` allows."""
    if len(texts) == 1:
        return [examined(texts[0], options, brief)]
    from seqcheck.pipeline import examine
    from seqcheck.workers import examine_all

    with working_through(len(texts), sys.stderr) as advance:
        one = partial(examine, sheets=tuple(options.times), reserve_us=options.reserve, brief=brief)
        return examine_all(texts, one, options.jobs, advance)
