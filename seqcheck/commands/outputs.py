"""Which files a command may write: none that it reads.

Takes the names of outputs and of inputs; gives, in words, why they make no sense together, None where they do.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from pathlib import Path

from seqcheck.arguments import STANDARD
from seqcheck.machine.findings import Report
from seqcheck.report.destinations import Destination


def refused(files: Sequence[str], inputs: Sequence[str], wanted: Sequence[Destination]) -> str | None:
    """Why these arguments make no sense together."""
    if files.count(STANDARD) > 1:
        return "standard input (-) can be read only once"
    outputs = [one.output for one in wanted if one.output]
    return next(filter(None, (overwriting(output, inputs) for output in outputs)), None)


def overwriting(output: str, inputs: Iterable[str]) -> str | None:
    return f"--output would overwrite an input: {output}" if any(_same_file(output, one) for one in inputs) else None


def read_for(files: Sequence[str], reports: Sequence[Report]) -> Iterator[str]:
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
