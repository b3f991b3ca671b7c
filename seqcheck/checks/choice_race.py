"""``choice-race``: which branch of a choice is taken is a matter of plant times.

What a choice asks must have changed well before the read that asks it, or well after; and of two conditions for which
it waits, the one that comes first must do so in every run. A signal from outside may come out either way, which is
nobody's fault.
"""

from __future__ import annotations

from collections.abc import Iterator

from seqcheck.checks.check import Check, Obligation, Wording
from seqcheck.checks.study import Study
from seqcheck.engine.orders import ChoiceOrder, asked_in_time
from seqcheck.engine.trace import Choice
from seqcheck.machine.findings import Severity
from seqcheck.machine.model import items_of
from seqcheck.machine.steps import Step


def _obligations(study: Study) -> Iterator[Obligation]:
    for choice in study.trace.choices:
        if choice.taken is None:
            continue
        for one in asked_in_time(study.machine, study.trace, choice):
            if one.other is not None and one.other != choice.taken and not one.outside:
                yield _obligation(choice, one)


def _obligation(choice: Choice, one: ChoiceOrder) -> Obligation:
    subject = choice.after or _first_step(choice) or f"choose in line {choice.choose.place.line}"
    where = f"behind {choice.after}" if choice.after else f"in line {choice.choose.place.line}"
    assert one.other is not None
    other = choice.choose.choices[one.other]
    way = "otherwise" if other.condition is None else f"the branch in line {other.place.line}"
    message = f"the choice {where} can take {way} instead, {one.how}"
    return Obligation(
        subject,
        choice.after,
        choice.choose.place,
        one.order.first,
        one.order.second,
        Wording(message, lambda by: f"let the step before wait until {one.asked} is sure to be as it will stay"),
        diverts=False,
        assumed=((one.order.first, one.order.second),),
    )


def _first_step(choice: Choice) -> str | None:
    items = (item for one in choice.choose.choices for item in items_of(one.items))
    return next((item.name for item in items if isinstance(item, Step)), None)


CHECK = Check("choice-race", Severity.WARNING, "which way a choice goes is a matter of plant times", _obligations)
