"""Choices: which branch is taken, at once or later, and what each has come to."""

from __future__ import annotations

from collections import Counter

from seqcheck.machine.steps import Choose
from tests.oracle.clock import Clock
from tests.oracle.knowledge import Knowledge
from tests.oracle.outside import Outside
from tests.oracle.reads import Read
from tests.oracle.records import Taken
from tests.oracle.routes import Thread
from tests.oracle.visits import ActiveChoice, place_of
from tests.oracle.waiting import Waiting


class Choosing:
    """``standing`` are the choices that wait; ``taken`` is what came of each."""

    def __init__(self, clock: Clock, knowledge: Knowledge, outside: Outside, waiting: Waiting) -> None:
        self.standing: list[ActiveChoice] = []
        self.taken: list[Taken] = []
        self._clock = clock
        self._knowledge = knowledge
        self._outside = outside
        self._waiting = waiting
        self._occasions: Counter[str] = Counter()

    def come_to(self, choose: Choose, thread: Thread, read: Read) -> ActiveChoice:
        """A choice as it is at its read; what changes at this very read is not known."""
        self._knowledge.pass_floors()
        place = place_of(choose)
        choice = ActiveChoice(thread, read, self._knowledge, choose=choose, occasion=self._occasions[place])
        self._occasions[place] += 1
        choice.asked = self._outside.ask(choice.literals, place, choice.occasion)
        choice.index = choice.at_arrival()
        return choice

    def stand(self, choice: ActiveChoice) -> None:
        self._clock.log(f"{choice.name} stands")
        self.standing.append(choice)
        self._waiting.stand(choice)

    def leave(self, choice: ActiveChoice) -> None:
        """It has stood, and is left now: for a branch, or by its watchdog."""
        self._waiting.leave(choice)
        self.standing.remove(choice)
        choice.index = None if choice.gone else choice.first()

    def take(self, choice: ActiveChoice, stood: bool = False) -> None:
        """Note what has come of it, and go into the branch."""
        index, place = choice.index, choice.choose.place
        self._clock.log(f"{choice.name} takes {'its watchdog' if index is None else f'branch {index + 1}'}")
        asked = tuple(choice.asked.items())
        self.taken.append(
            Taken(
                choice.thread.sequence.name,
                place.line,
                place.column,
                choice.occasion,
                index,
                choice.entered,
                self._clock.now,
                stood,
                asked,
            )
        )
        if index is not None:
            choice.thread.take(choice.choose.choices[index])
