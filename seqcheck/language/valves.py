"""Valves and their coils, with their times.

Takes the registry; gives the model's records; reports kinds, ports, positions and coils that do not go together, and
times that are missing or that the kind has not.
"""

from __future__ import annotations

from seqcheck.language.devices import via_of
from seqcheck.language.problems import short
from seqcheck.language.registry import Registry, a
from seqcheck.language.syntax import CoilText, ValveText
from seqcheck.machine.devices import Coil, Position, Valve, ValveReturn
from seqcheck.machine.time import NO_TIME, Span

_SIZES = ((2, 2), (3, 2), (4, 2), (5, 2), (3, 3), (4, 3), (5, 3))
_TWO_POSITIONS = (ValveReturn.SPRING, ValveReturn.BISTABLE, ValveReturn.MOTOR)

#: The times that a kind of valve has; those of a centre kind stand under CLOSED_CENTRE.
_KEYS = {
    ValveReturn.SPRING: ("on", "off", "decay"),
    ValveReturn.BISTABLE: ("on", "decay", "gap"),
    ValveReturn.MOTOR: ("travel", "decay", "gap"),
    ValveReturn.CLOSED_CENTRE: ("on", "off", "decay", "gap"),
}
_EXAMPLES = {"on": "18..28 ms", "off": "25..40 ms", "travel": "4..6 s"}


def resolve_valve(registry: Registry, text: ValveText) -> Valve:
    """The valve itself."""
    _check_size(registry, text)
    _check_coils(registry, text)
    _check_keys(registry, text)
    gap = registry.times.span("valves", text.name.text, "gap")
    return Valve(
        text.name.text,
        text.marks.label.text if text.marks.label else None,
        text.ports,
        text.positions,
        text.kind,
        tuple(coil.name.text for coil in text.coils),
        None if gap is None else gap.least,
        text.normally is not None and text.normally.text == "open",
        _start(registry, text),
        text.place,
    )


def _check_size(registry: Registry, text: ValveText) -> None:
    size = f"{text.ports}/{text.positions}"
    if (text.ports, text.positions) not in _SIZES:
        sizes = ", ".join(f"{ports}/{positions}" for ports, positions in _SIZES)
        registry.problems.report(text.size_place, f"there is no {size} valve", f"write one of {sizes}")
    elif (text.positions == 2) != (text.kind in _TWO_POSITIONS):
        positions = 2 if text.kind in _TWO_POSITIONS else 3
        kind = text.kind.value
        message = f"a {size} valve has {text.positions} positions, {kind} needs {positions}"
        advice = f"write {text.ports}/{positions}" if text.ports > 2 else "spring, bistable or motor has 2 positions"
        registry.problems.report(text.size_place, message, advice)
    if text.normally is not None and text.ports != 2:
        message = f"only a 2/2 valve is normally {text.normally.text}"
        registry.problems.report(text.normally.place, message, "a cylinder may be `reversed` instead")


def _check_coils(registry: Registry, text: ValveText) -> None:
    """One coil to ``a`` with a spring, else one to ``a`` and one to ``b``."""
    wanted = 1 if text.kind is ValveReturn.SPRING else 2
    name = short(text.name.text)
    if len(text.coils) != wanted:
        coils = "one coil" if wanted == 1 else "two coils"
        has = ("none", "one", "two")[len(text.coils)] if len(text.coils) < 3 else str(len(text.coils))
        advice = "write `coil Y1`" if wanted == 1 else "write `coil Y1 to a   coil Y2 to b`"
        message = f"{a(text.kind.value)} valve has {coils}, {name} has {has}"
        registry.problems.report(text.name.place, message, advice)
        return
    ends = [coil.to.text if coil.to else None for coil in text.coils]
    if wanted == 1 and ends[0] == "b" and text.coils[0].to:
        registry.problems.report(text.coils[0].to.place, "the spring moves the valve to b", "the coil moves it to a")
    for coil, end in zip(text.coils, ends, strict=True):
        if wanted == 2 and end is None:
            message = f"nobody says where the coil {short(coil.name.text)} moves the valve"
            registry.problems.report(coil.name.place, message, "write `to a` or `to b` behind it")
    if wanted == 2 and ends[0] is not None and ends[0] == ends[1] and text.coils[1].to:
        other = "b" if ends[0] == "a" else "a"
        message = f"both coils of {name} move it to {ends[0]}"
        registry.problems.report(text.coils[1].to.place, message, f"write `to {other}` here")


def _check_keys(registry: Registry, text: ValveText) -> None:
    """Report times that this kind of valve has not."""
    keys = _KEYS[text.kind if text.kind in _TWO_POSITIONS else ValveReturn.CLOSED_CENTRE]
    for section, name in (("valves", text.name.text), *(("coils", coil.name.text) for coil in text.coils)):
        for key, entry in registry.times.entries(section, name).items():
            allowed = [word for word in keys if section == "valves" or word not in ("gap", "travel")]
            if section == "coils" and text.kind is ValveReturn.MOTOR and key == "travel":
                allowed.append(key)
            if key not in allowed:
                owner = f"{a(text.kind.value)} valve"
                owner = owner if section == "valves" else f"a coil of {owner}"
                message = f"{short(name)}: {owner} has no time {key}"
                if key in keys:
                    message = f"{short(name)}: {key} belongs to the valve, not to a coil"
                registry.problems.report(entry.place, message, f"it has {', '.join(allowed)}")


def _start(registry: Registry, text: ValveText) -> Position:
    rest = Position.CENTRE if text.positions == 3 else Position.B
    if text.starts is None:
        return rest
    if text.kind in (ValveReturn.BISTABLE, ValveReturn.MOTOR):
        return Position(text.starts.text)
    if text.starts.text != rest.value:
        message = f"{a(text.kind.value)} valve starts at {rest.value}"
        registry.problems.report(text.starts.place, message, "leave `starts` out")
    return rest


def resolve_coil(registry: Registry, valve: ValveText, text: CoilText) -> Coil:
    """A coil with its own times or else those of its valve."""
    travels = valve.kind is ValveReturn.MOTOR
    has_rest = not travels and valve.kind is not ValveReturn.BISTABLE
    return Coil(
        text.name.text,
        text.marks.address.text if text.marks.address else None,
        text.marks.label.text if text.marks.label else None,
        valve.name.text,
        Position(text.to.text) if text.to else Position.A,
        _time(registry, valve, text, "travel" if travels else "on"),
        _time(registry, valve, text, "off") if has_rest else NO_TIME,
        _find(registry, valve, text, "decay") or NO_TIME,
        via_of(registry, text.via),
        text.place,
    )


def _find(registry: Registry, valve: ValveText, coil: CoilText, key: str) -> Span | None:
    own = registry.times.span("coils", coil.name.text, key)
    return own if own is not None else registry.times.span("valves", valve.name.text, key)


def _time(registry: Registry, valve: ValveText, coil: CoilText, key: str) -> Span:
    span = _find(registry, valve, coil, key)
    if span is None:
        kind = valve.kind.value if valve.kind in _TWO_POSITIONS else "centre"
        span = registry.assumed.take("valves", kind, key, valve.name.text, valve.name.place)
    if span is None:
        registry.missing(valve.name.place, f"the valve {valve.name.text}", key, _EXAMPLES[key])
    return span or NO_TIME
