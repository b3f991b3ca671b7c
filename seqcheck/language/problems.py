"""Collects what is wrong with a text and its sheets.

Takes places and sentences; gives sorted ``Problem`` records, each with its line of text.
"""

from __future__ import annotations

import difflib
from bisect import bisect_right
from collections.abc import Iterable

from seqcheck.machine.findings import Problem
from seqcheck.machine.places import Place

_LONGEST_SHOWN = 40
_MOST_PROBLEMS = 200
_MOST_GUESSES = 50
_MOST_CANDIDATES = 2_000


class Ruler:
    """Turns offsets into places. ``line`` and ``column`` are where the text begins in its file."""

    def __init__(self, file: str, text: str, line: int = 1, column: int = 1) -> None:
        self.file = file
        self.text = text
        self._first_line = line
        self._first_column = column
        self._starts = [0]
        start = text.find("\n")
        while start >= 0:
            self._starts.append(start + 1)
            start = text.find("\n", start + 1)

    def place(self, start: int, end: int) -> Place:
        starts = self._starts
        row = bisect_right(starts, start) - 1
        last = row
        if row + 1 < len(starts) and starts[row + 1] <= end:
            last = bisect_right(starts, end) - 1
        column, end_column = start - starts[row], max(start, end) - starts[last]
        return Place(
            self.file,
            self._first_line + row,
            column + (1 if row else self._first_column),
            self._first_line + last,
            end_column + (1 if last else self._first_column),
        )


class Problems:
    """The problems met so far. ``files`` are the texts read, in the order of reading."""

    def __init__(self) -> None:
        self._met: list[Problem] = []
        self._files: dict[str, list[str]] = {}
        self._guesses = 0

    def __len__(self) -> int:
        return len(self._met)

    def opened(self, file: str, text: str) -> None:
        """Remember a text, for its lines and for the order of files."""
        self._files[file] = text.split("\n")

    def report(self, place: Place, message: str, advice: str | None = None) -> None:
        self._met.append(Problem(place, message, None, advice))

    def add(self, problem: Problem) -> None:
        self._files.setdefault(problem.place.file, [])
        self._met.append(problem)

    def near(self, name: str, candidates: Iterable[str]) -> str | None:
        """The candidate that was probably meant. The work is bounded, however many names there are."""
        self._guesses += 1
        if self._guesses > _MOST_GUESSES or len(name) > _LONGEST_SHOWN:
            return None
        close = [known for known in candidates if abs(len(known) - len(name)) <= 3][:_MOST_CANDIDATES]
        same = [known for known in close if known.casefold() == name.casefold()]
        return next(iter(same or difflib.get_close_matches(name, close, 1, 0.6)), None)

    def did_you_mean(self, name: str, candidates: Iterable[str], otherwise: str | None = None) -> str | None:
        """Advice for an unknown name."""
        near = self.near(name, candidates)
        return f"did you mean {near}?" if near else otherwise

    def sorted(self) -> tuple[Problem, ...]:
        """All of them, by file in the order of reading, then by place; each with its line of text."""
        order = {file: number for number, file in enumerate(self._files)}
        unique = dict.fromkeys(self._met)
        ranked = sorted(unique, key=lambda problem: (order.get(problem.place.file, len(order)), problem.place))
        return tuple(self._with_line(problem) for problem in ranked[:_MOST_PROBLEMS])

    def _with_line(self, problem: Problem) -> Problem:
        lines = self._files.get(problem.place.file, [])
        if problem.source is not None or not 1 <= problem.place.line <= len(lines):
            return problem
        line = lines[problem.place.line - 1].rstrip("\r")
        return Problem(problem.place, problem.message, line, problem.advice)


def short(name: str) -> str:
    """A name as a message shows it."""
    return name if len(name) <= _LONGEST_SHOWN else name[: _LONGEST_SHOWN - 3] + "..."
