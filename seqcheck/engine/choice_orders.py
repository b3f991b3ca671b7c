"""What decides which branch of a choice is taken.

Takes a trace and a choice; gives the pairs of moments by which it is taken as it is: the read that comes to it, the
floor from which it may be taken later, and whatever it asks becoming known. In the other order it would take another
branch, or wait.
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Callable, Iterator, Mapping, Sequence
from itertools import combinations

from seqcheck.engine.conditions import Aspect, Literal, holding
from seqcheck.engine.order import Order
from seqcheck.engine.trace import Choice, Edge, Known, Trace
from seqcheck.engine.wait_orders import passing
from seqcheck.machine.records import record

#: What looking at a choice costs, in as many separations, on average: mostly it is as it was last time.
_WORK_OF_A_LOOK = 12


@record
class ChoiceOrder:
    """``other``: the branch that would be taken were it the other way round, None for waiting first. ``outside``: one
    of the two is a signal from outside, so that it is nobody's fault. ``asked``: what is asked; ``how`` it would come
    the other way round, ``{by}`` so much."""

    order: Order
    asked: str
    how: str
    other: int | None
    outside: bool = False


class ChoiceOrders:
    """A choice, looked at again and again while a play goes on: anew where more is known of what it asks."""

    def __init__(self, choice: Choice) -> None:
        self.choice = choice
        self._known: tuple[object, ...] | None = None
        self._orders: list[Order] = []

    def open(self, trace: Trace, begin: int) -> Iterator[Order]:
        """Those that may be the other way round as far as plain intervals tell, and come about at or after ``begin``,
        which never goes back."""
        times, graph, choice = trace.times, trace.graph, self.choice

        def may_turn(first: int, second: int) -> bool:
            return times[second] >= begin and not graph.always_earlier(first, second)

        known = _known_of(trace, choice)
        graph.work += _WORK_OF_A_LOOK
        if known != self._known:
            self._known = known
            self._orders = [one.order for one in _Look(trace, choice).orders(may_turn)]
        yield from (order for order in self._orders if times[order.second] >= begin)
        if _has_waited(choice):
            yield from (order for order, _, _ in _passing(trace, choice))


def asked_in_time(trace: Trace, choice: Choice) -> Iterator[ChoiceOrder]:
    """Every order by which a choice is taken as it is."""
    look = _Look(trace, choice)
    yield from look.orders(lambda first, second: True)
    if _has_waited(choice):
        yield from look.orders_in_passing()


def _has_waited(choice: Choice) -> bool:
    return choice.left is not None and choice.left is not choice.entered and choice.taken is not None


def _passing(trace: Trace, choice: Choice) -> Iterator[tuple[Order, Aspect, Edge]]:
    for aspect in choice.told:
        for order, edge in passing(trace, choice, aspect[1]):
            yield order, aspect, edge


def _known_of(trace: Trace, choice: Choice) -> tuple[object, ...]:
    """Where this is the same, so are the moments by which the choice is taken."""
    counted = (_counted(trace, choice, trace.known[aspect], at) for aspect, at in choice.told.items())
    return *counted, *choice.signals.items()


def _counted(trace: Trace, choice: Choice, log: Sequence[Known], at: int) -> int:
    """How much of what is known of a term counts: of what is known later than at the end of the choice, two changes,
    none where its watchdog ended it. ``at``: so much was known at its begin."""
    left, times = choice.left, trace.times
    if left is None:
        return len(log)
    end = max(at, bisect_right(log, times[left.event], key=lambda known: times[known.seen]))
    return end if choice.expired else min(end + 2, len(log))


#: What becomes known: of a term, or that a signal from outside is as a literal wants it.
_Fact = Aspect | Literal


@record
class _Moment:
    """``facts`` are known from then on. ``comes``: the read that comes to the choice; ``ready``: its floor, from which
    on the choice is taken as soon as a condition holds."""

    event: int
    facts: Mapping[_Fact, bool]
    comes: bool = False
    ready: bool = False

    def with_facts_of(self, other: _Moment) -> _Moment:
        facts = {**self.facts, **other.facts}
        return _Moment(self.event, facts, self.comes or other.comes, self.ready or other.ready)

    def without(self, fact: _Fact) -> _Moment:
        facts = {one: value for one, value in self.facts.items() if one != fact}
        return _Moment(self.event, facts, self.comes, self.ready)

    @property
    def read(self) -> str | None:
        """What the choice does then, whatever is known."""
        if self.comes:
            return "the read that asks it"
        return "the read from which on it can be taken" if self.ready else None

    @property
    def name(self) -> object:
        return self.read or frozenset((_subject(fact), value) for fact, value in self.facts.items())

    @property
    def is_outside(self) -> bool:
        return any(isinstance(fact, Literal) for fact in self.facts)

    @property
    def subjects(self) -> str:
        return " and ".join(dict.fromkeys(_subject(fact) for fact in self.facts))

    @property
    def coming(self) -> str:
        return f"{self.subjects} {'coming' if self._comes_on else 'going'}"

    @property
    def comes_or_goes(self) -> str:
        return self.subjects if self._comes_on else f"{self.subjects} goes"

    @property
    def _comes_on(self) -> bool:
        return any(fact.wanted if isinstance(fact, Literal) else value for fact, value in self.facts.items())


class _Look:
    """A choice as it is looked at: at the read that comes to it, then as the step behind a step is."""

    def __init__(self, trace: Trace, choice: Choice) -> None:
        self._trace = trace
        self._choice = choice
        logs = {aspect: trace.known[aspect] for aspect in choice.told}
        self._start: dict[_Fact, bool] = {
            aspect: logs[aspect][max(0, at - 3)].value for aspect, at in choice.told.items()
        }
        self._moments = self._all_moments(logs)
        #: For each moment the others that change one of its terms.
        self._of_same = _of_same(self._moments)
        self._own = self._taken(self._moments)

    def orders(self, counts: Callable[[int, int], bool]) -> Iterator[ChoiceOrder]:
        """Those whose two events it ``counts`` for. Of two that the read that comes to the choice lies between, only
        where neither decides it with that alone."""
        moments = self._moments
        read = next(number for number, moment in enumerate(moments) if moment.comes)
        decides: dict[int, bool] = {}

        def decisive(number: int) -> bool:
            if number not in decides:
                decides[number] = bool(self._others(min(number, read), max(number, read)))
            return decides[number]

        for one, two in combinations(range(len(moments)), 2):
            if two < read or not counts(moments[one].event, moments[two].event):
                continue
            if one < read < two and (moments[two].ready or decisive(one) or decisive(two)):
                continue
            others = self._others(one, two)
            if others:
                yield self._order(one, two, others)

    def _others(self, one: int, two: int) -> tuple[tuple[bool, int | None], ...]:
        """What else would be taken were it the other way round: with the one moved back (True), the other forward."""
        if self._is_bound(one, two):
            return ()
        moved_back, moved_forward = self._swapped(one, two)
        return tuple(
            (back, taken) for back, taken in ((True, moved_back), (False, moved_forward)) if taken != self._own
        )

    def _is_bound(self, one: int, two: int) -> bool:
        """Whether nothing can bring the two into the other order, be it for what has to come between them."""
        first, second, of_same = self._moments[one], self._moments[two], self._of_same
        if two in of_same[one] or (first.read is not None and second.read is not None):
            return True
        if first.event == second.event:
            return not second.comes
        return any(
            self._stays_before(one, number) and self._stays_before(number, two)
            for number in of_same[one] | of_same[two]
        )

    def _stays_before(self, one: int, two: int) -> bool:
        """Whether it never comes later: two changes of one term, or by its causes."""
        if one < two and two in self._of_same[one]:
            return True
        return self._trace.graph.never_later(self._moments[one].event, self._moments[two].event)

    def _swapped(self, one: int, two: int) -> tuple[int | None, int | None]:
        """What is taken with the one moved behind the other, and with the other before the one, each together with what
        stays behind or before it."""
        moments = self._moments
        before, behind, pair = moments[:one], moments[two + 1 :], (moments[two], moments[one])

        def taken(stays: Sequence[int]) -> int | None:
            early = [moments[number] for number in stays]
            late = [moments[number] for number in range(one + 1, two) if number not in stays]
            return self._taken([*before, *early, *pair, *late, *behind])

        return (
            taken([number for number in range(one + 1, two) if not self._stays_before(one, number)]),
            taken([number for number in range(one + 1, two) if self._stays_before(number, two)]),
        )

    def _at_once(self, one: int, two: int) -> int | None:
        moments = self._moments
        both = moments[one].with_facts_of(moments[two])
        return self._taken([*moments[:one], *moments[one + 1 : two], both, *moments[two + 1 :]])

    def _keeping(self, one: int, two: int) -> tuple[tuple[int, int], ...]:
        """What stays as it is while the two change places: what the one takes back is known before the other, and what
        takes the other back is known after the one."""
        moments = self._moments
        first, second = moments[one], moments[two]
        earlier = max((number for number in self._of_same[one] if number < one), default=None)
        later = min((number for number in self._of_same[two] if number > two), default=None)
        kept = ((moments[earlier].event, second.event),) if earlier is not None else ()
        return (*kept, (first.event, moments[later].event)) if later is not None else kept

    def _between(self, one: int, two: int, moved_back: bool) -> tuple[tuple[int, int], ...]:
        """Where it takes what becomes known between them, too: all of that stays before the second, or behind the
        first."""
        kept = []
        for number in range(one + 1, two):
            if self._moments[number].read is None:
                pair = (number, two) if moved_back else (one, number)
                bound = self._stays_before(one, number) if moved_back else self._stays_before(number, two)
                kept += [pair] if not bound else []
        return tuple((self._moments[first].event, self._moments[second].event) for first, second in kept)

    def orders_in_passing(self) -> Iterator[ChoiceOrder]:
        """What is asked comes and goes, and no read falls between the two, or one does."""
        for order, aspect, edge in _passing(self._trace, self._choice):
            if edge.lost_to is None:
                how, taken = "passing unseen", self._taken(self._without(aspect, edge))
            else:
                how, taken = "seen", self._taken(self._with(aspect, edge))
            yield ChoiceOrder(order, aspect[1], f"{aspect[1]} {how} by {{by}}", taken)

    def _without(self, aspect: Aspect, edge: Edge) -> list[_Moment]:
        """As if it had come and gone unseen."""
        changes = [one for one in self._moments if aspect in one.facts]
        both = changes[next(n for n, one in enumerate(changes) if one.event == edge.seen) :][:2]
        return [one.without(aspect) if one in both else one for one in self._moments]

    def _with(self, aspect: Aspect, edge: Edge) -> list[_Moment]:
        """As if it had been seen, until the very next read."""
        times = self._trace.times
        comes = edge.arrived if edge.seen is None else edge.seen
        at = next((n for n, one in enumerate(self._moments) if times[one.event] > times[comes]), len(self._moments))
        both = [_Moment(comes, {aspect: value}) for value in (edge.value, not edge.value)]
        return [*self._moments[:at], *both, *self._moments[at:]]

    def _order(self, first: int, second: int, others: Sequence[tuple[bool, int | None]]) -> ChoiceOrder:
        one, two = self._moments[first], self._moments[second]
        key = ("choose", self._choice.choose.place, one.name, two.name)
        strict = one.read is two.read and self._at_once(first, second) != self._own
        keeping = self._keeping(first, second)
        if len(others) == 1:
            keeping += self._between(first, second, moved_back=others[0][0])
        other = next((taken for _, taken in others if taken is not None), None)
        asked = one.subjects if two.read is not None else two.subjects
        if two.read is not None:
            how = f"{asked} changing {{by}} after {two.read}"
        elif one.read is not None:
            how = f"{asked} changing {{by}} before {one.read}"
        else:
            how = f"{two.coming} {{by}} before {one.comes_or_goes}"
        outside = one.is_outside or two.is_outside
        return ChoiceOrder(Order(key, one.event, two.event, strict, keeping), asked, how, other, outside)

    def _all_moments(self, logs: Mapping[Aspect, Sequence[Known]]) -> list[_Moment]:
        """In the order in which they came: the last two changes of each term before the read, the read, what came while
        the choice stood, and the two that each term came to next."""
        choice, times = self._choice, self._trace.times
        early: dict[int, _Moment] = {}
        late: dict[int, _Moment] = {}
        for aspect, at in choice.told.items():
            log = logs[aspect]
            for known in log[max(1, at - 2) : at]:
                _add(early, _Moment(known.seen, {aspect: known.value}))
            for known in log[at : _counted(self._trace, choice, log, at)]:
                _add(late, _Moment(known.seen, {aspect: known.value}))
        for literal, (_, seen) in choice.signals.items():
            _add(late, _Moment(seen, {literal: True}))
        read, ready = _Moment(choice.entered.event, {}, comes=True), _Moment(choice.entered.floor, {}, ready=True)

        def in_time(one: _Moment) -> tuple[int, int, bool]:
            return times[one.event], one.event, one.ready

        return [*sorted(early.values(), key=in_time), read, *sorted((*late.values(), ready), key=in_time)]

    def _taken(self, moments: Sequence[_Moment]) -> int | None:
        """The branch that is taken where things come in this order; None where none ever is."""
        known, came, ready = dict(self._start), False, False
        for moment in moments:
            known.update(moment.facts)
            came, ready = came or moment.comes, ready or moment.ready
            if moment.comes or (came and ready):
                taken = _outcome(self._choice, known, moment.comes)
                if taken is not None:
                    return taken
        return None


def _add(moments: dict[int, _Moment], one: _Moment) -> None:
    known = moments.get(one.event)
    moments[one.event] = one if known is None else known.with_facts_of(one)


def _of_same(moments: Sequence[_Moment]) -> list[set[int]]:
    by_fact: dict[_Fact, set[int]] = {}
    for number, moment in enumerate(moments):
        for fact in moment.facts:
            by_fact.setdefault(fact, set()).add(number)
    return [set().union(*(by_fact[fact] for fact in moment.facts)) - {number} for number, moment in enumerate(moments)]


def _subject(fact: _Fact) -> str:
    return fact.term.subject if isinstance(fact, Literal) else fact[1]


def _outcome(choice: Choice, known: Mapping[_Fact, bool], at_first: bool = False) -> int | None:
    """The first branch whose condition holds; ``at_first``: at the read that comes to the choice, where whoever is
    outside has an answer."""

    def is_so(literal: Literal) -> bool:
        if literal.term.subject not in choice.asked:
            return known[literal.aspect] == literal.wanted
        if at_first:
            return choice.asked[literal.term.subject] == literal.wanted
        return known.get(literal, False)

    return next((n for n, one in enumerate(choice.conditions) if holding(one, is_so) is not None), None)
