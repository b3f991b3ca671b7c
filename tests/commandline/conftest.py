"""The command line against examinations made by hand: what the engine finds is tested elsewhere."""

from __future__ import annotations

import sys
from collections.abc import Callable, Sequence
from types import ModuleType

import pytest

from seqcheck.machine.findings import Report
from tests.report.samples import healthy, no_watchdog, short_pulse, unreadable

Asked = list[tuple[str, tuple[str, ...]]]


@pytest.fixture
def asked(monkeypatch: pytest.MonkeyPatch) -> Asked:
    """Every examination that the command asked for; what it finds hangs on the name of the file."""
    calls: Asked = []
    outcomes: dict[str, Callable[[], Report]] = {
        "healthy": healthy,
        "noted": lambda: healthy(no_watchdog()),
        "warned": lambda: healthy(short_pulse(severity=_severity("warning"))),
        "broken": lambda: healthy(short_pulse()),
        "unreadable": unreadable,
    }

    def examine(name: str, sheets: Sequence[str], reserve_us: int = 0, brief: bool = False) -> Report:
        calls.append((name, tuple(sheets)))
        return outcomes[name.rpartition("/")[2].partition(".")[0]]()

    module = ModuleType("seqcheck.pipeline")
    module.examine = examine  # type: ignore[attr-defined]
    monkeypatch.setitem(sys.modules, "seqcheck.pipeline", module)
    return calls


def _severity(value: str) -> object:
    from seqcheck.machine.findings import Severity

    return Severity(value)
