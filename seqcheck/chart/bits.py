"""The lines of what is only on or off: signals from outside, and flags; where signals start that follow the machine.

Takes a study; gives changes. May add events to the graph.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator

from seqcheck.chart.changes import Change, words
from seqcheck.chart.model import HIGH, LOW
from seqcheck.checks.study import Study
from seqcheck.engine.conditions import alternatives_of
from seqcheck.engine.graph import Event
from seqcheck.engine.held import spells_of_condition
from seqcheck.engine.trace import Effect, Read, Touch, Wait
from seqcheck.machine.devices import FollowingSignal
from seqcheck.machine.places import Place
from seqcheck.machine.steps import CommandKind
from seqcheck.machine.time import NO_TIME


def follower_starts_on(study: Study, signal: FollowingSignal) -> bool:
    edges = study.trace.edges.get(signal.name, ())
    if edges:
        return not edges[0].value
    return any(spell.begin == 0 for spell in spells_of_condition(study.trace, alternatives_of(signal.follows)))


# Signals from outside -------------------------------------------------------------------------------------------


def outside_line(study: Study, signal: str) -> tuple[int, tuple[Change, ...]]:
    """The level it starts at, and its changes: it comes, and stays until every step that waits for it is left; a choice
    that asks it finds it on or off."""
    awaited = sorted(_awaited(study, signal), key=lambda one: study.time(one.event))
    start = level = HIGH - awaited[0].level if awaited else LOW
    changes = []
    for change in sorted([*awaited, *_asked(study, signal)], key=lambda one: study.time(one.event)):
        if change.level != level:
            changes.append(change)
            level = change.level
    return start, tuple(changes)


def _awaited(study: Study, signal: str) -> Iterator[Change]:
    waits: dict[tuple[Read, bool, int], list[Wait]] = {}
    for wait in (*study.trace.visits, *study.trace.choices):
        for literal, (held, _) in wait.signals.items():
            if literal.term.subject == signal and held != wait.entered.event:
                waits.setdefault((wait.entered, literal.wanted, held), []).append(wait)
    for (_, wanted, held), waiting in waits.items():
        comes = study.trace.graph.arcs[held][0].cause
        lefts = [wait.left.event for wait in waiting if wait.left is not None]
        if len(lefts) == len(waiting) and study.time(comes) > max(map(study.time, lefts)):
            continue
        level = HIGH if wanted else LOW
        yield Change(comes, level, words(study, comes))
        if len(lefts) == len(waiting):
            yield Change(_all_left(study, signal, lefts), HIGH - level, _over(signal, wanted))


def _asked(study: Study, signal: str) -> Iterator[Change]:
    """A choice asks at one read, and what it finds is of no account once that read has been written."""
    for choice in study.trace.choices:
        if signal in choice.asked:
            on = choice.asked[signal]
            level = HIGH if on else LOW
            line = choice.choose.place.line
            text = f"choice in line {line} finds {signal} {'on' if on else 'off'}"
            yield Change(choice.entered.event, level, text, found=True)
            yield Change(choice.entered.floor, LOW, _over(signal, True), found=True)


def _all_left(study: Study, signal: str, lefts: Iterable[int]) -> int:
    last = study.last_of(Event("all left", signal), list(lefts))
    return study.later(Event("signal over", signal), last, NO_TIME)


def _over(signal: str, wanted: bool) -> str:
    return f"signal {signal} may {'go' if wanted else 'come'} again"


# Flags ----------------------------------------------------------------------------------------------------------


def flag_changes(study: Study, flag: str) -> Iterator[Change]:
    """A flag is on while it is set, or a step that has it on is active; a reset wins over a set at the same read."""
    by_event: dict[int, list[Touch]] = {}
    for touch in study.trace.touches.get(flag, ()):
        by_event.setdefault(touch.event, []).append(touch)
    holding: set[tuple[str, Place]] = set()
    stored = on = False
    for event in sorted(by_event, key=study.time):
        for touch in by_event[event]:
            key = (touch.origin.step, touch.origin.place)
            if touch.effect is Effect.ENDS:
                holding.discard(key)
            elif touch.effect is Effect.BEGINS and touch.origin.kind is CommandKind.ON:
                holding.add(key)
            elif touch.effect is Effect.BEGINS:
                stored = True
        stored = stored and all(touch.effect is not Effect.RESETS for touch in by_event[event])
        if on != (stored or bool(holding)):
            on = not on
            yield Change(event, HIGH if on else LOW, f"flag {flag} is {'set' if on else 'reset'}")
