"""Which of a machine's ways a chart shows.

Takes the plays of a machine and how its choices are to go; gives one play that goes so, and from which cycle on. Where
nothing is asked for, choices take their first branch; where the machine would then never begin a cycle anew, one of
them takes another. Refuses, in words, a way that no known run goes.
"""

from __future__ import annotations

from collections import Counter, deque
from collections.abc import Iterator, Sequence
from dataclasses import replace

from seqcheck.chart.asked import Unplaceable, Wish
from seqcheck.checks.study import Study
from seqcheck.engine.controller import Outcome
from seqcheck.engine.cylinders import Placed
from seqcheck.engine.explore import play
from seqcheck.engine.guide import Way, outcomes_before
from seqcheck.engine.orders import Orders
from seqcheck.engine.player import Player
from seqcheck.engine.settlement import Recipe, Settlement
from seqcheck.engine.strokes import Region
from seqcheck.engine.timeline import given
from seqcheck.engine.trace import Choice, Read
from seqcheck.machine.model import Machine
from seqcheck.machine.places import Place
from seqcheck.machine.records import record
from seqcheck.machine.steps import Choose

_MOST_TRIES = 24


@record
class Preference:
    """The branch that each of some choices takes wherever it may; the others take their first."""

    branches: tuple[tuple[Place, int | None], ...] = ()

    def __call__(self, choice: Choice, outcomes: Sequence[Outcome]) -> Outcome:
        """Where it may not take it yet, it had better wait."""
        wanted = dict(self.branches)
        place = choice.choose.place
        if place in wanted:
            for taken in (wanted[place], None):
                for outcome in outcomes:
                    if outcome.taken == taken:
                        return outcome
        return outcomes[0]

    def but(self, place: Place, branch: int | None) -> Preference:
        kept = tuple(one for one in self.branches if one[0] != place)
        return Preference(tuple(sorted((*kept, (place, branch)))))


@record
class Shown:
    """A play, and its cycle (a number of ``trace.cycles``) at which the chart begins. ``loop``: the events from which
    to which a play goes round that never begins a cycle anew."""

    study: Study
    prefer: Preference
    first: int
    loop: tuple[int, int] | None = None


def shown_way(machine: Machine, studies: Sequence[Study], wishes: Sequence[Wish]) -> Shown:
    """Raises ``Unplaceable`` where no known run goes as is wished."""
    orders = Orders(machine)
    prefer = Preference()
    for wish in wishes:
        prefer = prefer.but(wish.choose.place, wish.branches[-1])
    settlement = play(machine, Recipe(Way(), {}), orders, {}, prefer) if wishes else studies[0].settlement
    if _loops(settlement):
        free = _that_comes_round(machine, settlement, orders, prefer, {wish.choose.place for wish in wishes})
        settlement, prefer = free or (settlement, prefer)
    first = settlement.first
    if any(len(wish.branches) > 1 for wish in wishes):
        settlement = _one_after_another(machine, settlement, orders, prefer, wishes)
    if wishes:
        settlement, first = _as_wished(machine, studies, orders, wishes, prefer, (settlement, first))
    return _shown(machine, studies, settlement, prefer, first)


def _shown(machine: Machine, studies: Sequence[Study], settlement: Settlement, prefer: Preference, first: int) -> Shown:
    typical, path = studies[0], settlement.path
    study = typical
    if settlement is not typical.settlement:
        study = Study(machine, settlement, given(settlement.delays), typical.entered, typical.left)
    loop = None
    if _loops(settlement) and path.round is not None:
        begin, end = path.round
        loop = (path.passages[begin].at, path.passages[end].at)
    return Shown(study, prefer, first, loop)


def _as_wished(
    machine: Machine,
    studies: Sequence[Study],
    orders: Orders,
    wishes: Sequence[Wish],
    prefer: Preference,
    likely: tuple[Settlement, int],
) -> tuple[Settlement, int]:
    """What is likely to go as is wished, if it does; else a known play in which the order of events makes a choice take
    another branch than it does at typical times."""
    settlement, first = likely
    if not _against(settlement, first, wishes):
        return likely
    for study in studies[1:]:
        if study.settlement.recipe.turned:
            played = play(machine, study.settlement.recipe, orders, {}, prefer)
            for start in range(len(played.trace.cycles)):
                if not _against(played, start, wishes):
                    return played, start
    raise Unplaceable(_why_not(settlement, first, wishes))


# Finding the way ------------------------------------------------------------------------------------------------


def _loops(settlement: Settlement) -> bool:
    """Whether the play goes round without ever beginning its first sequence anew."""
    return settlement.first == settlement.last and settlement.path.round is not None


def _that_comes_round(
    machine: Machine, settlement: Settlement, orders: Orders, prefer: Preference, fixed: set[Place]
) -> tuple[Settlement, Preference] | None:
    """The same with as few choices as may be taking another branch."""
    waiting = deque([(settlement, prefer)])
    tried = {prefer}
    while waiting:
        known, taken = waiting.popleft()
        path = known.path
        for passage in path.passages[path.first : path.last]:
            if passage.choice is None or passage.choice.choose.place in fixed:
                continue
            for outcome in passage.outcomes:
                other = taken.but(passage.choice.choose.place, outcome.taken)
                if other in tried or outcome is passage.outcome or len(tried) > _MOST_TRIES:
                    continue
                tried.add(other)
                played = play(machine, Recipe(Way(), {}), orders, {}, other)
                if not _loops(played):
                    return played, other
                waiting.append((played, other))
    return None


def _one_after_another(
    machine: Machine, settlement: Settlement, orders: Orders, prefer: Preference, wishes: Sequence[Wish]
) -> Settlement:
    """From the settled cycle on choices first take those branches that are not for good."""
    pending = {wish.choose.place: list(wish.branches) for wish in wishes if len(wish.branches) > 1}
    begin = settlement.trace.cycles[settlement.first].event
    number = next((n for n, one in enumerate(settlement.path.passages) if one.at == begin), 0)
    while number < len(settlement.path.passages):
        passage = settlement.path.passages[number]
        branches = pending.get(passage.choice.choose.place) if passage.choice is not None else None
        if branches:
            taken = branches.pop(0)
            outcome = next((one for one in passage.outcomes if one.taken == taken), passage.outcome)
            assert outcome is not None
            way = Way((*outcomes_before(settlement.path, number), outcome), number)
            settlement = play(machine, Recipe(way, settlement.delays), orders, {}, prefer)
        number += 1
    return settlement


def choices_from(settlement: Settlement, first: int, choose: Choose) -> list[Choice]:
    """The times that a choice is taken in the cycle with this number; in all that follows where none begins anew."""
    trace = settlement.trace
    begin = trace.times[trace.cycles[first].event]
    end = trace.times[trace.cycles[first + 1].event] if first + 1 < len(trace.cycles) else max(trace.times)
    return [
        choice
        for choice in trace.choices
        if choice.choose.place == choose.place
        and choice.left is not None
        and begin <= trace.times[choice.left.event] <= end
    ]


def _against(settlement: Settlement, first: int, wishes: Sequence[Wish]) -> tuple[Wish, ...]:
    """The wishes that this cycle does not come up to."""
    return tuple(wish for wish in wishes if not _granted(wish, choices_from(settlement, first, wish.choose)))


def _granted(wish: Wish, choices: Sequence[Choice]) -> bool:
    """One after another, and from the last one on always so."""
    taken = [choice.taken for choice in choices]
    wanted = [*wish.branches, *[wish.branches[-1]] * len(taken)][: len(taken)]
    return len(taken) >= len(wish.branches) and taken == wanted


def _why_not(settlement: Settlement, first: int, wishes: Sequence[Wish]) -> str:
    wish = _against(settlement, first, wishes)[0]
    choices = choices_from(settlement, first, wish.choose)
    line = wish.choose.place.line
    if not choices:
        return f"--choice {wish.asked}: a cycle that goes so does not come to the choose in line {line}"
    taken = " and then ".join(str((choice.taken or 0) + 1) for choice in choices)
    if len(choices) < len(wish.branches):
        often = "once" if len(choices) == 1 else f"{len(choices)} times"
        return f"--choice {wish.asked}: a cycle that goes so comes to the choose in line {line} {often}, not more often"
    return f"--choice {wish.asked}: no known run goes so; by the machine itself it takes branch {taken}"


# Going on -------------------------------------------------------------------------------------------------------


class _Onward:
    """Goes as another play has gone, then on, until so many cycles have begun, or through no more than so many states
    in search of them."""

    def __init__(self, outcomes: Sequence[Outcome], prefer: Preference, cycles: int, most_states: int) -> None:
        self.player: Player | None = None
        self._outcomes = list(outcomes)
        self._prefer = prefer
        self._cycles = cycles
        self._states_left = most_states

    def decide(self, choice: Choice, outcomes: Sequence[Outcome]) -> Outcome:
        self._pass()
        wanted = self._outcomes.pop(0) if self._outcomes else None
        return wanted if wanted in outcomes and wanted is not None else self._prefer(choice, outcomes)

    def step_comes_again(self, read: Read, step: str) -> None:
        self._pass()

    def milestone_comes(self, read: Read, step: str) -> None:
        pass

    def round_begins(self, read: Read, sequence: str) -> None:
        self._pass()

    def _pass(self) -> None:
        assert self.player is not None
        self._states_left -= 1
        if len(self.player.trace.cycles) > self._cycles or self._states_left < 0:
            self.player.stop()


def long_enough(machine: Machine, shown: Shown, cycles: int) -> Shown:
    """The same with so many whole cycles from the first shown one on, if its sequence comes round: of a play that found
    all states that come up, no cycle goes through more than these."""
    study = shown.study
    settlement, trace = study.settlement, study.trace
    needed = shown.first + cycles
    if len(trace.cycles) > needed or shown.loop is not None or trace.finished or trace.stepless is not None:
        return shown
    regions = {**dict(_further_regions(settlement, cycles)), **settlement.regions}
    states = len(settlement.path.passages)
    guide = _Onward(outcomes_before(settlement.path, states), shown.prefer, needed, (needed + 1) * states)
    player = guide.player = Player(machine, guide, given(settlement.delays), Placed(regions))
    played = player.play()
    if len(played.cycles) <= needed and not played.finished:
        return shown
    Orders(machine).assume(played, 0, 0, max(played.times) + 1)
    longer = replace(settlement, trace=played, regions=regions)
    return replace(shown, study=Study(machine, longer, given(settlement.delays), study.entered, study.left))


def _further_regions(settlement: Settlement, cycles: int) -> Iterator[tuple[tuple[str, int], Region]]:
    """Where stopped pistons may stand in the cycles to come: as in the settled ones, whose strokes come again."""
    trace = settlement.trace
    begin, end = (trace.times[trace.cycles[number].event] for number in (settlement.first, settlement.last))
    a_round = Counter(stroke.cylinder for stroke in trace.strokes if begin <= trace.times[stroke.shift.reached] < end)
    for (cylinder, number), region in sorted(settlement.regions.items(), key=lambda item: item[0]):
        for times in range(1, cycles + 1):
            yield (cylinder, number + times * a_round[cylinder]), region
