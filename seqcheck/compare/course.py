"""The course of two sequences: which steps come in which order, and what holds them together.

Takes two sequences; gives what differs besides steps that are new or gone, and the steps that only have another name.
Branches of ``together`` all run at once: their order makes no difference.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Set
from collections.abc import Sequence as SequenceOf
from difflib import SequenceMatcher
from itertools import pairwise

from seqcheck.compare.differences import Change, Difference, Part
from seqcheck.compare.spelling import spelled_condition, spelled_watchdog
from seqcheck.machine.model import steps_of
from seqcheck.machine.steps import Choice, Choose, Item, Jump, Repeat, Sequence, Step, Together

_AT_THE_START = "at its start"
_NOTHING = "nothing"
#: Stands behind every course; no step can be named so.
_END = ""

Words = SequenceOf[str]


def course_changes(old: Sequence, new: Sequence, renamed: Mapping[str, str]) -> Iterator[Change]:
    """Where the order of steps or what holds them together differs, each with the step before it. A step that is new
    or gone is told as such, and left out here."""
    before, after = [renamed.get(one, one) for one in _course(old.items)], _course(new.items)
    of_old, of_new = {renamed.get(one, one) for one in _names(old)}, _names(new)
    both = of_old & of_new
    before = [one for one in before if one in both or one not in of_old]
    after = [one for one in after if one in both or one not in of_new]
    was, now = [one for one in before if one in both], [one for one in after if one in both]
    where = {step: f"after {last}" for last, step in pairwise((*now, _END))} | {now[0] if now else _END: _AT_THE_START}
    for word, a, b, c, d in SequenceMatcher(None, was, now, autojunk=False).get_opcodes():
        if word != "equal":
            yield _changed(new, where[(*now, _END)[c]], was[a:b], now[c:d])
    bonds_before, bonds_after = _bonds(before, both), _bonds(after, both)
    for step in (*now, _END):
        old_bonds, new_bonds = _without_what_they_share(bonds_before[step], bonds_after[step])
        if old_bonds or new_bonds:
            yield _changed(new, where[step], old_bonds, new_bonds)


def places_in_course(sequence: Sequence) -> Mapping[str, str]:
    """For each step the words ``after main.raise``, or that it is the first."""
    names = [step.name for step in steps_of(sequence)]
    return {name: f"after {last}" for last, name in pairwise(names)} | dict.fromkeys(names[:1], _AT_THE_START)


def renamed_steps(old: Sequence, new: Sequence, aspects: Callable[[Step], object]) -> dict[str, str]:
    """Steps that stand where they stood and are what they were, but have another name; old name to new."""
    before, after = ({step.name: step for step in steps_of(one)} for one in (old, new))
    names, now = list(before), list(after)
    found = {}
    for word, a, b, c, d in SequenceMatcher(None, names, now, autojunk=False).get_opcodes():
        if word == "replace" and b - a == d - c:
            for one, other in zip(names[a:b], now[c:d], strict=True):
                both = one not in after and other not in before
                if both and aspects(before[one]) == aspects(after[other]):
                    found[one] = other
    return found


def _changed(sequence: Sequence, where: str, was: Words, now: Words) -> Change:
    return Change(Part.STEP, f"sequence {sequence.name}", Difference.CHANGED, where, _shown(was), _shown(now))


def _shown(words: Words) -> str:
    """A brace that stands alone with its word says nothing."""
    return words[0].removesuffix(" {") if len(words) == 1 else " ".join(words) or _NOTHING


def _bonds(course: Words, steps: Set[str]) -> dict[str, list[str]]:
    """What stands in front of each step since the one before it, and at the end."""
    found: dict[str, list[str]] = {}
    met: list[str] = []
    for word in (*course, _END):
        if word in steps or word == _END:
            found[word], met = met, []
        else:
            met.append(word)
    return found


def _without_what_they_share(old: Words, new: Words) -> tuple[Words, Words]:
    """Both without their common beginning and end."""
    start = next((at for at, (one, other) in enumerate(zip(old, new, strict=False)) if one != other), None)
    if start is None:
        start = min(len(old), len(new))
    old, new = old[start:], new[start:]
    end = 0
    while end < min(len(old), len(new)) and old[-1 - end] == new[-1 - end]:
        end += 1
    return old[: len(old) - end], new[: len(new) - end]


def _names(sequence: Sequence) -> set[str]:
    return {step.name for step in steps_of(sequence)}


def _course(items: tuple[Item, ...]) -> list[str]:
    return [word for item in items for word in _words(item)]


def _words(item: Item) -> Iterator[str]:
    """Steps by their names; what holds them together in the words of the language."""
    match item:
        case Step():
            yield item.name
        case Together(branches):
            yield "together {"
            for number, branch in enumerate(sorted(map(_course, branches))):
                yield from ("} and {",) if number else ()
                yield from branch
            yield "}"
        case Choose(choices, watchdog):
            yield "choose {"
            for choice in choices:
                yield from _choice(choice)
            yield "}" if watchdog is None else f"}} within {spelled_watchdog(watchdog)}"
        case Repeat(times, inner):
            yield from (f"repeat {times} {{", *_course(inner), "}")
        case Jump(target):
            yield f"jump {target}"


def _choice(choice: Choice) -> Iterator[str]:
    yield "otherwise {" if choice.condition is None else f"when {spelled_condition(choice.condition)} {{"
    yield from _course(choice.items)
    yield "}"
