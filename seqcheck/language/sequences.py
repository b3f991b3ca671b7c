"""Sequences with their names looked up.

Takes the registry with the names of all steps; gives the model's sequences; reports commands, conditions and jumps
that cannot be. Motion steps are in ``motions``.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator

from seqcheck.language.conditions import Conditions, View
from seqcheck.language.motions import resolve_motion
from seqcheck.language.problems import short
from seqcheck.language.registry import Registry
from seqcheck.language.syntax import (
    ChooseText,
    CommandText,
    EveryText,
    ItemText,
    JumpText,
    MotionText,
    RepeatText,
    SequenceText,
    StepText,
    TermText,
    TogetherText,
    WithinText,
)
from seqcheck.machine.conditions import TermKind, terms_of
from seqcheck.machine.devices import FollowingSignal, Signal
from seqcheck.machine.model import items_of
from seqcheck.machine.places import Place
from seqcheck.machine.steps import (
    Choice,
    Choose,
    Command,
    CommandKind,
    Item,
    Jump,
    Repeat,
    Sequence,
    Step,
    Together,
    Watchdog,
)

#: The branches around an item: the place of each `together` and the number of the branch in it.
Branch = tuple[tuple[Place, int], ...]


def name_steps(registry: Registry) -> dict[Place, tuple[str, Branch]]:
    """Note the names of all steps in the registry; give the name and branch of each step by its place."""
    named: dict[Place, tuple[str, Branch]] = {}
    for sequence in registry.sequences.values():
        steps = registry.steps.setdefault(sequence.name.text, {})
        seen: Counter[str] = Counter()
        for item, branch in _walk(sequence.items, ()):
            if isinstance(item, MotionText):
                seen[item.spelled] += 1
                name = item.spelled + (str(seen[item.spelled]) if seen[item.spelled] > 1 else "")
            elif isinstance(item, StepText):
                name = item.name.text
            else:
                continue
            if name in steps and isinstance(item, StepText):
                message = f"the step {short(name)} stands in line {steps[name].line} already"
                registry.problems.report(item.name.place, message, "give it another name")
            steps.setdefault(name, item.place)
            named[item.place] = (name, branch)
    return named


def _walk(items: tuple[ItemText, ...], branch: Branch) -> Iterator[tuple[ItemText, Branch]]:
    for item in items:
        yield item, branch
        match item:
            case TogetherText(branches, place):
                for number, inner in enumerate(branches):
                    yield from _walk(inner, (*branch, (place, number)))
            case ChooseText(choices):
                for choice in choices:
                    yield from _walk(choice.items, branch)
            case RepeatText(_, inner):
                yield from _walk(inner, branch)
            case _:
                pass


class Sequences:
    """Resolves one sequence."""

    def __init__(
        self,
        registry: Registry,
        text: SequenceText,
        named: dict[Place, tuple[str, Branch]],
        signals: dict[str, Signal],
    ) -> None:
        self._registry = registry
        self._text = text
        self._name = text.name.text
        self._named = named
        self._signals = signals
        self._conditions = Conditions(registry, View.STEP, self._name)
        first = text.items[0] if text.items else None
        self._every = first if isinstance(first, EveryText) else None

    def resolve(self) -> Sequence:
        text = self._text
        items = self._items(text.items, ())
        if not any(isinstance(item, Step) for item in items_of(items)) and self._registry.whole:
            self._registry.problems.report(text.name.place, f"the sequence {short(self._name)} has no step", None)
        label = text.marks.label.text if text.marks.label else None
        return Sequence(self._name, label, text.once, items, text.place)

    def _items(self, items: tuple[ItemText, ...], branch: Branch) -> tuple[Item, ...]:
        resolved = (self._item(item, branch) for item in items)
        return tuple(item for item in resolved if item is not None)

    def _item(self, item: ItemText, branch: Branch) -> Item | None:
        match item:
            case EveryText():
                if item is not self._every:
                    self._report(item.place, "`every step within` stands only first in a sequence", "move it there")
                return None
            case StepText():
                return self._step(item, branch)
            case MotionText():
                watchdog = self._watchdog(item.exit.within, branch)
                name = f"{self._name}.{self._named[item.place][0]}"
                return self._watched(resolve_motion(self._registry, item, name, watchdog))
            case TogetherText(branches, place):
                resolved = (self._branch(inner, (*branch, (place, number))) for number, inner in enumerate(branches))
                return Together(tuple(resolved), place)
            case ChooseText():
                return self._choose(item, branch)
            case RepeatText(times, inner, place):
                if not inner:
                    self._report(place, "there is nothing to repeat", "write a step in the braces")
                return Repeat(times, self._items(inner, branch), place)
            case JumpText(target, place):
                step = self._target(target, branch)
                return None if step is None else Jump(step, place)

    def _branch(self, items: tuple[ItemText, ...], branch: Branch) -> tuple[Item, ...]:
        place, number = branch[-1]
        if not items:
            message = f"branch {number + 1} of this `together` is empty"
            self._report(place, message, "write a step in it, or leave it out")
        return self._items(items, branch)

    def _choose(self, text: ChooseText, branch: Branch) -> Choose:
        choices = []
        for choice in text.choices:
            condition = None if choice.condition is None else self._conditions.resolve(choice.condition)
            choices.append(Choice(condition, self._items(choice.items, branch), choice.place))
        return Choose(tuple(choices), self._watchdog(text.within, branch), text.place)

    # Steps

    def _step(self, text: StepText, branch: Branch) -> Step:
        commands = tuple(command for part in text.commands if (command := self._command(part)) is not None)
        exit = text.exit
        until = None if exit.until is None else self._conditions.resolve(exit.until.condition)
        step = Step(
            f"{self._name}.{text.name.text}",
            text.marks.label.text if text.marks.label else None,
            commands,
            until,
            exit.until.steady if exit.until else None,
            exit.dwell.time if exit.dwell else None,
            self._watchdog(exit.within, branch),
            (),
            text.place,
        )
        return self._watched(step)

    def _command(self, text: CommandText) -> Command | None:
        kinds = ("coil", "output") if text.word == "pulse" else ("coil", "output", "flag")
        if not self._registry.is_a(text.target, *kinds):
            return None
        return Command(CommandKind(text.word), text.target.text, text.duration, text.place)

    def _watchdog(self, text: WithinText | None, branch: Branch) -> Watchdog | None:
        if text is None:
            return None
        target = None if text.otherwise is None else self._target(text.otherwise, branch)
        return Watchdog(text.time, target, text.place)

    def _watched(self, step: Step) -> Step:
        """With the watchdog of `every step`, where the step waits for a sensor and has none of its own."""
        if self._every is None or step.watchdog is not None or not self._waits_for_sensor(step):
            return step
        watchdog = Watchdog(self._every.within, None, self._every.place)
        return Step(
            step.name, step.label, step.commands, step.until, step.steady, step.dwell, watchdog, step.moves, step.place
        )

    def _waits_for_sensor(self, step: Step) -> bool:
        return any(
            term.kind is TermKind.SENSOR
            or (term.kind is TermKind.SIGNAL and isinstance(self._signals.get(term.subject), FollowingSignal))
            for term in terms_of(step.until)
        )

    # Jumps

    def _target(self, text: TermText, branch: Branch) -> str | None:
        """The qualified name of a step of this sequence that can be gone to from here."""
        name = text.name.text
        steps = self._registry.steps[self._name]
        if text.owner is not None and text.owner.text != self._name:
            message = f"{short(text.owner.text)} is not this sequence"
            self._report(text.place, message, f"go to a step of {short(self._name)}")
            return None
        if name not in steps:
            if self._registry.whole and not self._registry.is_forgiven(name):
                advice = self._registry.problems.did_you_mean(name, steps, "name a step of the same sequence")
                self._report(text.place, f"the sequence {short(self._name)} has no step {short(name)}", advice)
            return None
        if self._named[steps[name]][1] != branch:
            inside = len(self._named[steps[name]][1]) < len(branch)
            message = (
                f"the step {short(name)} is outside of this `together`"
                if inside
                else (f"the step {short(name)} is inside a branch of a `together`")
            )
            self._report(text.place, message, "the branches of a `together` begin and end together")
            return None
        return f"{self._name}.{name}"

    def _report(self, place: Place, message: str, advice: str | None) -> None:
        self._registry.problems.report(place, message, advice)
