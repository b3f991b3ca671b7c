"""Times that stand in where nobody gives one.

Takes the name of a medium; gives the ordinary times of its sheet by section and kind of device, and keeps which of
them were taken.
"""

from __future__ import annotations

from collections.abc import Mapping
from functools import cache

from seqcheck.language.ordinary import ordinary_times
from seqcheck.language.problems import Problems
from seqcheck.language.syntax import Edges, SettingValue
from seqcheck.language.times import CONTROLLER
from seqcheck.machine.assumed import AssumedTime
from seqcheck.machine.devices import Stroke
from seqcheck.machine.places import Place
from seqcheck.machine.time import Span

ANY = "any"


class AssumedTimes:
    """The ordinary times of a medium; none at all where it is None."""

    def __init__(self, medium: str | None) -> None:
        self.medium = medium
        self._taken: dict[tuple[str | None, str], AssumedTime] = {}

    @property
    def taken(self) -> tuple[AssumedTime, ...]:
        """In the order in which they were asked for."""
        return tuple(self._taken.values())

    def take(self, section: str, kind: str, key: str, device: str | None, place: Place | None) -> Span | None:
        """The ordinary time ``key`` of a kind of device, which ``device`` rests on from now on."""
        if self.medium is None:
            return None
        value = _table(self.medium).get((section, kind, key))
        if value is None:
            return None
        self._taken.setdefault((device, key), AssumedTime(device, key, self.medium, place))
        return value.time if isinstance(value, Stroke) else value.on if isinstance(value, Edges) else _span(value)


def _span(value: SettingValue) -> Span:
    assert isinstance(value, Span)
    return value


@cache
def _table(medium: str) -> Mapping[tuple[str, str, str], SettingValue]:
    from seqcheck.language.sheets import read_sheet  # PyYAML takes long to load, and most texts have all their times.

    problems = Problems()
    entries = read_sheet(ordinary_times(medium), problems)
    assert not len(problems), problems.sorted()
    return {
        (entry.section, entry.name.text if entry.section != CONTROLLER else ANY, setting.key): setting.value
        for entry in entries
        for setting in entry.settings
    }
