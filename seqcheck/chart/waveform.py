"""The chart as a value change dump (VCD, IEEE 1364-2005, clause 18) for waveform viewers.

Takes a chart; gives its line at typical times, or that of one run. Time 0 is the beginning of the part shown. Coils,
outputs, sensors, signals, flags and steps are wires; a valve is two bits, 10 for ``a`` (of a 2/2 valve: open), 01 for
the centre, 00 for ``b`` (closed) and x while it shifts or stands between; a cylinder is a real, its stroke in per cent
at every event.
"""

from __future__ import annotations

import re
from collections.abc import Iterator

from seqcheck import __version__
from seqcheck.chart.model import HIGH, LOW, MIDDLE, Chart, Row, RowKind
from seqcheck.machine.records import record
from seqcheck.machine.time import WHOLE_SHARE

#: What a code is made of: what the standard allows, less what begins a time or a keyword.
_CODE = "".join(chr(code) for code in range(33, 127) if chr(code) not in "#$")
_BITS = {HIGH: "10", MIDDLE: "01", LOW: "00"}
_SHIFTING = "xx"
_NOT_IN_A_NAME = re.compile(r"[^!-~]|[$#]")


@record
class _Variable:
    """``declared``: kind and size. ``changes``: (microseconds from the beginning, value as written)."""

    scope: str
    name: str
    declared: str
    code: str
    first: str
    changes: tuple[tuple[int, str], ...]


def vcd(chart: Chart) -> str:
    variables = list(_variables(chart))
    lines = [
        f"$version seqcheck {__version__} $end",
        f"$comment {_comment(chart)} $end",
        "$timescale 1 us $end",
        *_declarations(variables),
        "$enddefinitions $end",
        "#0",
        "$dumpvars",
        *(variable.first for variable in variables),
        "$end",
        *_value_changes(variables, chart.end_us - chart.begin_us),
    ]
    return "\n".join(lines) + "\n"


def _comment(chart: Chart) -> str:
    """In ASCII, and without anything that could end it."""
    valves = "valves: 10 is a (2/2: open), 01 centre, 00 b (2/2: closed), xx shifting or between"
    words = f"{chart.machine}: {chart.title}; {valves}; cylinders in per cent"
    return words.encode("ascii", "replace").decode("ascii").replace("$", "?")


def _declarations(variables: list[_Variable]) -> Iterator[str]:
    scope = None
    for variable in variables:
        if variable.scope != scope:
            if scope is not None:
                yield "$upscope $end"
            scope = variable.scope
            yield f"$scope module {scope} $end"
        yield f"$var {variable.declared} {variable.code} {variable.name} $end"
    if scope is not None:
        yield "$upscope $end"


def _value_changes(variables: list[_Variable], end: int) -> Iterator[str]:
    """In order of time, for equal times in that of the variables; only what really changes, but the last of several
    values at one time."""
    by_time: dict[int, dict[str, str]] = {}
    for variable in variables:
        for time, value in variable.changes:
            by_time.setdefault(time, {})[variable.code] = value
    current = {variable.code: variable.first for variable in variables}
    written = 0
    for time in sorted(by_time):
        changed = {code: value for code, value in by_time[time].items() if current[code] != value}
        current.update(changed)
        if changed and time > 0:
            yield f"#{time}"
            written = time
        yield from changed.values()
    if end > written:
        yield f"#{end}"


def _variables(chart: Chart) -> Iterator[_Variable]:
    """Steps first, then devices in the order of the chart, kind by kind (a scope has its variables together)."""
    codes = _codes()
    names: set[tuple[str, str]] = set()
    kinds = list(RowKind)
    for row in sorted(chart.rows, key=lambda row: kinds.index(row.kind)):
        if row.kind is RowKind.STEPS:
            for step in dict.fromkeys(band.step for band in row.bands):
                name = _unused(names, "steps", step)
                yield _step(chart, row, step, name, next(codes))
        else:
            scope = f"{row.kind.value}s"
            yield _device(chart, row, scope, _unused(names, scope, row.name), next(codes))


def _codes() -> Iterator[str]:
    """Codes of one character, then of two, and so on."""
    length = 1
    while True:
        yield from _words(length)
        length += 1


def _words(length: int) -> Iterator[str]:
    if length == 0:
        yield ""
        return
    for before in _words(length - 1):
        for letter in _CODE:
            yield before + letter


def _unused(names: set[tuple[str, str]], scope: str, wanted: str) -> str:
    """A reference that only holds printable ASCII; letters beyond are spelled by their numbers."""
    name = _NOT_IN_A_NAME.sub(lambda letter: f"_u{ord(letter.group()):04x}_", wanted)
    if name[:1].isdigit():
        name = f"_{name}"
    while (scope, name) in names:
        name = f"{name}_"
    names.add((scope, name))
    return name


def _step(chart: Chart, row: Row, step: str, name: str, code: str) -> _Variable:
    """A step that is left and entered at the same time stays active."""
    active: dict[int, int] = {}
    for band in row.bands:
        if band.step == step:
            for edge, by in ((band.begin, 1), (band.end, -1)):
                if edge is not None:
                    time = edge.typical_us - chart.begin_us
                    active[time] = active.get(time, 0) + by
    level = sum(1 for band in row.bands if band.step == step and band.begin is None)
    first, changes = level, []
    for time in sorted(active):
        level += active[time]
        changes.append((time, f"{min(level, 1)}{code}"))
    return _Variable("steps", name, "wire 1", code, f"{min(first, 1)}{code}", tuple(changes))


def _device(chart: Chart, row: Row, scope: str, name: str, code: str) -> _Variable:
    write = {RowKind.VALVE: _valve_value, RowKind.CYLINDER: _stroke_value}.get(row.kind, _bit_value)
    declared = {RowKind.VALVE: "wire 2", RowKind.CYLINDER: "real 64"}.get(row.kind, "wire 1")
    levels = list(_levels(chart, row))
    changes = tuple((time, write(level, code)) for time, level in levels)
    reference = f"{name} [1:0]" if row.kind is RowKind.VALVE else name
    return _Variable(scope, reference, declared, code, write(row.begin_level, code), changes)


def _levels(chart: Chart, row: Row) -> Iterator[tuple[int, int]]:
    """A valve that sets out is between two positions until it reaches one."""
    for number, edge in enumerate(row.edges):
        following = row.edges[number + 1].level if number + 1 < len(row.edges) else row.end_level
        shifting = row.kind is RowKind.VALVE and following != edge.level
        yield edge.typical_us - chart.begin_us, -1 if shifting else edge.level


def _bit_value(level: int, code: str) -> str:
    return f"{1 if level else 0}{code}"


def _valve_value(level: int, code: str) -> str:
    return f"b{_BITS.get(level, _SHIFTING)} {code}"


def _stroke_value(level: int, code: str) -> str:
    whole, part = divmod(level * 100, WHOLE_SHARE)
    return f"r{whole}.{part * 1_000_000 // WHOLE_SHARE:06d}".rstrip("0").rstrip(".") + f" {code}"
