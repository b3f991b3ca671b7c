"""What is asked of a chart, and the names in it.

Takes options as they were written; gives steps, and for each ``choose`` the branches to take. Refuses, in words, a name
that there is none of (``Unplaceable``).
"""

from __future__ import annotations

import difflib
import re
from collections.abc import Iterator, Sequence

from seqcheck.machine.model import Machine, items_of, steps_of
from seqcheck.machine.places import Place
from seqcheck.machine.records import record
from seqcheck.machine.steps import Choose, Step

_OTHERWISE = "otherwise"


@record
class Part:
    """What is asked for. Steps by name, qualified or not; ``rows`` by device or sequence (all if empty); ``choices``
    as ``PLACE=BRANCH``."""

    cycles: int = 1
    from_step: str | None = None
    to_step: str | None = None
    anchor: str | None = None
    rows: tuple[str, ...] = ()
    choices: tuple[str, ...] = ()


class Unplaceable(Exception):
    """What was asked for is not there; the message says so to the user."""


@record
class Wish:
    """The ``branches`` (from 0) that a choice is to take one after another; the last of them for good. ``asked``: as it
    was written."""

    choose: Choose
    branches: tuple[int, ...]
    asked: str


def step_named(machine: Machine, asked: str) -> str:
    """The qualified name of a step."""
    names = [step.name for sequence in machine.sequences for step in steps_of(sequence)]
    found = [name for name in names if name == asked] or [name for name in names if name.partition(".")[2] == asked]
    if len(found) > 1:
        raise Unplaceable(f"several sequences have a step {asked}: write {' or '.join(found)}")
    if found:
        return found[0]
    near = difflib.get_close_matches(asked, [*names, *(name.partition(".")[2] for name in names)], 1, 0.6)
    advice = f"did you mean {near[0]}?" if near else f"the steps are {', '.join(names[:12])}"
    raise Unplaceable(f"there is no step {asked}; {advice}")


def wishes_of(machine: Machine, asked: Sequence[str]) -> tuple[Wish, ...]:
    """For each choice that is asked for; and for those whose branches hold such a choice, that they lead there."""
    wishes: dict[Place, Wish] = {}
    for one in asked:
        choose, branch = _wish(machine, one)
        before = wishes[choose.place].branches if choose.place in wishes else ()
        wishes[choose.place] = Wish(choose, (*before, branch), one)
    for wish in list(wishes.values()):
        for outer, number in _around(machine, wish.choose):
            wishes.setdefault(outer.place, Wish(outer, (number,), wish.asked))
    return tuple(wishes.values())


def _wish(machine: Machine, asked: str) -> tuple[Choose, int]:
    chooses = list(_chooses(machine))
    if not chooses:
        raise Unplaceable(f"--choice {asked}: this text has nothing to choose")
    place, equals, branch = asked.partition("=")
    if not place or not equals or not branch:
        example = f"{chooses[0].place.line}=1"
        raise Unplaceable(f"--choice {asked}: write the line of a choose, or a step inside it, and a branch: {example}")
    choose = _at_line(machine, asked, int(place)) if re.fullmatch("[0-9]+", place) else _with(machine, asked, place)
    return choose, _branch(choose, asked, branch)


def _at_line(machine: Machine, asked: str, line: int) -> Choose:
    chooses = list(_chooses(machine))
    found = [one for one in chooses if one.place.line == line]
    if len(found) > 1:
        raise Unplaceable(f"--choice {asked}: {len(found)} choices begin in line {line}; name a step inside the one")
    if not found:
        raise Unplaceable(f"--choice {asked}: no choose begins in line {line}; {_where(chooses)}")
    return found[0]


def _with(machine: Machine, asked: str, name: str) -> Choose:
    """The innermost choice with the step in one of its branches."""
    step = step_named(machine, name)
    within = [one for one in _chooses(machine) if any(item.name == step for item in _steps_in(one))]
    if not within:
        raise Unplaceable(f"--choice {asked}: step {name} is in no branch of a choose; {_where(_chooses(machine))}")
    return within[-1]


def _branch(choose: Choose, asked: str, branch: str) -> int:
    conditions = [one.condition for one in choose.choices]
    if branch == _OTHERWISE and None in conditions:
        return conditions.index(None)
    if re.fullmatch("[0-9]{1,6}", branch) and 1 <= int(branch) <= len(conditions):
        return int(branch) - 1
    last = f" or {_OTHERWISE}" if None in conditions else ""
    raise Unplaceable(
        f"--choice {asked}: the choose in line {choose.place.line} has the branches 1 to {len(conditions)}{last}"
    )


def _where(chooses: Sequence[Choose] | Iterator[Choose]) -> str:
    lines = sorted({one.place.line for one in chooses})
    return f"there is one in line{'' if len(lines) == 1 else 's'} {', '.join(map(str, lines))}"


def _chooses(machine: Machine) -> Iterator[Choose]:
    """Outer ones first."""
    for sequence in machine.sequences:
        yield from (item for item in items_of(sequence.items) if isinstance(item, Choose))


def _steps_in(choose: Choose) -> Iterator[Step]:
    return (item for one in choose.choices for item in items_of(one.items) if isinstance(item, Step))


def _around(machine: Machine, inner: Choose) -> Iterator[tuple[Choose, int]]:
    """The choices that lead to another one, with their branch."""
    for choose in _chooses(machine):
        for number, one in enumerate(choose.choices):
            if any(item is inner for item in items_of(one.items)):
                yield choose, number
