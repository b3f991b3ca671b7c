"""Which report of a stored run belongs to which text: the run may have been made in another folder.

Takes file names; gives the number of the stored one for each text, None where there is none.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Sequence
from pathlib import PurePosixPath

_Parts = tuple[str, ...]


def matched(given: Sequence[str], relative: Sequence[str], stored: Sequence[str]) -> list[int | None]:
    """``given`` are the texts' names as they were asked for, ``relative`` the same ones below their folder. A stored
    name that is the given one belongs to it; else one that ends in the relative name, folder for folder. Each stored
    one is taken once, by the text that shares most folders with it."""
    by_name = {_parts(name): number for number, name in reversed(list(enumerate(stored)))}
    by_ending: dict[_Parts, list[int]] = defaultdict(list)
    for number, name in enumerate(stored):
        parts = _parts(name)
        for start in range(len(parts)):
            by_ending[parts[start:]].append(number)
    chosen: list[int | None] = [by_name.get(_parts(name)) for name in given]
    taken = set(chosen)
    for text in sorted(range(len(given)), key=lambda text: -len(_parts(relative[text]))):
        free = [number for number in by_ending.get(_parts(relative[text]), ()) if number not in taken]
        if chosen[text] is None and free:
            chosen[text] = min(free, key=lambda number: (len(_parts(stored[number])), number))
            taken.add(chosen[text])
    return chosen


def _parts(name: str) -> _Parts:
    """A stored name may come from a system that parts folders with ``\\``."""
    return PurePosixPath(name.replace("\\", "/")).parts
