"""The tables of the HTML report: times, critical path, margins, handovers, devices.

Takes a report and its machine; gives the markup of each table, NOTHING where there is nothing to put into it. All
times are in milliseconds.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from seqcheck.chart.page_markup import NOTHING, Column, Markup, figures, name, names, table, text, words
from seqcheck.compare.spelling import spelled_condition, spelled_share, spelled_watchdog
from seqcheck.language.durations import format_duration
from seqcheck.machine.devices import FollowingSignal, OnConditions, OnValve, Signal
from seqcheck.machine.findings import Duration, Handover, Report
from seqcheck.machine.model import Machine, steps_of
from seqcheck.machine.steps import Step
from seqcheck.report.amounts import BOUNDS, decimals_of, marks_of, milliseconds
from seqcheck.report.summary import accepted_margins

NEVER_LEFT = "never left"
_SPAN = (figures("least"), figures("typical"), figures("greatest"))

_Device = tuple[str, str, str | None, str | None, str]


def figures_of(times: Sequence[Duration]) -> list[list[Markup]]:
    """Least, typical and greatest of each, all with the same count of decimals."""
    rows = [(time.least, time.typical, time.greatest) for time in times]
    decimals = decimals_of([figure for row in rows for figure in row])
    return [[text(figure) for figure in milliseconds(row, decimals)] for row in rows]


def cycles_table(report: Report) -> Markup:
    times = [time for _, time in report.cycles]
    marks = marks_of(times)
    rows = [
        [name(sequence), *span, *map(text, mark)]
        for (sequence, _), span, mark in zip(report.cycles, figures_of(times), marks, strict=True)
    ]
    return table((names("sequence"), *_SPAN, *_bounds(marks)), rows) if rows else NOTHING


def choices_table(report: Report) -> Markup:
    """The cycles in which a choice takes one of its branches."""
    decimals = decimals_of([time for one in report.choices for time in (one.duration.least, one.duration.greatest)])
    marks = marks_of([one.duration for one in report.choices])
    rows = [
        [
            name(one.sequence),
            text(one.way),
            *map(text, milliseconds((one.duration.least, one.duration.greatest), decimals)),
            *map(text, mark),
        ]
        for one, mark in zip(report.choices, marks, strict=True)
    ]
    columns = (names("sequence"), words("where the choice takes"), figures("least"), figures("greatest"))
    return table((*columns, *_bounds(marks)), rows) if rows else NOTHING


def steps_table(report: Report, machine: Machine) -> Markup:
    """Each step from the read that enters it to the read that leaves it; one that no run leaves has no times."""
    steps, times = [step for step, _ in report.steps], [time for _, time in report.steps]
    marks = marks_of(times)
    spans = {step: [*span, *map(text, mark)] for step, span, mark in zip(steps, figures_of(times), marks, strict=True)}
    bounds = _bounds(marks)
    never = [text(NEVER_LEFT), NOTHING, NOTHING, *(NOTHING for _ in bounds)]
    columns = (names("step"), words("what it does"), *_SPAN, *bounds, figures("watchdog"), words("is left"))
    rows = [
        [name(step.name), _doing(step), *spans.get(step.name, never), _watchdog(step), text(_left(step))]
        for sequence in machine.sequences
        for step in steps_of(sequence)
    ]
    return table(columns, rows) if rows else NOTHING


def _bounds(marks: Sequence[tuple[str, ...]]) -> tuple[Column, ...]:
    return (words(BOUNDS),) if any(marks) else ()


def critical_path_table(report: Report) -> Markup:
    figures_ = [(part.at_us, part.least, part.greatest) for part in report.critical_path]
    decimals = decimals_of([figure for row in figures_ for figure in row])
    rows = [
        [*map(text, milliseconds(row, decimals)), text(part.event)]
        for row, part in zip(figures_, report.critical_path, strict=True)
    ]
    columns = (figures("at the latest"), figures("delay"), figures("up to"), words("event"))
    return table(columns, rows) if rows else NOTHING


def margins_table(report: Report) -> Markup:
    """Tightest first; what is accepted is marked, in a column that is there only then."""
    accepted = accepted_margins(report)
    ordered = sorted(report.margins, key=lambda margin: (margin.margin_us is None, margin.margin_us or 0))
    amounts = milliseconds([margin.margin_us for margin in ordered])
    columns = [figures("left"), words("kind"), names("of"), names("step"), figures("line")]
    columns += [words("accepted")] if accepted else []
    rows = [
        [text(amount), text(one.kind), name(one.subject), name(one.step or ""), text(str(one.place.line))]
        + ([text("yes" if one in accepted else "")] if accepted else [])
        for amount, one in zip(amounts, ordered, strict=True)
    ]
    return table(columns, rows) if rows else NOTHING


def handovers_table(handovers: Sequence[Handover]) -> Markup:
    gaps = milliseconds([one.least_gap_us for one in handovers])
    overlaps = milliseconds([one.greatest_overlap_us for one in handovers])
    columns = (
        names("valve"),
        names("from coil"),
        names("to coil"),
        figures("least gap"),
        figures("greatest overlap"),
        figures("line"),
    )
    rows = [
        [name(one.valve), name(one.from_coil), name(one.to_coil), text(gap), text(overlap), text(str(one.place.line))]
        for one, gap, overlap in zip(handovers, gaps, overlaps, strict=True)
    ]
    return table(columns, rows) if rows else NOTHING


def devices_table(machine: Machine) -> Markup:
    columns = (names("tag"), words("what"), names("address"), words("label"), words("belongs to"))
    rows = [
        [name(tag), text(what), name(address or ""), name(label or ""), text(belongs)]
        for tag, what, address, label, belongs in _devices(machine)
    ]
    return table(columns, rows) if rows else NOTHING


def _doing(step: Step) -> Markup:
    return name(step.label) if step.label else text(", ".join(_moves(step)))


def _watchdog(step: Step) -> Markup:
    return text(spelled_watchdog(step.watchdog)) if step.watchdog else NOTHING


def _moves(step: Step) -> Iterator[str]:
    for move in step.moves:
        yield f"{move.cylinder} {'out' if move.out else 'in'}"


def _left(step: Step) -> str:
    parts = [f"dwell {format_duration(step.dwell)}"] if step.dwell is not None else []
    if step.until is not None:
        steady = "" if step.steady is None else f" steady {format_duration(step.steady)}"
        parts.insert(0, f"until {spelled_condition(step.until)}{steady}")
    return ", ".join(parts) or "after one round"


def _devices(machine: Machine) -> Iterator[_Device]:
    """Valves with their coils and cylinders with their sensors, as they belong together; then everything else."""
    for valve in machine.valves.values():
        yield valve.name, f"valve {valve.ports}/{valve.positions} {valve.kind.value}", None, valve.label, ""
        for coil in (machine.coils[one] for one in valve.coils):
            yield coil.name, "coil", coil.address, coil.label, f"{valve.name}, to {coil.to.value}{_via(coil.via)}"
    for output in machine.outputs.values():
        yield output.name, "output", output.address, output.label, _via(output.via).removeprefix(", ")
    for cylinder in machine.cylinders.values():
        yield cylinder.name, "cylinder", None, cylinder.label, _driven(cylinder.drive)
        for sensor in (machine.sensors[one] for one in cylinder.sensors):
            at = f"{cylinder.name}, {_range(sensor.low, sensor.high)}{_via(sensor.via)}"
            yield sensor.name, "sensor", sensor.address, sensor.label, at
    for signal in machine.signals.values():
        yield signal.name, "signal", signal.address, signal.label, _follows(signal)
    for flag in machine.flags.values():
        yield flag.name, "flag", None, flag.label, ""
    for island in machine.islands.values():
        yield island.name, "remote I/O", None, island.label, ""


def _follows(signal: Signal) -> str:
    return f"follows {spelled_condition(signal.follows)}" if isinstance(signal, FollowingSignal) else "from outside"


def _driven(drive: OnValve | OnConditions) -> str:
    if isinstance(drive, OnValve):
        return f"{drive.valve}, reversed" if drive.reverse else drive.valve
    return f"out when {spelled_condition(drive.out)}, in when {spelled_condition(drive.back)}"


def _via(island: str | None) -> str:
    return "" if island is None else f", via {island}"


def _range(low: int, high: int) -> str:
    return f"at {spelled_share(low)}" if low == high else f"at {spelled_share(low)} to {spelled_share(high)}"
