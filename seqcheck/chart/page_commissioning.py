"""The table that is filled in at the machine: for each move what it may take, and room for what it took.

Takes a machine and the times of its moves; gives the markup of the table, NOTHING where nothing moves. All times are
in milliseconds.
"""

from __future__ import annotations

from collections.abc import Sequence

from seqcheck.chart.page_markup import NOTHING, Column, Markup, blank, figures, name, names, table, text, words
from seqcheck.chart.page_moves import Move, MoveTimes
from seqcheck.chart.page_tables import figures_of
from seqcheck.compare.spelling import spelled_watchdog
from seqcheck.language.durations import format_duration
from seqcheck.machine.model import Machine, steps_of
from seqcheck.machine.steps import Step

MEANING = (
    "From the coil switching to the input of the sensor that ends the move (without one: to the end of the stroke, or"
    " the position of the valve), in milliseconds, for all runs within the tolerances. The watchdog counts from the"
    " start of its step. A measured time outside least and greatest belongs into the timing sheet: then check again."
)

_COLUMNS: tuple[Column, ...] = (
    names("step"),
    names("device"),
    words("move"),
    names("from coil"),
    names("to sensor"),
    figures("least"),
    figures("typical"),
    figures("greatest"),
    figures("watchdog"),
    blank("measured"),
    blank("initials"),
)
_CUT_SHORT = (text("cut short"), NOTHING, NOTHING)


def commissioning_table(machine: Machine, moves: MoveTimes) -> Markup:
    """A row for each move, in the order of the text."""
    steps = {step.name: step for sequence in machine.sequences for step in steps_of(sequence)}
    spans = iter(figures_of([time for _, time in moves if time is not None]))
    rows = [_row(machine, steps, move, _CUT_SHORT if time is None else next(spans)) for move, time in moves]
    return table(_COLUMNS, rows) if rows else NOTHING


def _row(machine: Machine, steps: dict[str, Step], move: Move, span: Sequence[Markup]) -> list[Markup]:
    device = machine.cylinders.get(move.device) or machine.valves[move.device]
    return [
        _over(name(move.step), _small(steps[move.step].label)),
        _over(name(move.device), _small(device.label)),
        text(move.way),
        _over(_switching(move.coil, move.energized), _small(machine.coils[move.coil].address)),
        _sensor(machine, steps, move),
        *span,
        _watchdog(machine, steps, move),
        NOTHING,
        NOTHING,
    ]


def _sensor(machine: Machine, steps: dict[str, Step], move: Move) -> Markup:
    if move.sensor is not None:
        source = machine.sensors.get(move.sensor) or machine.signals[move.sensor]
        return _over(_switching(move.sensor, move.sensor_on), _small(source.address))
    dwell = steps[move.step].dwell
    return _over(text("none"), text("" if dwell is None else f"dwell {format_duration(dwell)}"))


def _watchdog(machine: Machine, steps: dict[str, Step], move: Move) -> Markup:
    watchdog = steps[move.waiting].watchdog
    if watchdog is None or (move.device in machine.valves and move.sensor is None):
        return text("none")
    own = NOTHING if move.waiting == move.step else _small(move.waiting)
    return _over(text(spelled_watchdog(watchdog)), own)


def _switching(device: str, on: bool) -> Markup:
    return Markup(f"{name(device)} {text('on' if on else 'off')}")


def _small(label: str | None) -> Markup:
    return name(label) if label else NOTHING


def _over(main: Markup, below: Markup) -> Markup:
    """``below`` in small letters under the other, where there is any."""
    return Markup(f"{main}<br/><small>{below}</small>") if below else main
