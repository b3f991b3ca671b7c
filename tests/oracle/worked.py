"""The worked case of the design, by hand: two cylinders out and in, one after the other."""

from __future__ import annotations

from seqcheck.machine.model import Machine
from tests.oracle.build import centred, cylinder, machine, ms, scan, spring, step


def worked_case(gap: int | None = None) -> Machine:
    return machine(
        scan(8, 12, filtering=ms(2, 4), output=ms(0.5, 1)),
        step("clamp", "set Y1", until="B2"),
        step("raise", "on Y2", until="B4"),
        step("lower", "on Y3", until="B3"),
        step("open", "reset Y1", until="B1"),
        valves=(
            spring("V1", "Y1", ms(18, 28), ms(25, 40)),
            centred("V2", "Y2", "Y3", ms(20, 30), ms(30, 45), gap),
        ),
        cylinders=(
            cylinder("clamp", "V1", ms(380, 450), ms(300, 360), ("B1", 0, 0), ("B2", 100, 100)),
            cylinder("lift", "V2", ms(600, 700), ms(500, 620), ("B3", 0, 0), ("B4", 100, 100)),
        ),
    )
