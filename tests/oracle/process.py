"""Process valves and cylinders on two valves, as texts of devices."""

from __future__ import annotations

from tests.oracle.flow import Flow, Process, Stopped


def process_valve(flow: Flow) -> str:
    """A solenoid or a motor valve in a pipe, with a signal that follows it."""
    write = flow.write
    if write.chance(55):
        low = write.whole(150_000, 700_000)
        high = low + write.whole(0, 120_000)
        ways = write.pick("2/2", "2/2", "3/2")
        starts = " starts a" if write.chance(15) else ""
        text = f"valve fill {ways} motor{starts} {{ coil M1 to a  coil M2 to b  travel {low}..{high} us }}"
        away, home = ("M2", "M1") if starts else ("M1", "M2")
        signals = [flow.follow(f"fill.{at}") for at in (("b", "a") if starts else ("a", "b"))]
        flow.processes.append(Process("fill", away, home, signals[0], signals[1], high))
        return text
    normally = " normally open" if write.chance(30) else ""
    text = f"valve drain 2/2 spring{normally} {{ coil P1  on {write.span(12, 30, 10)}  off {write.span(15, 40, 10)} }}"
    states = ("closed", "open") if normally else ("open", "closed")
    opened = flow.follow(f"drain.{states[0]}" if write.chance(60) else "drain.a")
    flow.processes.append(Process("drain", "P1", None, opened, flow.follow("drain.b"), 60_000))
    return text


def stop_cylinder(flow: Flow) -> str:
    """A cylinder that moves only while a stop valve lets it."""
    write = flow.write
    spring = write.chance(50)
    coils = "coil Y81" if spring else "coil Y81 to a  coil Y82 to b"
    off = f"off {write.span(20, 35, 10)}" if spring else ""
    kind = "spring" if spring else "bistable"
    overrun = f"    overrun {write.span(0, 6, 6)}\n" if write.chance(40) else ""
    flow.stopped.append(Stopped("arm", "Y81", None if spring else "Y82", "Y91", "B81", "B83", "B82"))
    return (
        f"valve V8 5/2 {kind} {{ {coils}  on {write.span(15, 25, 10)}  {off} }}\n"
        f"valve V9 2/2 spring {{ coil Y91  on {write.span(10, 20, 8)}  off {write.span(12, 25, 8)} }}\n"
        "cylinder arm out when V8.a and V9.open in when V8.b and V9.open {\n"
        f"    extend {write.span(200, 500, 80)}\n"
        f"    retract {write.span(200, 400, 80)}\n"
        f"{overrun}"
        "    sensor B81 at retracted\n"
        f"    sensor B83 at 40..{write.whole(60, 75)} %\n"
        "    sensor B82 at extended\n"
        "}"
    )
