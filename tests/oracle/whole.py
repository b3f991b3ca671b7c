"""Random machines of the whole language as texts, from hypothesis or from a seed.

As in ``machines``, times are random whole microseconds and each block of steps brings its cylinders back to where they
started, whichever way its choices go. Most texts are healthy; the others have one to three of ``FAULTS`` besides those
of ``machines``. Machines are small: one or two cylinders, three to a dozen steps.
"""

from __future__ import annotations

import re

from hypothesis import strategies as st
from hypothesis.strategies import DrawFn

from tests.oracle.flow import Flow
from tests.oracle.machines import FAULTS as PLAIN_FAULTS
from tests.oracle.machines import controller, new_drive
from tests.oracle.partners import partner, rules
from tests.oracle.process import process_valve, stop_cylinder
from tests.oracle.writer import Whole, Writer, drawn, indent, seeded

FAULTS = ("late", "retry", "limit", "never", "short")


def write_machine(whole: Whole, faulty: bool | None = None) -> str:
    write = Writer(whole)
    if write.chance(45) if faulty is None else faulty:
        write.faults = write.some((*FAULTS, *FAULTS, *PLAIN_FAULTS), 3)
    control = controller(write)
    devices: list[str] = []
    flow = Flow(write, ideal=not control)
    for number in range(1, write.pick(1, 1, 2) + 1):
        text, made = new_drive(write, number)
        devices.append(text)
        flow.drives.append(made)
    if write.chance(30):
        devices.append(process_valve(flow))
    if write.chance(20):
        devices.append(stop_cylinder(flow))
    for made in flow.drives:
        if write.chance(30):
            flow.follow(f"{made.cylinder}.{write.pick('extended', 'retracted', 'between')}", made)
    side = partner(flow) if write.chance(45) else []
    lines = [line for _ in range(write.pick(1, 1, 2)) for line in flow.block()]
    lines += flow.meetings
    if not any(re.match(r"step .*(dwell|until B)|\w+[+-]", line) for line in lines):
        lines.append(write.step(f"dwell {write.ms(5, 60)}"))
    once = not side and write.chance(12)
    parts = [
        'machine "Random plant"',
        control,
        *_on_island(write, devices),
        *(f"output {name}" for name in write.outputs),
        *(f"signal {name} from outside{_after(write)}" for name in write.signals),
        *flow.following,
        *(f"flag {name}" for name in flow.flags),
        f"sequence main{' once' if once else ''} {{",
        *indent(lines),
        "}",
        *side,
        *rules(flow, lines, once),
    ]
    return "\n".join(part for part in parts if part) + "\n"


def _after(write: Writer) -> str:
    return f" after {write.span(0, 200, 300)}" if write.chance(75) else ""


def _on_island(write: Writer, devices: list[str]) -> list[str]:
    """With some coils and sensors on an island."""
    if not write.chance(25):
        return devices
    transfer = f"input {write.span(0, 3, 2)}  output on {write.span(0, 2, 2)} off {write.span(0, 2, 2)}"
    island = f"io bus1 {{ update {write.span(1, 4, 4)}  {transfer} }}"

    def coil(found: re.Match[str]) -> str:
        return f"{found[0]} via bus1" if write.chance(60) else found[0]

    def sensor(found: re.Match[str]) -> str:
        return f"{found[0]} via bus1" if write.chance(50) else found[0]

    return [
        island,
        *(re.sub(r"^ *sensor .*$", sensor, re.sub(r"coil \w+( to [ab])?", coil, text), flags=re.M) for text in devices),
    ]


def whole_text(seed: int, faulty: bool | None = None) -> str:
    """The same text for the same seed."""
    return write_machine(seeded(seed), faulty)


@st.composite
def whole_texts(draw: DrawFn, faulty: bool | None = None) -> str:
    return write_machine(drawn(draw), faulty)
