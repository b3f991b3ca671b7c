"""Machines built by hand, so that the player is tested without the reader of texts.

Names tell their kind: ``B..`` sensors, ``Y..`` coils, ``K..`` outputs, ``main...`` steps, anything else a signal.
"""

from __future__ import annotations

from seqcheck.machine.conditions import AllOf, Condition, Not, Term, TermKind
from seqcheck.machine.devices import (
    Coil,
    Controller,
    ControllerKind,
    Cylinder,
    OnValve,
    Output,
    OutsideSignal,
    Position,
    Sensor,
    Stroke,
    Valve,
    ValveReturn,
)
from seqcheck.machine.model import Machine
from seqcheck.machine.places import Place
from seqcheck.machine.steps import Command, CommandKind, Item, Repeat, Sequence, Step, Together, Watchdog
from seqcheck.machine.time import NO_TIME, WHOLE_SHARE, Span

NOWHERE = Place("hand", 1, 1, 1, 1)
IDEAL = Controller()


def ms(least: float, most: float | None = None) -> Span:
    """A span of milliseconds."""
    return Span.between(round(least * 1000), round((least if most is None else most) * 1000))


def scan(least: float, most: float, *, filtering: Span = NO_TIME, output: Span = NO_TIME) -> Controller:
    return Controller(ControllerKind.SCAN, ms(least, most), NO_TIME, filtering, filtering, output, output)


def task(interval: Span, run: Span) -> Controller:
    return Controller(ControllerKind.TASK, interval, run)


def coil(name: str, to: Position = Position.A, on: Span = NO_TIME, off: Span = NO_TIME, decay: Span = NO_TIME) -> Coil:
    return Coil(name, None, None, "", to, on, off, decay, None, NOWHERE)


def valve(name: str, kind: ValveReturn, *coils: Coil, gap: int | None = None) -> tuple[Valve, tuple[Coil, ...]]:
    starts = Position.CENTRE if kind is ValveReturn.CLOSED_CENTRE else Position.B
    positions = 3 if kind is ValveReturn.CLOSED_CENTRE else 2
    names = tuple(each.name for each in coils)
    made = Valve(name, None, 5, positions, kind, names, gap, False, starts, NOWHERE)
    owned = tuple(Coil(c.name, None, None, name, c.to, c.on, c.off, c.decay, None, NOWHERE) for c in coils)
    return made, owned


def spring(name: str, coil_name: str, on: Span, off: Span) -> tuple[Valve, tuple[Coil, ...]]:
    return valve(name, ValveReturn.SPRING, coil(coil_name, Position.A, on, off))


def bistable(
    name: str, to_a: str, to_b: str, on: Span, gap: int | None = None, decay: Span = NO_TIME
) -> tuple[Valve, tuple[Coil, ...]]:
    coils = coil(to_a, Position.A, on, decay=decay), coil(to_b, Position.B, on, decay=decay)
    return valve(name, ValveReturn.BISTABLE, *coils, gap=gap)


def centred(
    name: str, to_a: str, to_b: str, on: Span, off: Span, gap: int | None = None
) -> tuple[Valve, tuple[Coil, ...]]:
    coils = coil(to_a, Position.A, on, off), coil(to_b, Position.B, on, off)
    return valve(name, ValveReturn.CLOSED_CENTRE, *coils, gap=gap)


def cylinder(
    name: str,
    on: str,
    extend: Span,
    retract: Span,
    *sensors: tuple[str, float, float],
    lag: Span = NO_TIME,
    uneven: float = 0,
    overrun: Span = NO_TIME,
    from_coil: bool = False,
    delay: Span = NO_TIME,
) -> tuple[Cylinder, tuple[Sensor, ...]]:
    """Sensors as (name, from, to) in per cent of the stroke."""
    one_percent = WHOLE_SHARE // 100
    made = tuple(
        Sensor(label, None, None, name, round(low * one_percent), round(high * one_percent), delay, None, NOWHERE)
        for label, low, high in sensors
    )
    return (
        Cylinder(
            name,
            None,
            OnValve(on, False),
            Stroke(extend, from_coil),
            Stroke(retract, from_coil),
            lag,
            round(uneven * one_percent),
            overrun,
            False,
            tuple(sensor.name for sensor in made),
            NOWHERE,
        ),
        made,
    )


def signal(name: str, after: Span | None) -> OutsideSignal:
    return OutsideSignal(name, None, None, after, NOWHERE)


def step(
    name: str,
    *commands: str,
    until: str | None = None,
    steady: float | None = None,
    dwell: float | None = None,
    within: float | None = None,
) -> Step:
    """Commands as in a text, a pulse in milliseconds; ``until`` as parts joined by ``and``; times in milliseconds."""
    return Step(
        f"main.{name}",
        None,
        tuple(_command(*command.split()) for command in commands),
        None if until is None else _condition(until),
        _us(steady),
        _us(dwell),
        None if within is None else Watchdog(round(within * 1000), None, NOWHERE),
        (),
        NOWHERE,
    )


def together(line: int, *branches: tuple[Item, ...]) -> Together:
    return Together(branches, Place("hand", line, 5, line, 6))


def repeat(times: int, *items: Item) -> Repeat:
    return Repeat(times, items, NOWHERE)


def machine(
    controller: Controller,
    *items: Item,
    valves: tuple[tuple[Valve, tuple[Coil, ...]], ...] = (),
    cylinders: tuple[tuple[Cylinder, tuple[Sensor, ...]], ...] = (),
    outputs: tuple[str, ...] = (),
    signals: tuple[OutsideSignal, ...] = (),
    once: bool = False,
) -> Machine:
    return Machine(
        name="hand",
        file="hand",
        controller=controller,
        islands={},
        valves={each.name: each for each, _ in valves},
        coils={each.name: each for _, coils in valves for each in coils},
        outputs={name: Output(name, None, None, NO_TIME, NO_TIME, None, NOWHERE) for name in outputs},
        cylinders={each.name: each for each, _ in cylinders},
        sensors={each.name: each for _, sensors in cylinders for each in sensors},
        signals={each.name: each for each in signals},
        flags={},
        sequences=(Sequence("main", None, once, items, NOWHERE),),
        rules=(),
        sheets=(),
    )


def _us(time_ms: float | None) -> int | None:
    return None if time_ms is None else round(time_ms * 1000)


def _command(kind: str, target: str, duration: str | None = None) -> Command:
    return Command(CommandKind(kind), target, None if duration is None else round(float(duration) * 1000), NOWHERE)


def _condition(text: str) -> Condition:
    parts = tuple(_part(part.strip()) for part in text.split(" and "))
    return parts[0] if len(parts) == 1 else AllOf(parts, NOWHERE)


def _part(text: str) -> Condition:
    if text.startswith("not "):
        return Not(_part(text[4:]), NOWHERE)
    kinds = {"B": TermKind.SENSOR, "Y": TermKind.COIL, "K": TermKind.OUTPUT}
    kind = TermKind.STEP if text.startswith("main.") else kinds.get(text[0], TermKind.SIGNAL)
    return Term(kind, text, None, NOWHERE)
