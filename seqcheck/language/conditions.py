"""Conditions with their names looked up.

Takes a condition as it is written and where it stands; gives it resolved, or None where a name in it is wrong (which
is reported). A step sees what the controller sees; a rule sees the machine itself.
"""

from __future__ import annotations

from enum import Enum

from seqcheck.language.problems import short
from seqcheck.language.registry import Registry, a
from seqcheck.language.syntax import (
    AllText,
    ConditionText,
    CylinderText,
    NotText,
    TermText,
    ValveText,
)
from seqcheck.machine.conditions import AllOf, AnyOf, Condition, Not, Term, TermKind
from seqcheck.machine.time import WHOLE_SHARE

_PLAIN = {kind.value: kind for kind in TermKind if kind not in (TermKind.CYLINDER, TermKind.VALVE, TermKind.STEP)}
_CYLINDER_ASPECTS = ("extended", "retracted", "moving", "between")


class View(Enum):
    """Who looks."""

    STEP = "a step"
    MACHINE = "a rule"
    VALVES = "the drive of a cylinder"


class Conditions:
    """Resolves conditions from one point of view; ``sequence`` is the one whose steps need no point."""

    def __init__(self, registry: Registry, view: View, sequence: str | None = None) -> None:
        self._registry = registry
        self._view = view
        self._sequence = sequence

    def resolve(self, text: ConditionText) -> Condition | None:
        match text:
            case TermText():
                return self.term(text)
            case NotText(part, place):
                inner = self.resolve(part)
                return None if inner is None else Not(inner, place)
            case _:
                # every part, so that all wrong names are reported
                parts = [self.resolve(part) for part in text.parts]
                known = tuple(part for part in parts if part is not None)
                if len(known) < len(parts):
                    return None
                return AllOf(known, text.place) if isinstance(text, AllText) else AnyOf(known, text.place)

    def term(self, text: TermText) -> Term | None:
        if text.owner is not None:
            return self._with_point(text)
        name = text.name.text
        kind = self._registry.kind(name)
        if kind in _PLAIN and self._view is not View.VALVES:
            return Term(_PLAIN[kind], name, None, text.place)
        if kind is not None:
            self._refuse(text, f"{short(name)} is {a(kind)}", self._advice_on(name))
            return None
        if self._sequence is not None and name in self._registry.steps[self._sequence]:
            return Term(TermKind.STEP, f"{self._sequence}.{name}", None, text.place)
        self._unknown(text)
        return None

    def _unknown(self, text: TermText) -> None:
        """A name without a point that nothing has; a step of some sequence is the likely slip."""
        registry = self._registry
        name = text.name.text
        owners = [sequence for sequence, steps in registry.steps.items() if name in steps]
        if owners and self._view is not View.VALVES:
            self._refuse(text, f"{short(name)} is a step", f"write {owners[0]}.{short(name)}")
        elif name in registry.sequences:
            self._refuse(text, f"{short(name)} is a sequence", f"name one of its steps: {short(name)}.STEP")
        elif not text.motion or registry.whole:
            own = registry.steps.get(self._sequence or "", {})
            registry.unknown(text.name, ("name",), [*registry.devices, *own])

    def _with_point(self, text: TermText) -> Term | None:
        assert text.owner is not None
        registry = self._registry
        owner = text.owner.text
        device = registry.devices.get(owner)
        aspects = _aspects(device) if isinstance(device, CylinderText | ValveText) else ()
        aspect = "centre" if text.name.text == "center" else text.name.text
        if aspect in aspects:
            return self._aspect(text, aspect)
        if owner in registry.sequences:
            return self._step(text)
        if aspects:
            words = ", ".join(f"{short(owner)}.{word}" for word in aspects)
            message = f"{short(owner)} has no `{short(text.name.text)}`"
            self._refuse(text, message, registry.problems.did_you_mean(aspect, aspects, f"write one of {words}"))
        elif device is not None:
            kind = registry.kind(owner) or ""
            self._refuse(text, f"{short(owner)} is {a(kind)}: nothing stands behind a point", f"write {short(owner)}")
        else:
            with_parts = [
                name for name, known in registry.devices.items() if isinstance(known, CylinderText | ValveText)
            ]
            registry.unknown(text.owner, ("name",), [*with_parts, *registry.sequences])
        return None

    def _aspect(self, text: TermText, aspect: str) -> Term | None:
        assert text.owner is not None
        device = self._registry.devices[text.owner.text]
        kind = TermKind.VALVE if isinstance(device, ValveText) else TermKind.CYLINDER
        if self._view is View.MACHINE or (self._view is View.VALVES and kind is TermKind.VALVE):
            return Term(kind, text.owner.text, aspect, text.place)
        message = f"{self._view.value} does not see {short(text.owner.text)}.{aspect}"
        self._refuse(text, message, self._advice_on(text.owner.text, aspect))
        return None

    def _step(self, text: TermText) -> Term | None:
        assert text.owner is not None
        owner, name = text.owner.text, text.name.text
        if self._view is View.VALVES:
            self._refuse(text, f"{self._view.value} does not see a step", self._advice_on(owner))
        elif name in self._registry.steps[owner]:
            return Term(TermKind.STEP, f"{owner}.{name}", None, text.place)
        elif self._registry.whole:
            steps = self._registry.steps[owner]
            message = f"the sequence {short(owner)} has no step {short(name)}"
            self._refuse(text, message, self._registry.problems.did_you_mean(name, steps))
        return None

    def _advice_on(self, name: str, aspect: str | None = None) -> str | None:
        """What may be written instead of a device that cannot stand here."""
        device = self._registry.devices.get(name)
        if self._view is View.VALVES:
            return "it follows positions of valves: write V1.a, say"
        if isinstance(device, CylinderText):
            if self._view is View.MACHINE:
                return "write one of " + ", ".join(f"{short(name)}.{word}" for word in _CYLINDER_ASPECTS)
            sensor = _sensor_for(device, aspect)
            return f"it sees sensors and signals: write {sensor}" if sensor else "it sees sensors and signals"
        if isinstance(device, ValveText):
            if self._view is View.MACHINE:
                return "write one of " + ", ".join(f"{short(name)}.{word}" for word in _aspects(device))
            return "it sees coils as they are commanded"
        return None

    def _refuse(self, text: TermText, message: str, advice: str | None) -> None:
        self._registry.problems.report(text.place, message, advice)


def _aspects(device: CylinderText | ValveText) -> tuple[str, ...]:
    if isinstance(device, CylinderText):
        return _CYLINDER_ASPECTS
    centre = ("centre",) if device.positions == 3 else ()
    flow = ("open", "closed") if device.ports == 2 else ()
    return ("a", "b", *centre, "shifting", *flow)


def _sensor_for(cylinder: CylinderText, aspect: str | None) -> str | None:
    for sensor in cylinder.sensors:
        if (aspect == "extended" and sensor.high == WHOLE_SHARE) or (aspect == "retracted" and sensor.low == 0):
            return sensor.name.text
    return None
