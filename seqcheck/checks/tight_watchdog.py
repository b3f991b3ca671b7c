"""``tight-watchdog``: a watchdog can expire on a healthy machine.

It expires where its time is over before the exit has come to hold: before the inputs have changed (seen or not), the
dwell is over and the condition has been steady. A step that waits for a signal from outside that may take any time is
left out: nobody can say how long that is. Where the watchdog leads to another step it is a warning.
"""

from __future__ import annotations

from collections.abc import Iterator
from functools import partial

from seqcheck.checks.check import Check, Obligation, Sight, Wording
from seqcheck.checks.choice_race import choice_name
from seqcheck.checks.narrate import narrate_typical
from seqcheck.checks.study import Study
from seqcheck.checks.wording import round_up
from seqcheck.engine.graph import Event
from seqcheck.engine.trace import Choice, Visit, Wait
from seqcheck.engine.wait_orders import held_otherwise, held_too_late, what_held
from seqcheck.machine.conditions import TermKind
from seqcheck.machine.devices import OutsideSignal
from seqcheck.machine.findings import Severity
from seqcheck.machine.steps import Watchdog
from seqcheck.machine.time import Span


def _obligations(study: Study) -> Iterator[Obligation]:
    for visit in study.trace.visits:
        yield from _of_wait(study, visit, visit.step.watchdog)
    for choice in study.trace.choices:
        if choice.left is not choice.entered:
            yield from _of_wait(study, choice, choice.choose.watchdog)


def _of_wait(study: Study, wait: Wait, watchdog: Watchdog | None) -> Iterator[Obligation]:
    name, step = _name(wait)
    if watchdog is None or wait.left is None or _at_any_time(study, wait):
        return
    if wait.alarm is not None:
        expires = wait.alarm.over
        holding = [held_too_late(study.trace, wait)] if wait.expired else what_held(wait)
    else:
        expires = study.later(Event("watchdog", name), wait.entered.event, Span.exactly(watchdog.within))
        holding = what_held(wait)
    held = [event for event in holding if event is not None]
    if wait.expired and not held:
        return
    holds = study.last_of(Event("exit holds", name), held or [wait.entered.event])
    others = () if wait.expired else tuple((event, expires) for event in held_otherwise(study.trace, wait))
    yield Obligation(
        name,
        step,
        watchdog.place,
        holds,
        expires,
        partial(_wording, name, watchdog, isinstance(wait, Choice)),
        severity=Severity.WARNING if watchdog.target is not None else None,
        diverts=watchdog.target is None,
        stops=watchdog.target is None,
        others=others,
        assumed=tuple(pair for pair in study.trace.graph.assumed if expires in pair),
    )


def _at_any_time(study: Study, wait: Wait) -> bool:
    signals = study.machine.signals
    return any(
        literal.term.kind is TermKind.SIGNAL
        and isinstance(signal := signals[literal.term.subject], OutsideSignal)
        and signal.after is None
        for literal in wait.literals
    )


def _wording(name: str, watchdog: Watchdog, choice: bool) -> Wording:
    whose, until = (f"the choice with {name}", "it is taken") if choice else (name, "the step is done")
    return Wording(
        f"the watchdog of {whose} can expire {{by}} before {until}",
        lambda by: f"within {round_up(watchdog.within + by)} is safe",
    )


def _always(study: Study) -> Iterator[Sight]:
    """A wait for which nothing comes at all is ended by its watchdog whenever it is entered so."""
    for wait in (*study.trace.visits, *study.trace.choices):
        alarm = wait.alarm
        if alarm is None or not alarm.expired or wait.left is None or _at_any_time(study, wait):
            continue
        if held_too_late(study.trace, wait) is None:
            name, step = _name(wait)
            message = f"nothing that {name} waits for comes before its watchdog expires"
            run = narrate_typical(study, wait.entered.event, wait.left.event)
            yield Sight(name, step, alarm.watchdog.place, message, run, at=wait.left.event, severity=Severity.WARNING)


def _name(wait: Wait) -> tuple[str, str | None]:
    if isinstance(wait, Visit):
        return wait.step.name, wait.step.name
    assert isinstance(wait, Choice)
    return choice_name(wait), None


CHECK = Check("tight-watchdog", Severity.ERROR, "a watchdog expires on a healthy machine", _obligations, _always)
