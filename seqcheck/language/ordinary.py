"""Sheets of ordinary times, which come with the package.

Takes the name of one, ``assume:air``; gives its text. It goes by this name wherever a timing sheet may be named; its
times stand in only where neither the text nor any other sheet gives one.
"""

from __future__ import annotations

from collections.abc import Iterable
from pathlib import Path

from seqcheck.language.source import Source

PREFIX = "assume:"
MEDIA = ("air", "oil")

_FOLDER = Path(__file__).resolve().parent / "ordinary"


def medium_of(sheet: str) -> str | None:
    """``air`` for ``assume:air``; None for the name of a file."""
    medium = sheet.removeprefix(PREFIX)
    return medium if sheet.startswith(PREFIX) and medium in MEDIA else None


def first_medium(sheets: Iterable[str]) -> str | None:
    return next((medium for sheet in sheets if (medium := medium_of(sheet)) is not None), None)


def ordinary_times(medium: str) -> Source:
    """The sheet of one of ``MEDIA``."""
    return Source(f"{PREFIX}{medium}", (_FOLDER / f"{medium}.yaml").read_text(encoding="utf-8"))
