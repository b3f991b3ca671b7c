"""Which branch of a choice hangs on an order of two events, however far that lies before it.

Takes the trace of a play and that of one which has an order the other way round and else is the same; gives the choice
that the two make differently, if that is the first thing that they do.
"""

from __future__ import annotations

from collections import Counter, defaultdict, deque
from collections.abc import Hashable, Iterator

from seqcheck.engine.trace import Choice, Trace, Visit, Wait
from seqcheck.machine.places import Place


def parted_at(trace: Trace, other: Trace, unturned: Trace) -> tuple[Choice, int] | None:
    """The choice of ``trace``, and the branch that is taken in the other one. None where the two go the same way, where
    something else parts them, where it was up to someone outside, and where the other one only turns back to what is
    done in the play that has turned no order."""
    own, there, plain = (dict(_decisions(one)) for one in (trace, other, unturned))
    apart = [key for key in own if key in there and _way(own[key]) != _way(there[key])]
    if not apart:
        return None
    first = min(apart, key=lambda key: _time(trace, own[key]))
    one, instead = own[first], there[first]
    if not isinstance(one, Choice) or not isinstance(instead, Choice) or one.taken is None or instead.taken is None:
        return None
    if one.asked != instead.asked or is_up_to_someone(one) or is_up_to_someone(instead):
        return None
    if first in plain and _way(plain[first]) == _way(instead):
        return None
    return one, instead.taken


def with_taken_in(unturned: Trace, trace: Trace) -> Iterator[tuple[Choice, int | None]]:
    """Every choice of ``trace``, and what it takes in the other play, as often as it had come up before."""
    there: dict[Place, deque[int | None]] = defaultdict(deque)
    for choice in unturned.choices:
        there[choice.choose.place].append(choice.taken)
    for choice in trace.choices:
        others = there[choice.choose.place]
        yield choice, others.popleft() if others else None


def _decisions(trace: Trace) -> Iterator[tuple[Hashable, Wait]]:
    """Choices that were made, and steps that a watchdog may end, each known by how often it had come up before."""
    counts: Counter[Hashable] = Counter()
    waits: list[Choice | Visit] = [*trace.choices, *(visit for visit in trace.visits if visit.alarm is not None)]
    for wait in waits:
        name = wait.choose.place if isinstance(wait, Choice) else wait.step.name
        counts[name] += 1
        if wait.left is not None:
            yield (name, counts[name]), wait


def _way(wait: Wait) -> tuple[bool, int | None]:
    return wait.expired, wait.taken if isinstance(wait, Choice) else None


def _time(trace: Trace, wait: Wait) -> int:
    assert wait.left is not None
    return trace.times[wait.left.event]


def is_up_to_someone(choice: Choice) -> bool:
    """Whether it stood until a signal from outside came."""
    return choice.left is not choice.entered and any(answer.literal in choice.signals for answer in choice.answers)
