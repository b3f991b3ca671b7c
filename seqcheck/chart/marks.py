"""Where the findings of a report lie in the part shown, and the critical path through it.

Takes a window with its report; gives events of the window's graph. May add events to the study's graph.
"""

from __future__ import annotations

from collections.abc import Sequence

from seqcheck.chart.window import Window
from seqcheck.checks.catalogue import CHECKS
from seqcheck.checks.check import Obligation
from seqcheck.checks.times import critical_chain
from seqcheck.engine.bounds import greatest_separations
from seqcheck.engine.conditions import aspect_of
from seqcheck.machine.conditions import Condition, terms_of
from seqcheck.machine.findings import Finding
from seqcheck.machine.places import Place
from seqcheck.machine.records import record
from seqcheck.machine.rules import CycleLimit, Never, PathLimit, Rule

_Key = tuple[str, str, str | None, Place]


@record
class Spot:
    """The typical time (of the run) at which a finding lies, and the names of the rows that it could stand at, best
    first: its subject, its step."""

    time: int
    names: tuple[str, ...]


def spots(window: Window, findings: Sequence[Finding]) -> tuple[Spot | None, ...]:
    """For each finding where it lies; None where that is nowhere in the window."""
    stated = _stated(window, findings)
    return tuple(_spot(window, finding, stated.get(_key(finding), ())) for finding in findings)


def _spot(window: Window, finding: Finding, stated: Sequence[Obligation]) -> Spot | None:
    if finding.margin_us is None:
        return _at_step(window, finding)
    return _at(window, finding, stated[_tightest(window, stated)]) if stated else None


def _tightest(window: Window, stated: Sequence[Obligation]) -> int:
    """By number, the first of the tightest. Plain intervals mostly show it, and that the others need no look."""
    graph = window.study.trace.graph
    tightest: tuple[int, int] | None = None
    for least in sorted((one.least_margin(graph), number) for number, one in enumerate(stated)):
        if tightest is not None and tightest < least:
            break
        number = least[1]
        here = _margin(window, stated[number]), number
        tightest = here if tightest is None else min(tightest, here)
    assert tightest is not None
    return tightest[1]


def _margin(window: Window, one: Obligation) -> int:
    """Whatever the order of events that is in question."""
    graph = window.study.trace.graph
    with graph.not_assuming(one.assumed):
        rows = greatest_separations(graph, [(second, first) for first, second in one.pairs])
    return one.margin(rows)


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
    """What a rule forbids lies where the last of its parts comes."""
    rule = next((rule for rule in window.study.machine.rules if rule.place == finding.place), None)
    if isinstance(rule, Never):
        begin = max((second for _, second in one.pairs), key=window.study.time)
        time = window.study.time(begin)
        if window.begin <= time <= window.end:
            return Spot(time, _parts_of(window, rule.condition, begin))
    shown = _shown_time(window, one)
    if shown is None:
        return None
    if isinstance(rule, PathLimit):
        return Spot(shown, (*_parts_of(window, rule.end, one.first), *_parts_of(window, rule.start, one.second)))
    return Spot(shown, (rule.sequence,) if isinstance(rule, CycleLimit) else names_of(finding))


def _parts_of(window: Window, condition: Condition, event: int) -> tuple[str, ...]:
    """What a condition is about; first of all what changes by the event."""
    changes = window.study.trace.changes
    terms = list(terms_of(condition))
    own = [term for term in terms if any(one.event == event for one in changes.get(aspect_of(term), ()))]
    return tuple(dict.fromkeys(term.subject for term in (*own, *terms)))


def _at_step(window: Window, finding: Finding) -> Spot | None:
    """A finding that holds no times against each other lies where its step begins."""
    for visit in window.study.trace.visits:
        time = window.study.time(visit.entered.event)
        if visit.step.name in (finding.step, finding.subject) and window.begin <= time < window.end:
            return Spot(time, names_of(finding))
    return None


def names_of(finding: Finding, rules: Sequence[Rule] = ()) -> tuple[str, ...]:
    """What a finding is about: its subject, and its step; of a rule what that looks at."""
    for rule in rules:
        if rule.place == finding.place:
            match rule:
                case Never(condition):
                    return tuple(term.subject for term in terms_of(condition))
                case CycleLimit(sequence):
                    return (sequence,)
                case PathLimit(start, end):
                    return tuple(term.subject for one in (end, start) for term in terms_of(one))
    return tuple(name for name in (finding.subject, finding.step) if name)


def critical_events(window: Window) -> tuple[int, ...]:
    """The chain of causes that makes the first shown cycle as long as it can be, in the order of time."""
    if window.cycle is None:
        return ()
    return tuple(link.event for link in critical_chain(window.study, *window.cycle))
