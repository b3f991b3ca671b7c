"""``opposed-coils`` and ``coil-handover``: both coils of a valve at once, by command and at the valve.

The two kinds and the handover table ask the same pairs: each time that a coil is commanded, and the next time that the
opposed one is.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import partial

from seqcheck.checks.check import Check, Obligation, Wording
from seqcheck.checks.narrate import narrate_typical
from seqcheck.checks.study import Study
from seqcheck.checks.wording import in_time, round_down
from seqcheck.engine.bounds import greatest_separations
from seqcheck.engine.graph import Event
from seqcheck.engine.trace import Origin, Spell
from seqcheck.machine.devices import Valve
from seqcheck.machine.findings import Finding, Handover, Severity
from seqcheck.machine.steps import CommandKind
from seqcheck.machine.time import NO_TIME


@dataclass(frozen=True, slots=True)
class _Pair:
    valve: Valve
    earlier: Spell
    later: Spell


def _pairs(study: Study) -> Iterator[_Pair]:
    """Each spell of a coil with the next one of the opposed coil, in the order of the played run."""
    for valve in study.machine.valves.values():
        if len(valve.coils) == 2:
            spells = [spell for coil in valve.coils for spell in study.trace.spells.get(coil, ())]
            spells.sort(key=lambda spell: (study.time(spell.begun.read.event), spell.begun.read.event))
            latest: dict[str, Spell] = {}
            for spell in spells:
                for coil, earlier in latest.items():
                    if coil != spell.target:
                        yield _Pair(valve, earlier, spell)
                latest = {spell.target: spell}


def _commanded_at_once(study: Study) -> Iterator[Obligation]:
    for pair in _pairs(study):
        earlier, later = pair.earlier, pair.later
        if earlier.ended is not None and earlier.ended.read is not later.begun.read:
            message = f"{earlier.target} and {later.target} can be commanded at once, for up to {{by}}"
            yield Obligation(
                pair.valve.name,
                later.begun.step,
                later.begun.place,
                earlier.ended.read.event,
                later.begun.read.event,
                Wording(message, partial(_mend, earlier.ended, earlier.target)),
            )


def _mend(ended: Origin, coil: str, by: int) -> str:
    if ended.kind is CommandKind.PULSE and ended.duration is not None and ended.duration > by:
        return f"a pulse of {coil} of at most {round_down(ended.duration - by)} is safe"
    return f"end the command of {coil} first"


def _never_ended(study: Study) -> Iterator[Finding]:
    """The earlier coil is commanded for good: no time is needed to see that."""
    told = set()
    for pair in _pairs(study):
        earlier, later = pair.earlier, pair.later
        if earlier.ended is None and later.begun.place not in told:
            told.add(later.begun.place)
            yield Finding(
                kind="opposed-coils",
                severity=Severity.ERROR,
                certain=True,
                subject=pair.valve.name,
                step=later.begun.step,
                place=later.begun.place,
                message=f"{later.target} is commanded while {earlier.target} still is",
                margin_us=None,
                replayed=True,
                run=narrate_typical(study, earlier.begun.read.event, later.on),
                mend=f"end the command of {earlier.target} first",
            )


def _decayed(study: Study, spell: Spell) -> int:
    """When the coil no longer pulls."""
    assert spell.off is not None
    decay = study.machine.coils[spell.target].decay
    return spell.off if decay == NO_TIME else study.later(Event("decayed", spell.target), spell.off, decay)


def _too_close(study: Study) -> Iterator[Obligation]:
    for pair in _pairs(study):
        earlier, later, gap = pair.earlier, pair.later, pair.valve.gap
        if gap is not None and earlier.off is not None:
            message = (
                f"{later.target} can be energized {{by}} too soon after {earlier.target}, "
                f"which the gap of {in_time(gap)} of {pair.valve.name} forbids"
            )
            yield Obligation(
                pair.valve.name,
                later.begun.step,
                later.begun.place,
                _decayed(study, earlier),
                later.on,
                Wording(message, lambda by: f"put a dwell of at least {in_time(by)} between the two coils"),
                gap,
            )


def handovers(study: Study) -> tuple[Handover, ...]:
    """The tightest handover of each kind that the text states at one place."""
    asked = [
        (pair, _decayed(study, pair.earlier), pair.later.on) for pair in _pairs(study) if pair.earlier.off is not None
    ]
    rows = greatest_separations(study.trace.graph, ((on, decayed) for _, decayed, on in asked))
    found: dict[tuple[object, ...], Handover] = {}
    for pair, decayed, on in asked:
        gap = -rows[on, decayed]
        place = pair.later.begun.place
        key = (pair.valve.name, pair.earlier.target, pair.later.target, place)
        if key not in found or gap < found[key].least_gap_us:
            found[key] = Handover(pair.valve.name, pair.earlier.target, pair.later.target, place, gap, max(0, -gap))
    return tuple(sorted(found.values(), key=lambda one: (one.place, one.valve, one.from_coil)))


OPPOSED_COILS = Check(
    "opposed-coils", Severity.ERROR, "both coils of a valve commanded at once", _commanded_at_once, _never_ended
)
COIL_HANDOVER = Check("coil-handover", Severity.ERROR, "a coil follows the opposed one too closely", _too_close)
