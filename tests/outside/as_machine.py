"""A network of activities as a machine: each activity a stroke that begins once those before it have ended.

Takes activities with their times in milliseconds and the names of those before them; gives the report on a sequence
that runs once. The controller is ideal and the valves take no time, so that the sequence takes what the network takes.
"""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence

from seqcheck.language.source import Source
from seqcheck.machine.findings import Report
from seqcheck.pipeline import examine_source

#: By name: least, perhaps typical, and greatest time; what must have ended before.
Activities = Mapping[str, tuple[tuple[int, ...], Sequence[str]]]


def network_report(activities: Activities) -> Report:
    report = examine_source(Source("network.steps", network_text(activities)))
    assert not report.problems, report.problems
    return report


def from_arcs(arcs: Sequence[tuple[str, str, tuple[int, ...]]]) -> dict[str, tuple[tuple[int, ...], list[str]]]:
    """Activities on arcs from event to event, each named after its two."""
    return {
        f"{start}_{end}": (times, [f"{cause}_{effect}" for cause, effect, _ in arcs if effect == start])
        for start, end, times in arcs
    }


def network_text(activities: Activities) -> str:
    branches = []
    for name, (_, needed) in activities.items():
        wait = f"step w{name} {{ until {' and '.join(f'S{one}' for one in needed)} }}  " if needed else ""
        branches.append(f"{{ {wait}step g{name} {{ set Y{name}  until S{name} }} }}")
    devices = [_device(name, times) for name, (times, _) in activities.items()]
    return "\n".join([*devices, "sequence main once {", "together", "\nand ".join(branches), "}\n"])


def _device(name: str, times: tuple[int, ...]) -> str:
    span = "..".join(map(str, times))
    return (
        f"valve V{name} 5/2 spring {{ coil Y{name}  on 0 ms  off 0 ms }}\n"
        f"cylinder C{name} on V{name} {{ extend {span} ms  retract 1 ms  sensor S{name} at extended }}"
    )


def activities_on(report: Report) -> list[str]:
    """Those whose strokes are on the critical path that the report tells, in order."""
    return [name for part in report.critical_path for name in re.findall(r"\bC(\w+)\b.*\bextended", part.event)]
