"""From the names on a command line to the names of texts: folders and patterns become the sequences in them.

Takes names of files, folders and patterns (``*``, ``?``, ``[..]``, and ``**`` for any folders); gives file names in the
order of the names given, those of one folder or pattern sorted, each once. Refuses, with a ``Problem``, a folder or
pattern without any sequence and a folder that cannot be looked into. Hidden folders and files (``.git``, ``.venv``) are
passed over, and links to folders are not followed.
"""

from __future__ import annotations

import glob
import os
from collections.abc import Callable, Iterable, Iterator
from pathlib import Path

from seqcheck.machine.findings import Problem
from seqcheck.machine.places import Place

ENDING = ".steps"
_STANDARD = "-"


def sequences_named(names: Iterable[str]) -> tuple[str | Problem, ...]:
    """The texts that these names stand for. A name that is neither a folder nor a pattern stands for itself, whether
    there is such a file or not: who reads it will say."""
    found: dict[str, str | Problem] = {}
    for name in names:
        for one in _sequences_of(name):
            found.setdefault(str(Path(one)) if isinstance(one, str) else f"{one.place.file}\0", one)
    return tuple(found.values())


def _sequences_of(name: str) -> list[str | Problem]:
    if name == _STANDARD:
        return [name]
    if _is_folder(name):
        return _below(name) or [_none(name, f"there is no *{ENDING} file in this folder or below it")]
    if glob.has_magic(name) and not os.path.lexists(name):
        return _matching(name) or [_none(name, "no sequence text has such a name")]
    return [name]


def _matching(pattern: str) -> list[str | Problem]:
    """Folders that match are looked into. What matches and is no sequence (a timing sheet) is passed over, unless
    that is all that the pattern stands for."""
    matched = sorted(glob.glob(pattern, recursive=True), key=_in_order)
    files: list[str | Problem] = [name for name in matched if not _is_folder(name)]
    found: list[str | Problem] = [name for name in files if isinstance(name, str) and _is_sequence(name)]
    found += [one for name in matched if _is_folder(name) for one in _below(name)]
    return found or files


def _below(folder: str) -> list[str | Problem]:
    refused: list[Problem] = []

    def cannot_look(fault: OSError) -> None:
        where = str(fault.filename or folder)
        refused.append(_none(where, f"the folder cannot be looked into: {fault.strerror or fault}"))

    found = sorted(_walk(folder, cannot_look), key=_in_order)
    return [*found, *sorted(refused, key=lambda problem: problem.place.file)]


def _walk(folder: str, cannot_look: Callable[[OSError], None]) -> Iterator[str]:
    for where, folders, files in os.walk(folder, onerror=cannot_look):
        folders[:] = sorted(one for one in folders if not one.startswith("."))
        for file in files:
            if _is_sequence(file) and not file.startswith("."):
                # Joined so, the name of a file in ``.`` is the same as that of the file alone.
                yield str(Path(where) / file)


def _is_sequence(name: str) -> bool:
    return name.lower().endswith(ENDING)


def _in_order(name: str) -> tuple[str, ...]:
    """The same order on every system: by the names of folders and files, not by what stands between them."""
    return Path(name).parts


def _is_folder(name: str) -> bool:
    try:
        return Path(name).is_dir()
    except (OSError, ValueError):
        return False


def _none(name: str, message: str) -> Problem:
    advice = f"name a folder with sequence texts, or a file; a sequence text ends in {ENDING}"
    return Problem(Place(name, 1, 1, 1, 1), message, None, advice)
