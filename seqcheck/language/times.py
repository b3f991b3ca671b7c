"""Which time counts: layers of settings, the later over the earlier.

Takes the settings of the text and of each sheet, in order; gives the one that won for each device and key.
"""

from __future__ import annotations

from seqcheck.language.problems import Problems
from seqcheck.language.syntax import Edges, Settings, SettingValue
from seqcheck.machine.devices import Stroke
from seqcheck.machine.places import Place
from seqcheck.machine.records import record
from seqcheck.machine.time import Span

CONTROLLER = "controller"


@record
class Entry:
    value: SettingValue
    place: Place


class Times:
    """Settings by section (``valves``) and device; the controller is the device without a name of its section."""

    def __init__(self, problems: Problems) -> None:
        self._problems = problems
        self._table: dict[tuple[str, str], dict[str, Entry]] = {}

    def lay(self, section: str, name: str, settings: Settings) -> None:
        """Put one layer over what is known of a device. ``input`` and ``output`` are kept by edge: ``input on``."""
        entries = self._table.setdefault((section, name), {})
        if section == CONTROLLER:
            self._change_kind(entries, settings)
        for setting in settings:
            if isinstance(setting.value, Edges):
                for edge, span in (("on", setting.value.on), ("off", setting.value.off)):
                    if span is not None:
                        entries[f"{setting.key} {edge}"] = Entry(span, setting.place)
            else:
                entries[setting.key] = Entry(setting.value, setting.place)

    def _change_kind(self, entries: dict[str, Entry], settings: Settings) -> None:
        keys = {setting.key: setting.place for setting in settings}
        if "scan" in keys and keys.keys() & {"task", "run"}:
            place = keys.get("task") or keys["run"]
            self._problems.report(place, "a controller runs by scan or by task, not both", "leave one of them out")
        elif "task" in keys:
            entries.pop("scan", None)

    def entries(self, section: str, name: str) -> dict[str, Entry]:
        return self._table.get((section, name), {})

    def span(self, section: str, name: str, key: str) -> Span | None:
        entry = self.entries(section, name).get(key)
        return entry.value if entry and isinstance(entry.value, Span) else None

    def stroke(self, name: str, key: str) -> Stroke | None:
        entry = self.entries("cylinders", name).get(key)
        return entry.value if entry and isinstance(entry.value, Stroke) else None

    def share(self, name: str, key: str) -> int:
        entry = self.entries("cylinders", name).get(key)
        return entry.value if entry and isinstance(entry.value, int) else 0
