"""Where the findings of a report lie in the part shown, and the critical path through it.

Takes a window with its report; gives events of the window's graph. May add events to the study's graph.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from seqcheck.chart.window import Window
from seqcheck.checks.catalogue import CHECKS
from seqcheck.checks.check import Obligation
from seqcheck.engine.bounds import causes_since, greatest_separations, separation_table
from seqcheck.machine.findings import Finding
from seqcheck.machine.places import Place

_NEVER = -(1 << 60)
_Key = tuple[str, str, str | None, Place]


@dataclass(frozen=True, slots=True)
class Spot:
    """The typical time (of the run) at which a finding lies, and the names of the rows that it could stand at, best
    first: its subject, its step."""

    time: int
    names: tuple[str, ...]


def spots(window: Window, findings: Sequence[Finding]) -> tuple[Spot | None, ...]:
    """For each finding where it lies; None where that is nowhere in the window."""
    stated = _stated(window, findings)
    pairs = [(one.second, one.first) for found in stated.values() for one in found]
    rows = greatest_separations(window.study.trace.graph, pairs)
    found = []
    for finding in findings:
        tightest = min(
            stated.get(_key(finding), ()),
            key=lambda one: -rows[one.second, one.first] - one.least,
            default=None,
        )
        found.append(_at_step(window, finding) if tightest is None else _at(window, finding, tightest))
    return tuple(found)


def _key(finding: Finding) -> _Key:
    return finding.kind, finding.subject, finding.step, finding.place


def _stated(window: Window, findings: Sequence[Finding]) -> dict[_Key, list[Obligation]]:
    """The obligations behind the findings that fall due in the window."""
    wanted = {_key(finding) for finding in findings if finding.margin_us is not None}
    stated: dict[_Key, list[Obligation]] = {}
    for check in CHECKS:
        if any(kind == check.kind for kind, *_ in wanted):
            for one in check.obligations(window.study):
                key = (check.kind, one.subject, one.step, one.place)
                if key in wanted and _shown_time(window, one) is not None:
                    stated.setdefault(key, []).append(one)
    return stated


def _shown_time(window: Window, one: Obligation) -> int | None:
    times = (window.study.time(one.first), window.study.time(one.second))
    return next((time for time in times if window.begin <= time <= window.end), None)


def _at(window: Window, finding: Finding, one: Obligation) -> Spot | None:
    time = _shown_time(window, one)
    return None if time is None else Spot(time, names_of(finding))


def _at_step(window: Window, finding: Finding) -> Spot | None:
    """A finding that holds no times against each other lies where its step begins."""
    for visit in window.study.trace.visits:
        time = window.study.time(visit.entered.event)
        if visit.step.name in (finding.step, finding.subject) and window.begin <= time < window.end:
            return Spot(time, names_of(finding))
    return None


def names_of(finding: Finding) -> tuple[str, ...]:
    """What a finding is about: its subject, and its step."""
    return tuple(name for name in (finding.subject, finding.step) if name)


def critical_events(window: Window) -> tuple[int, ...]:
    """The chain of causes that makes the first shown cycle as long as it can be, in the order of time."""
    if window.cycle is None:
        return ()
    return tuple(reversed(list(_backwards(window, *window.cycle))))


def _backwards(window: Window, start: int, end: int) -> Iterator[int]:
    graph = window.study.trace.graph
    members = causes_since(graph, graph.common_dominator(start, end), {start, end})
    column = separation_table(graph, members, [start])[:, 0].tolist()
    latest = dict(zip(members, column, strict=True))
    event = end
    while True:
        yield event
        if event == start or not graph.arcs[event]:
            return
        arc = max(graph.arcs[event], key=lambda arc: latest.get(arc.cause, _NEVER) + arc.span.greatest)
        if arc.cause not in latest:
            return
        event = arc.cause
