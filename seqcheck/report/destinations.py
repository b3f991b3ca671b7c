"""Which report goes where: pairs of a format and a file, as ``--format`` and ``--output`` stand on the command line.

Takes the two options in the order in which they were given; gives the pairs. Refuses, in words, what is no clear pair.
"""

from __future__ import annotations

import os
from collections.abc import Sequence

from seqcheck.machine.records import record
from seqcheck.report.formats import FOR_PEOPLE

#: One option: its name, and what was written behind it.
Choice = tuple[str, str]
FORMAT = "--format"
OUTPUT = "--output"
_STANDARD = "-"


@record
class Destination:
    """One report; ``output`` is None for standard output."""

    form: str
    output: str | None


def destinations(choices: Sequence[Choice]) -> tuple[Destination, ...] | str:
    """The file behind a format is that format's; where there is but one of each, their order is no matter. A format
    without a file goes to standard output, a file without a format gets the one for people."""
    found: list[Destination] = []
    form: str | None = None
    output: str | None = None
    for option, value in choices:
        if option == FORMAT:
            if form is not None:
                found.append(Destination(form, None))
            form = value
        elif output is not None or (form is None and found):
            return f"{OUTPUT} {value} has no {FORMAT} of its own: write {FORMAT} X {OUTPUT} F for each report"
        else:
            output = value
        if form is not None and output is not None:
            found.append(_destination(form, output))
            form = output = None
    if form is not None or output is not None or not found:
        found.append(_destination(form or FOR_PEOPLE, output))
    return _doubt(found) or tuple(found)


def _destination(form: str, output: str | None) -> Destination:
    return Destination(form, None if output == _STANDARD else output)


def _doubt(found: Sequence[Destination]) -> str | None:
    files = [os.path.realpath(one.output) for one in found if one.output]
    if any(one.output == "" for one in found):
        return f"{OUTPUT} needs the name of a file"
    if sum(one.output is None for one in found) > 1:
        return f"only one report can go to standard output: give the others an {OUTPUT}"
    if len(set(files)) < len(files):
        return f"two reports cannot go to one {OUTPUT}"
    return None
