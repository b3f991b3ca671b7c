"""Cylinders and their sensors, with their times.

Takes the registry and the valves; gives the model's records; reports ranges, strokes and starts that cannot be.
"""

from __future__ import annotations

from collections.abc import Mapping

from seqcheck.language.assumed import ANY
from seqcheck.language.conditions import Conditions, View
from seqcheck.language.devices import via_of
from seqcheck.language.problems import short
from seqcheck.language.registry import Registry
from seqcheck.language.syntax import ConditionsText, CylinderText, SensorText
from seqcheck.machine.conditions import AllOf, AnyOf, Condition, Not, Term
from seqcheck.machine.devices import Cylinder, OnConditions, OnValve, Position, Sensor, Stroke, Valve
from seqcheck.machine.time import NO_TIME, WHOLE_SHARE

_EXAMPLES = {"extend": "380..450 ms", "retract": "300..360 ms"}


def resolve_sensor(registry: Registry, cylinder: CylinderText, text: SensorText) -> Sensor:
    if text.low > text.high:
        registry.problems.report(text.range_place, "this range runs backwards", "write the lower share first")
    elif text.low == text.high and 0 < text.low < WHOLE_SHARE:
        registry.problems.report(
            text.range_place, "this range is empty", "write where the sensor comes on and goes off"
        )
    elif text.low == 0 and text.high == WHOLE_SHARE:
        registry.problems.report(text.range_place, "this sensor would be on all the time", "narrow its range")
    return Sensor(
        text.name.text,
        text.marks.address.text if text.marks.address else None,
        text.marks.label.text if text.marks.label else None,
        cylinder.name.text,
        text.low,
        text.high,
        registry.times.span("sensors", text.name.text, "delay") or NO_TIME,
        via_of(registry, text.via),
        text.place,
    )


def resolve_cylinder(registry: Registry, text: CylinderText, valves: Mapping[str, Valve]) -> Cylinder | None:
    """A cylinder; None where its drive is broken."""
    name = text.name.text
    drive = _drive(registry, text)
    extend, retract = _stroke(registry, text, "extend"), _stroke(registry, text, "retract")
    lag = registry.times.span("cylinders", name, "lag") or NO_TIME
    shorter = min(extend.time.greatest, retract.time.greatest)
    if lag.greatest > shorter > 0:
        place = registry.times.entries("cylinders", name)["lag"].place
        registry.problems.report(place, f"the lag of {short(name)} is over its stroke", "the stroke contains the lag")
    if drive is None:
        return None
    extended = text.starts is not None and text.starts.text == "extended"
    _check_start(registry, text, drive, extended, valves)
    return Cylinder(
        name,
        text.marks.label.text if text.marks.label else None,
        drive,
        extend,
        retract,
        lag,
        registry.times.share(name, "uneven"),
        registry.times.span("cylinders", name, "overrun") or NO_TIME,
        extended,
        tuple(sensor.name.text for sensor in text.sensors),
        text.place,
    )


def _drive(registry: Registry, text: CylinderText) -> OnValve | OnConditions | None:
    if isinstance(text.drive, ConditionsText):
        if text.reverse is not None:
            message = "`reversed` belongs to a cylinder on a valve"
            registry.problems.report(text.reverse.place, message, "exchange the two conditions instead")
        conditions = Conditions(registry, View.VALVES)
        out, back = conditions.resolve(text.drive.out), conditions.resolve(text.drive.back)
        return None if out is None or back is None else OnConditions(out, back)
    if not registry.is_a(text.drive, "valve"):
        return None
    return OnValve(text.drive.text, text.reverse is not None)


def _stroke(registry: Registry, text: CylinderText, key: str) -> Stroke:
    stroke = registry.times.stroke(text.name.text, key)
    ordinary = registry.assumed.take("cylinders", ANY, key, text.name.text, text.name.place) if stroke is None else None
    if ordinary is not None:
        return Stroke(ordinary, False)
    if stroke is None:
        registry.missing(text.name.place, f"the cylinder {text.name.text}", key, _EXAMPLES[key])
        return Stroke(NO_TIME, False)
    place = registry.times.entries("cylinders", text.name.text)[key].place
    if stroke.from_coil and isinstance(text.drive, ConditionsText):
        message = "`from coil` needs a cylinder on one valve"
        registry.problems.report(place, message, "give the stroke from the valve's position on")
    return stroke


def _check_start(
    registry: Registry,
    text: CylinderText,
    drive: OnValve | OnConditions,
    extended: bool,
    valves: Mapping[str, Valve],
) -> None:
    """What the valves at rest hold out cannot start retracted, and the other way round."""
    name = short(text.name.text)
    place = text.starts.place if text.starts else text.name.place
    out, back = _held(drive, valves)
    if out and back:
        message = f"with all valves at rest {name} would move out and in at once"
        registry.problems.report(text.name.place, message, "let the two conditions exclude each other")
    elif out and not extended:
        message = f"{name} cannot start retracted: its valve at rest holds it extended"
        advice = "write `starts extended` in its braces"
        registry.problems.report(place, message, advice)
    elif back and extended:
        message = f"{name} cannot start extended: its valve at rest holds it retracted"
        registry.problems.report(place, message, "leave `starts extended` out, or let the valve start at a")


def _held(drive: OnValve | OnConditions, valves: Mapping[str, Valve]) -> tuple[bool, bool]:
    """Whether the cylinder is driven out, and in, before anything is commanded."""
    if isinstance(drive, OnConditions):
        return _holds(drive.out, valves), _holds(drive.back, valves)
    at = valves[drive.valve].starts
    ends = (Position.B, Position.A) if drive.reverse else (Position.A, Position.B)
    return at is ends[0], at is ends[1]


def _holds(condition: Condition, valves: Mapping[str, Valve]) -> bool:
    match condition:
        case Term(_, subject, aspect):
            return _stands(valves[subject], aspect or "")
        case Not(part):
            return not _holds(part, valves)
        case AllOf(parts):
            return all(_holds(part, valves) for part in parts)
        case AnyOf(parts):
            return any(_holds(part, valves) for part in parts)


def _stands(valve: Valve, aspect: str) -> bool:
    if aspect in ("open", "closed"):
        is_open = (valve.starts is Position.A) != valve.normally_open
        return is_open == (aspect == "open")
    return aspect == valve.starts.value


def end_sensor(text: CylinderText, out: bool) -> SensorText | None:
    """The sensor that touches an end of the stroke, the first one where there are several."""
    for sensor in text.sensors:
        if (out and sensor.high == WHOLE_SHARE) or (not out and sensor.low == 0):
            return sensor
    return None
