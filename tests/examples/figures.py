"""All figures and words of a report as lines, for golden texts."""

from __future__ import annotations

from collections.abc import Iterator

from seqcheck.machine.findings import Duration, Finding, Report
from seqcheck.machine.places import Place


def _time(duration: Duration) -> str:
    return f"{duration.least} .. {duration.typical} .. {duration.greatest}{'' if duration.exact else ' wide'}"


def _place(place: Place | None) -> str:
    return "nowhere" if place is None else f"{place.line}:{place.column}-{place.end_line}:{place.end_column}"


def _told(one: Finding) -> Iterator[str]:
    sure = "certain" if one.certain else "possible"
    yield f"finding {one.kind} {one.severity.value} {sure} at {_place(one.place)}: {one.subject}, {one.step}"
    yield f"  margin {one.margin_us} replayed {one.replayed} accepted {one.accepted}"
    yield f"  {one.message}"
    yield f"  mend: {one.mend}"
    for moment in one.run:
        yield f"  {moment.time_us:>9} {moment.event}"


def lines_of(report: Report) -> Iterator[str]:
    for finding in report.findings:
        yield from _told(finding)
    for assumption in report.assumptions:
        yield f"proved under: {assumption}"
    for name, duration in report.cycles:
        yield f"cycle {name}: {_time(duration)}"
    for name, duration in report.steps:
        yield f"step {name}: {_time(duration)}"
    for way in report.choices:
        yield f"way of {way.sequence} at {_place(way.place)}, {way.way}: {_time(way.duration)}"
    for state in report.states:
        yield f"state {state.number} {state.name}, choice {_place(state.choice)}"
    for run in report.runs:
        yield f"run {run.begin} to {run.end}, {run.way}: {_time(run.duration)}"
    for part in report.critical_path:
        yield f"path {part.event}: at {part.at_us}, {part.least} .. {part.greatest} after what brings it"
    for row in report.handovers:
        yield f"handover {row.valve} {row.from_coil} {row.to_coil} {row.least_gap_us} {row.greatest_overlap_us}"
    for margin in report.margins:
        yield f"margin {margin.kind} {margin.subject} {margin.step} at {_place(margin.place)}: {margin.margin_us}"
