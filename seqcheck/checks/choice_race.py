"""``choice-race``: which branch of a choice is taken is a matter of plant times.

What a choice asks must have changed well before the read that asks it, or well after; and of two conditions for which
it waits, the one that comes first must do so in every run. A signal from outside may come out either way, which is
nobody's fault.
"""

from __future__ import annotations

from collections.abc import Iterator

from seqcheck.checks.check import Check, Instead, Obligation, Wording
from seqcheck.checks.shown_states import branch_name
from seqcheck.checks.study import Study
from seqcheck.engine.choice_orders import ChoiceOrder, asked_in_time
from seqcheck.engine.trace import Choice
from seqcheck.machine.findings import Severity
from seqcheck.machine.model import items_of
from seqcheck.machine.steps import Step


def _obligations(study: Study) -> Iterator[Obligation]:
    turned = {key[1] for key in study.settlement.recipe.turned if key[0] == "choose"}
    for choice in study.trace.choices:
        # Where this play turned the choice, how far it is from turning back says nothing.
        if choice.taken is None or choice.choose.place in turned:
            continue
        for one in asked_in_time(study.machine, study.trace, choice):
            if one.other is not None and one.other != choice.taken and not one.outside:
                yield _obligation(choice, one)


def _obligation(choice: Choice, one: ChoiceOrder) -> Obligation:
    assert one.other is not None
    where = f"behind {choice.after}" if choice.after else f"in line {choice.choose.place.line}"
    message = f"the choice {where} can take `{branch_name(choice.choose, one.other)}` instead, {one.how}"
    return Obligation(
        choice_name(choice),
        None,
        choice.choose.place,
        one.order.first,
        one.order.second,
        Wording(message, lambda by: f"let the step before wait until {one.asked} is sure to be as it will stay"),
        least=1 if one.order.strict else 0,
        diverts=False,
        instead=_instead(choice, one.other),
        assumed=((one.order.first, one.order.second),),
    )


def _instead(choice: Choice, other: int) -> Instead:
    read = choice.entered if choice.left is None else choice.left
    way = branch_name(choice.choose, other)

    def shown(played: Study) -> bool:
        return any(
            one.choose is choice.choose and one.taken not in (None, choice.taken) for one in played.trace.choices
        )

    return Instead(read.event, f"the choice takes `{way}`", shown)


def choice_name(choice: Choice) -> str:
    """A choice is known by the step behind which it stands, or by the first step in it."""
    items = (item for one in choice.choose.choices for item in items_of(one.items))
    inside = next((item.name for item in items if isinstance(item, Step)), f"line {choice.choose.place.line}")
    return choice.after or inside


CHECK = Check("choice-race", Severity.WARNING, "which way a choice goes is a matter of plant times", _obligations)
