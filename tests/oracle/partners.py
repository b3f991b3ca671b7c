"""A second sequence beside the first one, and rules over both."""

from __future__ import annotations

import re

from tests.oracle.flow import Flow
from tests.oracle.writer import indent


def partner(flow: Flow) -> list[str]:
    """The text of a second sequence; what the first one does with it is added to ``flow.meetings``."""
    write = flow.write
    work = flow.idle() if len(flow.drives) < 2 else flow.write.pick(flow.idle, flow.trip)()
    match write.pick("steps", "flag", "lamp", "free"):
        case "steps":
            work = [_labelled(line, "w") for line in work]
            flow.meetings = [write.step("until side.done", label="meet")]
            name = flow.meetings[0].split()[1]
            done = f"step done {{ until not main.{name} }}"
            return _sequence([f"step idle {{ until main.{name} }}", *work, done])
        case "flag":
            flag = flow.flag()
            flow.meetings = [write.step(f"set {flag}", f"until not {flag}", label="meet")]
            return _sequence([f"step idle {{ until {flag} }}", *work, f"step done {{ reset {flag} }}"])
        case "lamp":
            flow.meetings = [write.step(f"dwell {write.ms(50, 300)}", label="meet")]
            name = flow.meetings[0].split()[1]
            lamp = flow.output()
            lit = f"step lit {{ on {lamp}  until not main.{name} }}"
            return _sequence([f"step dark {{ until main.{name} }}", lit])
    flag, one = flow.flag(), flow.signal("call")
    counted = [f"step noted {{ set {flag}  dwell {write.ms(50, 300)} }}", f"step clear {{ reset {flag}  dwell 20 ms }}"]
    steps = [f"step idle {{ until {one} }}", *counted]
    flow.meetings = flow.choose((f"when {flag}", flow.idle()), ("otherwise", flow.idle()))
    return _sequence(steps)


def _labelled(line: str, label: str) -> str:
    renamed = re.sub(r"^(\s*)step s", rf"\1step {label}", line)
    return re.sub(r"\bmain\.s(?=\d)", f"side.{label}", renamed)


def _sequence(lines: list[str]) -> list[str]:
    return ["sequence side {", *indent(lines), "}"]


def rules(flow: Flow, lines: list[str], once: bool) -> list[str]:
    """A few rules: of cylinders, coils, valves and steps."""
    write = flow.write
    told: list[str] = []
    steps = re.findall(r"step (\w+) ", "\n".join(lines))
    one = write.pick(*flow.drives)
    if write.chance(30):
        other = write.pick(*flow.drives)
        tolerated = f" for {write.either('never', (4000, 8000), (1, 300))}" if write.chance(50) else ""
        pair = f"{one.cylinder}.moving and {other.cylinder}.between" if other is not one else f"{one.cylinder}.moving"
        safe = f"not {one.cylinder}.moving and {one.cylinder}.between and {one.away_coil}"
        tight = "never" in write.faults or write.chance(20)
        told.append(f'never {pair if tight else safe}{tolerated if tight else " for 3 s"}   "they share the rail"')
    if flow.processes and write.chance(50):
        valve = flow.processes[0]
        time = write.either("never", (5000, 9000), (1, 400))
        told.append(f"never {valve.valve}.{write.pick('shifting', 'a')} and {one.cylinder}.moving for {time}")
    if not once and write.chance(30):
        told.append(f"limit cycle main {write.either('limit', (400_000, 500_000), (500, 3000))}")
    if write.chance(30):
        least = "1 us.." if write.chance(30) else ""
        time = write.either("limit", (3000, 9000), (200, 700))
        told.append(f"limit from {one.away_coil} to {one.away_sensor} {least}{time}")
    if len(steps) > 1 and write.chance(20):
        time = write.either("limit", (200_000, 300_000), (50, 900))
        told.append(f"limit from main.{steps[0]} to main.{steps[1]} {time}")
    return told
