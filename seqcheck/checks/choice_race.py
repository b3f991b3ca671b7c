"""``choice-race``: which branch of a choice is taken is a matter of plant times.

What a choice asks must have changed well before the read that asks it, or well after; and of two conditions for which
it waits, the one that comes first must do so in every run. A signal from outside may come out either way, which is
nobody's fault.
"""

from __future__ import annotations

from collections.abc import Iterator
from functools import partial

from seqcheck.checks.check import Check, Instead, Obligation, Wording
from seqcheck.checks.narrate import describe
from seqcheck.checks.shown_states import branch_name
from seqcheck.checks.study import Study, Turned
from seqcheck.engine.choice_orders import asked_in_time
from seqcheck.engine.order import Order
from seqcheck.engine.partings import is_up_to_someone, parted_at, with_taken_in
from seqcheck.engine.trace import Choice
from seqcheck.machine.findings import Severity
from seqcheck.machine.model import items_of
from seqcheck.machine.steps import Step


def _obligations(study: Study) -> Iterator[Obligation]:
    yield from _of_what_is_asked(study)
    yield from _of_turned_orders(study)


def _of_what_is_asked(study: Study) -> Iterator[Obligation]:
    turned = {key[1] for key in study.settlement.recipe.turned if key[0] == "choose"}
    # How far a choice is from what was turned long before says nothing of it: `usual` is what it took before that.
    for choice, usual in with_taken_in(study.unturned.trace, study.trace):
        # Nor does how far it is from turning back where this play turned it.
        if choice.taken is None or choice.choose.place in turned or is_up_to_someone(choice):
            continue
        for one in asked_in_time(study.trace, choice):
            if one.other not in (None, choice.taken, usual) and not one.outside:
                yield _obligation(study, choice, one.other, one.order, one.how, one.asked)


def _of_turned_orders(study: Study) -> Iterator[Obligation]:
    """Orders by which the choice is another one in the play that has them the other way round: of what it asks, where
    it then waits first, or of what came long before."""
    told = {(choice.choose.place, other) for _, choice, other in _parted(study.unturned)}
    for turned, choice, other in _parted(study):
        if study.unturned is study or (choice.choose.place, other) not in told:
            yield _obligation(study, choice, other, turned.order, *_told(study, choice, turned.order))


def _parted(study: Study) -> Iterator[tuple[Turned, Choice, int]]:
    for turned in study.turned:
        parted = parted_at(study.trace, turned.trace, turned.unturned)
        if parted is not None:
            yield turned, *parted


def _told(study: Study, choice: Choice, order: Order) -> tuple[str, str]:
    """How it comes the other way round, and what is asked."""
    for one in asked_in_time(study.trace, choice):
        if one.order.key == order.key:
            return one.how, one.asked
    asked = sorted({literal.term.subject for literal in choice.literals})
    first, second = (_event(study, number) for number in (order.first, order.second))
    return f"{second} {{by}} before {first}", " and ".join(asked)


def _event(study: Study, number: int) -> str:
    event = study.trace.graph.events[number]
    return describe(study, event) or f"the read of {event.subject}"


def _obligation(study: Study, choice: Choice, other: int, order: Order, how: str, asked: str) -> Obligation:
    where = f"behind {choice.after}" if choice.after else f"in line {choice.choose.place.line}"
    message = f"the choice {where} can take `{branch_name(choice.choose, other)}` instead, {how}"
    return Obligation(
        choice_name(choice),
        None,
        choice.choose.place,
        order.first,
        order.second,
        partial(Wording, message, lambda by: f"let the step before wait until {asked} is sure to be as it will stay"),
        least=1 if order.strict else 0,
        diverts=False,
        instead=_instead(study, choice, other),
        assumed=((order.first, order.second),),
        kept=order.keeping,
    )


def _instead(study: Study, choice: Choice, other: int) -> Instead:
    read = choice.entered if choice.left is None else choice.left
    way = branch_name(choice.choose, other)

    def shown(played: Study) -> bool:
        """At this choice or, which parts the run before, at an earlier one in the same place."""
        made = [one for one in study.trace.choices if one.choose is choice.choose]
        taken = [one.taken for one in made[: made.index(choice) + 1]]
        there = [one.taken for one in played.trace.choices if one.choose is choice.choose]
        return any(one is not None and one != usual for one, usual in zip(there, taken, strict=False))

    return Instead(read.event, f"the choice takes `{way}`", shown)


def choice_name(choice: Choice) -> str:
    """A choice is known by the step behind which it stands, or by the first step in it."""
    items = (item for one in choice.choose.choices for item in items_of(one.items))
    inside = next((item.name for item in items if isinstance(item, Step)), f"line {choice.choose.place.line}")
    return choice.after or inside


CHECK = Check("choice-race", Severity.WARNING, "which way a choice goes is a matter of plant times", _obligations)
