"""When a condition of a rule comes to hold in a play, and behind which of its states.

Takes a study and a condition; gives events. What a read sees it has seen before it comes to a state, what it changes
changes behind that, and what holds as the machine stands before its start was there before all states.
"""

from __future__ import annotations

from bisect import bisect_left, bisect_right
from collections.abc import Iterator

from seqcheck.checks.study import Study
from seqcheck.engine.conditions import Alternatives, Literal, holding, literals_of
from seqcheck.engine.graph import Event
from seqcheck.engine.held import spells_of_condition
from seqcheck.machine.conditions import TermKind
from seqcheck.machine.records import record


@record
class Coming:
    """A condition comes to hold by ``event``, behind so many ``passages`` of the play. ``rank``: its place among all
    that happens."""

    event: int
    passages: int
    rank: tuple[int, int, bool]


def comings(study: Study, condition: Alternatives) -> Iterator[Coming]:
    """Each time; what holds as the machine stands has not come."""
    for spell in spells_of_condition(study.trace, condition, instants=True):
        if spell.begin or not holds_at_rest(study, condition):
            yield Coming(
                all_so_by(study, condition, spell.begin),
                passages_before(study, spell.begin, spell.begun_by_read),
                (study.time(spell.begin), spell.begin, spell.begun_by_read),
            )


def passages_before(study: Study, event: int, by_read: bool) -> int:
    """How many states the play has come through when something changes by this event."""
    at = [(study.time(passage.at), passage.at) for passage in study.settlement.path.passages]
    return (bisect_right if by_read else bisect_left)(at, (study.time(event), event))


def holds_at_rest(study: Study, condition: Alternatives) -> bool:
    """Whether it holds as the machine stands before its start."""

    def is_so(literal: Literal) -> bool:
        begun = literal.aspect[0] in (TermKind.STEP, TermKind.FLAG)
        first = () if begun else study.trace.changes.get(literal.aspect, ())[:1]
        return any(change.value for change in first if change.event == 0) == literal.wanted

    return holding(condition, is_so) is not None


def all_so_by(study: Study, condition: Alternatives, begin: int) -> int:
    """The last of the events that made an alternative hold which held at ``begin``."""
    came: dict[Literal, int | None] = {}
    for literal in literals_of(condition):
        since: int | None = None if literal.wanted else 0
        for change in study.trace.changes.get(literal.aspect, ()):
            if (study.time(change.event), change.event) <= (study.time(begin), begin):
                since = change.event if change.value == literal.wanted else None
        came[literal] = since
    held = holding(condition, lambda literal: came[literal] is not None) or ()
    causes = [event for literal in held if (event := came[literal]) is not None]
    return study.last_of(Event("comes to hold", ""), causes) if len(causes) > 1 else begin
