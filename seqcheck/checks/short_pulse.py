"""``short-pulse``: a coil changes before the valve that it moved has got there."""

from __future__ import annotations

from collections.abc import Iterator
from functools import partial

from seqcheck.checks.check import Check, Obligation, Wording
from seqcheck.checks.study import Study
from seqcheck.checks.wording import in_time, round_up
from seqcheck.engine.trace import Origin, Shift, Spell
from seqcheck.machine.devices import Position
from seqcheck.machine.findings import Severity
from seqcheck.machine.steps import CommandKind


def _obligations(study: Study) -> Iterator[Obligation]:
    for shift in study.trace.shifts:
        change = _change_after(study, shift)
        if change is not None:
            origin, event = change
            yield Obligation(
                shift.valve,
                origin.step,
                origin.place,
                shift.reached,
                event,
                partial(_wording, shift, origin),
                lever=study.trace.pulses_over.get(origin.read.event),
            )
    yield from _switching_in_order(study)


def _change_after(study: Study, shift: Shift) -> tuple[Origin, int] | None:
    """The next change of the coil that moved the valve. A return to centre that the other coil takes over first is
    nobody's fault."""
    if shift.called_off is not None and not shift.taken_over:
        return shift.called_off.origin, shift.called_off.event
    spell, following = study.spell_at(shift.by.event)
    if shift.by.energized:
        return (spell.ended, spell.off) if spell.ended is not None and spell.off is not None else None
    if following is None or (shift.to is Position.CENTRE and _other_coil_comes_first(study, shift, following)):
        return None
    return following.begun, following.on


def _other_coil_comes_first(study: Study, shift: Shift, following: Spell) -> bool:
    released, again = study.time(shift.by.event), study.time(following.on)
    coils = study.machine.valves[shift.valve].coils
    return any(study.energized_within(coil, released, again) for coil in coils if coil != shift.by.coil)


def _switching_in_order(study: Study) -> Iterator[Obligation]:
    """A coil whose switching moves nothing (a repeated pulse, say) must still switch off after it has switched on."""
    moving = {shift.by.event for shift in study.trace.shifts}
    for coil, spells in study.trace.spells.items():
        if coil not in study.machine.coils:
            continue
        for spell in spells:
            if spell.ended is not None and spell.off is not None and spell.on not in moving:
                origin, valve = spell.ended, study.machine.coils[coil].valve
                message = f"{coil} can be told to switch off {{by}} before it has switched on"
                yield Obligation(valve, origin.step, origin.place, spell.on, spell.off, partial(Wording, message))


def _wording(shift: Shift, origin: Origin) -> Wording:
    coil, valve, goal = shift.by.coil, shift.valve, shift.to.value
    did = "released" if shift.by.energized else "energized again"
    message = f"{coil} can be {did} {{by}} before {valve} has reached {goal}"
    if origin.kind is CommandKind.PULSE and origin.duration is not None:
        return Wording(message, lambda by: f"a pulse of at least {round_up((origin.duration or 0) + by)} is safe")
    if shift.by.energized:
        return Wording(message, lambda by: f"keep {coil} energized at least {in_time(by)} longer")
    return Wording(message, lambda by: f"leave {coil} released at least {in_time(by)} longer")


CHECK = Check("short-pulse", Severity.ERROR, "a coil changes before its valve has got there", _obligations)
