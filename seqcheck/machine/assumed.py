"""Times that nobody gave, taken from a sheet of ordinary ones."""

from __future__ import annotations

from seqcheck.machine.places import Place
from seqcheck.machine.records import record


@record
class AssumedTime:
    """``device`` is the name of a valve, a cylinder or an island, None for the controller; ``key`` is the word that
    would give the time (``extend``); ``medium`` names the sheet (``air``). ``place`` is the device's, None where the
    text says nothing of a controller."""

    device: str | None
    key: str
    medium: str
    place: Place | None
