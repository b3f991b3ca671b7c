"""``opposed-coils`` and ``coil-handover``: both coils of a valve at once, by command and at the valve.

The two kinds and the handover table ask the same pairs: each time that a coil is commanded, and the next time that the
opposed one is.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from functools import partial

from seqcheck.checks.check import Check, Obligation, Sight, Wording
from seqcheck.checks.narrate import narrate_typical
from seqcheck.checks.study import Study
from seqcheck.checks.tightest import those_that_count
from seqcheck.checks.wording import in_time, round_down
from seqcheck.engine.bounds import Rows, greatest_separations
from seqcheck.engine.graph import Event
from seqcheck.engine.trace import Origin, Spell
from seqcheck.machine.devices import ControllerKind, Valve
from seqcheck.machine.findings import Handover, Severity
from seqcheck.machine.records import record
from seqcheck.machine.steps import CommandKind
from seqcheck.machine.time import NO_TIME


@record
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
            message = f"{earlier.target} and {later.target} can be commanded at once"
            yield Obligation(
                pair.valve.name,
                later.begun.step,
                later.begun.place,
                earlier.ended.read.event,
                later.begun.read.event,
                partial(Wording, f"{message}, for up to {{by}}", partial(_mend, study, pair, earlier.ended), message),
            )


def _mend(study: Study, pair: _Pair, ended: Origin, by: int) -> str:
    """A bistable valve keeps its position without the pulse, so that a shorter one does (if it is long enough)."""
    coil, longest = pair.earlier.target, study.machine.controller.round.greatest
    if pair.valve.rest is None and ended.kind is CommandKind.PULSE and (ended.duration or 0) - by > longest:
        return f"a pulse of {coil} of at most {round_down((ended.duration or 0) - by)} ends in time"
    return f"end the command of {coil} first"


def _never_ended(study: Study) -> Iterator[Sight]:
    """The earlier coil is commanded for good: no time is needed to see that. (What has just not ended when play stops
    has ended one cycle before.)"""
    told = set()
    last_round = _last_round_since(study)
    for pair in _pairs(study):
        earlier, later = pair.earlier, pair.later
        if last_round is not None and study.time(later.begun.read.event) >= study.time(last_round):
            continue
        if earlier.ended is None and later.begun.place not in told:
            told.add(later.begun.place)
            run = narrate_typical(study, earlier.begun.read.event, later.on)
            message = f"{later.target} is commanded while {earlier.target} still is"
            mend = f"end the command of {earlier.target} first"
            yield Sight(
                pair.valve.name, later.begun.step, later.begun.place, message, run, mend, at=later.begun.read.event
            )


def _last_round_since(study: Study) -> int | None:
    """The event since which the play has gone round once, or the start of its last cycle but one where it does not come
    round; None where nothing comes after it."""
    trace = study.trace
    if trace.finished:
        return None
    again = study.settlement.path.again
    return again if again is not None else trace.cycles[-2].event if len(trace.cycles) >= 3 else None


def _decayed(study: Study, spell: Spell) -> int:
    """When the coil no longer pulls."""
    assert spell.off is not None
    decay = study.machine.coils[spell.target].decay
    if decay == NO_TIME:
        return spell.off
    delay = ("decay", spell.target, study.spell_number[spell])
    return study.later(Event("decayed", spell.target), spell.off, decay, delay)


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
                partial(Wording, message, partial(_mend_gap, study, pair)),
                gap,
                diverts=False,
            )


def _mend_gap(study: Study, pair: _Pair, by: int) -> str:
    """A dwell between the two coils is a read of its own, whose write may be as much sooner as the other's is later."""
    if pair.earlier.ended is not None and pair.earlier.ended.read is not pair.later.begun.read:
        return f"let at least {in_time(by)} more pass between the two coils"
    controller = study.machine.controller
    span = controller.run if controller.kind is ControllerKind.TASK else controller.round
    return f"put a dwell of at least {in_time(by + span.greatest - span.least)} between the two coils"


def handovers(study: Study) -> tuple[Handover, ...]:
    """The tightest handover of each kind that the text states at one place."""
    asked = [
        (pair, _decayed(study, pair.earlier), pair.later.on) for pair in _pairs(study) if pair.earlier.off is not None
    ]
    graph = study.trace.graph
    rows: Rows = {}

    def gaps_of(numbers: Sequence[int]) -> Iterator[int]:
        some = [(on, decayed) for _, decayed, on in map(asked.__getitem__, numbers)]
        rows.update(greatest_separations(graph, some))
        return (-rows[pair] for pair in some)

    kinds = [((pair.earlier.target, pair.later.begun.place), graph.least_lead(*events)) for pair, *events in asked]
    found = []
    for number in those_that_count(kinds, gaps_of):
        pair, decayed, on = asked[number]
        gap, place = -rows[on, decayed], pair.later.begun.place
        found.append(Handover(pair.valve.name, pair.earlier.target, pair.later.target, place, gap, max(0, -gap)))
    return tightest_handovers([found])


def tightest_handovers(tables: Iterable[Iterable[Handover]]) -> tuple[Handover, ...]:
    """One for each place and pair of coils."""
    found: dict[tuple[object, ...], Handover] = {}
    for table in tables:
        for one in table:
            key = (one.place, one.valve, one.from_coil, one.to_coil)
            found[key] = min(found.get(key, one), one, key=lambda handover: handover.least_gap_us)
    return tuple(sorted(found.values(), key=lambda one: (one.place, one.valve, one.from_coil)))


OPPOSED_COILS = Check(
    "opposed-coils", Severity.ERROR, "both coils of a valve commanded at once", _commanded_at_once, _never_ended
)
COIL_HANDOVER = Check("coil-handover", Severity.ERROR, "a coil follows the opposed one too closely", _too_close)
