"""``over-limit``: a cycle, or the time from one condition to another, can be longer (or shorter) than a rule allows."""

from __future__ import annotations

from bisect import bisect_left
from collections.abc import Iterator, Sequence
from dataclasses import replace
from functools import partial

from seqcheck.checks.check import Check, Obligation, Sight, Together, Wording
from seqcheck.checks.comings import Coming, comings
from seqcheck.checks.crossings import Crossings, Edge, Spell, Sum, crossings
from seqcheck.checks.narrate import narrate_typical
from seqcheck.checks.study import Study
from seqcheck.checks.times import cycle_spells
from seqcheck.checks.wording import OR_LESS, UNLIMITED, in_time
from seqcheck.engine.conditions import alternatives_of
from seqcheck.engine.controller import Outcome
from seqcheck.engine.explore import follow
from seqcheck.engine.guide import outcomes_before
from seqcheck.machine.findings import Moment, Severity
from seqcheck.machine.records import record
from seqcheck.machine.rules import CycleLimit, Never, PathLimit, Rule

#: A way that goes round is shown for no more rounds than this.
_MOST_ROUNDS = 20
#: How choices come out, one after the other.
_Outcomes = tuple[Outcome, ...]


def _obligations(study: Study) -> Iterator[Obligation]:
    for rule in study.machine.rules:
        for spell in _spells(study, rule):
            if spell.end is None or isinstance(rule, Never):
                continue
            over = partial(Wording, _over(rule))
            yield Obligation(rule.text, None, rule.place, spell.end, spell.begin, over, -rule.greatest, diverts=False)
            if isinstance(rule, PathLimit) and rule.least is not None:
                under = partial(Wording, _under(rule))
                yield Obligation(rule.text, None, rule.place, spell.begin, spell.end, under, rule.least, diverts=False)


def _over(rule: CycleLimit | PathLimit) -> str:
    if isinstance(rule, CycleLimit):
        return f"a cycle of {rule.sequence} can take {{by}} longer than {in_time(rule.greatest)}"
    return f"`{rule.text}` can be exceeded by {{by}}"


def _unlimited(rule: CycleLimit | PathLimit) -> str:
    if isinstance(rule, CycleLimit):
        return _over(rule).replace("{by}", UNLIMITED)
    return f"`{rule.text}` can be exceeded: once the one has come, the other may never come"


def _under(rule: PathLimit) -> str:
    return f"`{rule.text}` can be undercut by {{by}}"


def _spells(study: Study, rule: Rule) -> list[Spell]:
    """What the rule limits, the last one of a play, which it has not come to the end of, included."""
    match rule:
        case CycleLimit(sequence):
            return cycle_spells(study, sequence)
        case PathLimit():
            return _from_one_to_the_other(study, rule)
        case _:
            return []


def _from_one_to_the_other(study: Study, rule: PathLimit) -> list[Spell]:
    """From each time that the one condition comes to hold to the next time that the other does."""
    ends = list(comings(study, alternatives_of(rule.end)))
    ranks = [end.rank for end in ends]
    spells = []
    for start in comings(study, alternatives_of(rule.start)):
        at = bisect_left(ranks, start.rank)
        end = ends[at] if at < len(ends) else None
        spells.append(_spell(start, end))
    return spells


def _under_way(study: Study, rule: CycleLimit | PathLimit) -> Iterator[Spell]:
    """What has begun in other plays, as it may when this one shows it nowhere: it goes on from each time that the other
    condition comes to hold to the next."""
    if isinstance(rule, PathLimit):
        ends = [Coming(0, 0, (0, 0, False)), *comings(study, alternatives_of(rule.end))]
        for end, following in zip(ends, (*ends[1:], None), strict=True):
            yield replace(_spell(end, following), under_way=True)


def _spell(start: Coming, end: Coming | None) -> Spell:
    if end is None:
        return Spell(start.event, None, start.passages - 1)
    return Spell(start.event, end.event, start.passages - 1, end.passages)


def _never_comes(study: Study) -> Iterator[Sight]:
    """The one condition comes to hold and the other never does again: the play has ended, or goes round without."""
    if study.for_ever is None:
        return
    at, last = study.for_ever
    for rule in study.machine.rules:
        if isinstance(rule, PathLimit):
            for spell in _spells(study, rule):
                if spell.end is None and study.time(spell.begin) <= study.time(at):
                    run = narrate_typical(study, spell.begin, last)
                    yield Sight(rule.text, None, rule.place, _unlimited(rule), run, at=at)
                    break


@record
class _Extreme:
    """The way through the state graph that takes longest, or shortest, of all that a rule limits; ``margin_us``: how
    much is left of the limit, and what to ``say`` where nothing is."""

    rule: CycleLimit | PathLimit
    way: Sum
    margin_us: int
    say: str

    @property
    def message(self) -> str:
        told = self.say.replace("{by}", in_time(-self.margin_us))
        return told if self.way.exact else f"{told}, {OR_LESS}"


def _over_several_runs(studies: Sequence[Study]) -> Together:
    """Where no play shows all of it in one: added up along the ways through the state graph, and played."""
    found = list(_crossings(studies))
    extremes = [extreme for rule, crossed in found for extreme in _extremes(rule, crossed)]
    plays: dict[_Outcomes, Study] = {}
    for one in extremes:
        _play(studies, one.way.edges, plays)
    over = [
        Sight(one.rule.text, None, one.rule.place, one.message, certain=False, margin_us=one.margin_us)
        for one in extremes
        if one.margin_us < 0
    ]
    endless = [
        Sight(rule.text, None, rule.place, _unlimited(rule), _goes_round(studies, rule, crossed), certain=False)
        for rule, crossed in found
        if crossed.begins and crossed.longest() is None and studies[0].whole
    ]
    return Together(tuple(plays.values()), (*over, *endless))


def _goes_round(studies: Sequence[Study], rule: CycleLimit | PathLimit, crossed: Crossings) -> tuple[Moment, ...]:
    """A run that comes back to a state without the end, so often that the limit is over, if that is not too often."""
    way = crossed.endless()
    at = next((number for number, edge in enumerate(way, 1) if edge[1] == way[-1][1]), 0)
    once = sum(part.typical for edge in way[at:] if (part := crossed.parts[edge].passes) is not None)
    often = min(_MOST_ROUNDS, rule.greatest // max(1, once) + 1)
    study = _play(studies, way[:at] + way[at:] * often, {})
    if study is None:
        return ()
    last = study.settlement.path.passages[-1].at
    spells = [(one.begin, last if one.end is None else one.end) for one in _spells(study, rule)]
    longest = max(spells, key=lambda one: study.time(one[1]) - study.time(one[0]), default=None)
    return () if longest is None else narrate_typical(study, *longest)


def _crossings(studies: Sequence[Study]) -> Iterator[tuple[CycleLimit | PathLimit, Crossings]]:
    rules = [rule for rule in studies[0].machine.rules if isinstance(rule, CycleLimit | PathLimit)]
    plays = [
        (study.settlement, {rule.text: [*_spells(study, rule), *_under_way(study, rule)] for rule in rules})
        for study in studies
    ]
    found = crossings(plays, settled=False) if rules else {}
    for rule in rules:
        if rule.text in found:
            yield rule, found[rule.text]


def _extremes(rule: CycleLimit | PathLimit, crossed: Crossings) -> Iterator[_Extreme]:
    longest, shortest = crossed.longest(), crossed.shortest()
    if longest is not None:
        yield _Extreme(rule, longest, rule.greatest - longest.time, _over(rule))
    if shortest is not None and isinstance(rule, PathLimit) and rule.least is not None:
        yield _Extreme(rule, shortest, shortest.time - rule.least, _under(rule))


def _play(studies: Sequence[Study], edges: Sequence[Edge], plays: dict[_Outcomes, Study]) -> Study | None:
    """This way through the state graph, played in one if it is not among ``plays``; None where some play shows it as it
    is, or only a play that turns an order comes there: what that draws cannot be drawn in another."""
    chosen = [edge[2] for edge in edges if edge[2] is not None]
    if len(edges) < 2 or not chosen:
        return None
    begin = edges[0][0]
    owners = (one.settlement for one in studies if begin in one.settlement.states and not one.settlement.delays)
    owner = next(owners, None)
    if owner is None:
        return None
    before = owner.states.index(begin)
    way = (*outcomes_before(owner.path, before), *chosen)
    if way not in plays:
        plays[way] = studies[0].alike(follow(studies[0].machine, way, before + 4 * len(edges) + 4))
    return plays[way]


CHECK = Check(
    "over-limit",
    Severity.ERROR,
    "a cycle or a way takes longer, or shorter, than it may",
    _obligations,
    _never_comes,
    together=_over_several_runs,
)
