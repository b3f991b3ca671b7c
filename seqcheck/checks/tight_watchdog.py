"""``tight-watchdog``: a watchdog can expire on a healthy machine.

It expires where its time is over before the exit has come to hold: before the inputs have changed (seen or not), the
dwell is over and the condition has been steady. A step that waits for a signal from outside that may take any time is
left out: nobody can say how long that is.
"""

from __future__ import annotations

from collections.abc import Iterator

from seqcheck.checks.check import Check, Obligation, Wording
from seqcheck.checks.study import Study
from seqcheck.checks.wording import round_up
from seqcheck.engine.graph import Event
from seqcheck.engine.trace import Visit
from seqcheck.machine.findings import Severity
from seqcheck.machine.steps import Step, Watchdog
from seqcheck.machine.time import Span


def _obligations(study: Study) -> Iterator[Obligation]:
    for visit in study.trace.visits:
        watchdog = visit.step.watchdog
        if watchdog is None or visit.left is None or any(answer.outside for answer in visit.answers):
            continue
        step = visit.step
        expires = study.later(Event("watchdog", step.name), visit.entered.event, Span.exactly(watchdog.within))
        holds = study.last_of(Event("exit holds", step.name), _what_must_hold(visit))
        yield Obligation(step.name, step.name, watchdog.place, holds, expires, _wording(step, watchdog))


def _what_must_hold(visit: Visit) -> list[int]:
    held = [answer.held for answer in visit.answers]
    return held + [event for event in (visit.dwell_over, visit.steady_over) if event is not None] or [
        visit.entered.event
    ]


def _wording(step: Step, watchdog: Watchdog) -> Wording:
    return Wording(
        f"the watchdog of {step.name} can expire {{by}} before the step is done",
        lambda by: f"within {round_up(watchdog.within + by)} is safe",
    )


CHECK = Check("tight-watchdog", Severity.ERROR, "a watchdog expires on a healthy machine", _obligations)
