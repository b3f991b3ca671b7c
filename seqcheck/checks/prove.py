"""From obligations to findings: bound them all, keep the tightest of each, show the run that breaks it.

Takes the studies of a part, the catalogue of checks and the reserve that every margin must leave; gives findings and
margins, in no order. Obligations that the text states once are met in every cycle; the tightest stands for them.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from dataclasses import replace
from functools import partial
from typing import NamedTuple

from seqcheck.checks.certainty import Segment, Ways
from seqcheck.checks.check import Check, Obligation
from seqcheck.checks.narrate import narrate
from seqcheck.checks.study import Study
from seqcheck.checks.tightest import those_that_count
from seqcheck.checks.wording import UNLIMITED, in_time
from seqcheck.engine.bounds import (
    Rows,
    closed,
    greatest_separation,
    greatest_separations,
    longest_least_chain,
)
from seqcheck.engine.explore import replay
from seqcheck.engine.settlement import Settlement
from seqcheck.engine.timeline import given
from seqcheck.engine.witness import Witness, witness
from seqcheck.machine.findings import Finding, Margin, Severity
from seqcheck.machine.places import Place
from seqcheck.machine.records import record


@record
class Broken:
    """A finding with the run behind it and the way of playing to which that run belongs; None for a finding that needs
    no run. ``part``: the number of the part of the machine in which it comes about."""

    finding: Finding
    witness: Witness | None
    settlement: Settlement | None = None
    part: int = 0


@record
class Proof:
    """``strays``: the played run itself breaks what other runs keep, and what these come to afterwards was not
    played."""

    broken: tuple[Broken, ...]
    margins: tuple[Margin, ...]
    strays: bool


#: Of what several plays show no more than so many are played again in search of one whose run comes about.
_MOST_REPLAYED = 10

_Key = tuple[str, str, str | None, Place]


class _Stated(NamedTuple):
    """An obligation, its check, and what it has in common with others of which the tightest stands for all."""

    key: _Key
    check: Check
    obligation: Obligation


@record
class _Seen:
    """What one study finds, made once it is asked for: to ``make`` it a run is played again. ``shown``: the segments of
    the play in which every timing shows it."""

    key: _Key
    margin_us: int | None
    diverts: bool
    make: Callable[[], Broken]
    shown: frozenset[Segment] = frozenset()

    @property
    def is_thin(self) -> bool:
        return self.margin_us is not None and self.margin_us >= 0

    @property
    def rank(self) -> tuple[bool, bool, int]:
        """What is broken by most first, nothing limiting it before all else; what is but thin last."""
        return self.is_thin, self.margin_us is not None, self.margin_us or 0


def prove(studies: Sequence[Study], checks: Sequence[Check], reserve_us: int = 0, sewn: Sequence[Study] = ()) -> Proof:
    """Prove every play of a part, and put the results together. A margin that holds, but leaves less than
    ``reserve_us``, is a finding too. ``sewn``: plays of ways of which each run is in ``studies``."""
    together = [(check, check.together(studies)) for check in checks]
    played = [*studies, *(more for _, one in together for more in one.plays), *sewn]
    ways = Ways([study.settlement for study in played])
    by_key: dict[_Key, list[_Seen]] = {}
    margins: dict[_Key, Margin] = {}
    strays = False
    for number, study in enumerate(played):
        one = _prove_one(study, checks, reserve_us, partial(ways.segment, number), margins)
        strays = strays or one.strays
        for seen in one.seen:
            by_key.setdefault(seen.key, []).append(seen)
        for margin in one.margins:
            _keep_tightest(margins, margin)
    broken = [_one_of(found, ways) for found in by_key.values()]
    found = {_key(one.finding): number for number, one in enumerate(broken)}
    whole = [check.finding(sight) for check, one in together for sight in one.sights]
    whole += [check.finding(sight) for check in checks for sight in check.omissions(studies)]
    for finding in whole:
        if _key(finding) in found:
            number = found[_key(finding)]
            broken[number] = _at_least_as_bad(broken[number], finding)
        else:
            broken.append(Broken(finding, None))
    for finding in (one.finding for one in broken):
        if _key(finding) in margins:
            # What only several plays show, or is broken for good, no obligation of one play tells.
            _keep_tightest(margins, Margin(*_key(finding), finding.margin_us))
    return Proof(tuple(broken), tuple(margins.values()), strays)


def _key(one: Finding | Margin) -> _Key:
    return one.kind, one.subject, one.step, one.place


def _keep_tightest(margins: dict[_Key, Margin], margin: Margin) -> None:
    known = margins.setdefault(_key(margin), margin)
    margins[_key(margin)] = min(known, margin, key=by_margin)


def _at_least_as_bad(one: Broken, finding: Finding) -> Broken:
    """What a run shows, with what it comes to at worst where that is more, or nothing limits it."""
    shown = one.finding.margin_us
    if shown is not None and shown >= 0:
        return Broken(finding, None)
    if shown is None or (finding.margin_us is not None and shown <= finding.margin_us):
        return one
    return replace(one, finding=replace(one.finding, message=finding.message, margin_us=finding.margin_us))


def _one_of(found: Sequence[_Seen], ways: Ways) -> Broken:
    """The finding whose run was replayed, and that by most; certain only where every way shows it for certain. What is
    thin in one way may be broken in another."""
    ranked = sorted(found, key=lambda seen: seen.rank)
    best = ranked[0].make()
    for seen in ranked[1:_MOST_REPLAYED]:
        if best.finding.replayed is True or seen.is_thin:
            break
        other = seen.make()
        best = other if other.finding.replayed is True else best
    shown = frozenset(segment for seen in found for segment in seen.shown)
    certain = bool(shown) and ways.all_show(shown)
    diverts = any(seen.diverts for seen in found)
    return replace(best, finding=replace(best.finding, certain=certain, diverts=diverts))


@record
class _ProofOfOne:
    seen: tuple[_Seen, ...]
    margins: tuple[Margin, ...]
    strays: bool


def _prove_one(
    study: Study,
    checks: Sequence[Check],
    reserve_us: int,
    segment_of: Callable[[int], Segment],
    known: Mapping[_Key, Margin],
) -> _ProofOfOne:
    """``known``: margins of other plays, the tightest of each key."""
    since = study.settlement.fresh_since
    stated, rows = _those_that_count(
        study,
        [
            _Stated((check.kind, one.subject, one.step, one.place), check, one)
            for check in checks
            for one in check.obligations(study)
            if _is_fresh(study, one, since)
        ],
        known,
    )
    turns = _turns(study, (one for _, _, one in stated), rows)
    tightest: dict[_Key, tuple[Check, Obligation, int]] = {}
    diverting: set[_Key] = set()
    always: list[tuple[_Key, Obligation]] = []
    for key, check, obligation in stated:
        one = _best_pair(obligation, rows)
        margin = -rows[one.second, one.first] - one.least
        before = tightest.get(key)
        if before is None or margin < before[2]:
            tightest[key] = (check, one, margin)
        if margin < 0 and (one.stops or (one.diverts and not _always_broken(one, rows))):
            diverting.add(key)
        if _always_broken(one, rows):
            always.append((key, one))
    shown: dict[_Key, set[Segment]] = {}
    for key, one in _that_come_before(study, always, turns):
        shown.setdefault(key, set()).add(segment_of(max(one.first, one.second, key=study.time)))
    seen = []
    for key, (check, one, margin) in tightest.items():
        if margin < 0:
            make = partial(_broken, study, check, one, margin)
            seen.append(_Seen(key, _shown(margin), key in diverting, make, frozenset(shown.get(key, ()))))
        elif margin < reserve_us:
            seen.append(_Seen(key, margin, False, partial(_thin, study, check, one, margin, reserve_us)))
    for check in checks:
        for sight in check.sights(study):
            shows = sight.certain and not turns
            at = segment_of(sight.at) if sight.at is not None else (segment_of(0)[0], -1)
            finding = check.finding(sight)
            make = partial(Broken, finding, None)
            certainly = frozenset({at} if shows else ())
            seen.append(_Seen(_key(finding), finding.margin_us, finding.diverts, make, certainly))
    margins = (
        Margin(check.kind, one.subject, one.step, one.place, _shown(margin)) for check, one, margin in tightest.values()
    )
    return _ProofOfOne(tuple(seen), tuple(margins), bool(turns))


def _is_fresh(study: Study, one: Obligation, since: int) -> bool:
    """Whether no other play has shown this already: something of it comes at or after the typical time ``since``."""
    times = study.trace.times
    return since <= 0 or any(times[first] >= since or times[second] >= since for first, second in one.pairs)


def _those_that_count(
    study: Study, stated: Sequence[_Stated], known: Mapping[_Key, Margin]
) -> tuple[list[_Stated], Rows]:
    """The obligations that may be broken or are the tightest of their key, with their rows; none that plain intervals
    show to be kept by no less than ``known``."""
    rows: Rows = {}

    def margins_of(numbers: Sequence[int]) -> Iterator[int]:
        some = [asked[number].obligation for number in numbers]
        rows.update(_rows(study, some))
        return (one.margin(rows) for one in some)

    asked, leads = [], []
    for one in stated:
        least = one.obligation.least_margin(study.trace.graph)
        tightest = known.get(one.key)
        if least < 0 or tightest is None or (tightest.margin_us is not None and least < tightest.margin_us):
            asked.append(one)
            leads.append((one.key, least))
    return [asked[number] for number in those_that_count(leads, margins_of)], rows


def _rows(study: Study, stated: Sequence[Obligation]) -> Rows:
    """How much sooner than the first the second of each pair can be, each under the orders that its obligation takes
    for granted; where that is too soon also how much later."""
    graph = study.trace.graph
    by_assumed: dict[tuple[tuple[tuple[int, int], ...], ...], list[tuple[int, int]]] = {}
    least: dict[tuple[int, int], int] = {}
    for one in stated:
        by_assumed.setdefault((one.assumed, one.kept), []).extend(one.pairs)
        for pair in one.pairs:
            least[pair] = max(one.least, least.get(pair, one.least))
    rows: Rows = {}
    for assumed, kept in sorted(by_assumed):
        with graph.not_assuming(assumed, kept):
            pairs = by_assumed[assumed, kept]
            rows |= greatest_separations(graph, ((second, first) for first, second in pairs))
            rows |= greatest_separations(graph, (pair for pair in pairs if -rows[pair[1], pair[0]] < least[pair]))
    return rows


def _best_pair(one: Obligation, rows: Rows) -> Obligation:
    """The obligation by the pair that keeps it best."""
    if not one.others:
        return one
    first, second = min(one.pairs, key=lambda pair: rows[pair[1], pair[0]])
    return replace(one, first=first, second=second, others=())


def _always_broken(one: Obligation, rows: Rows) -> bool:
    return one.always and -rows[one.second, one.first] < one.least and rows[one.first, one.second] < one.least


def _turns(study: Study, obligations: Iterable[Obligation], rows: Rows) -> list[Obligation]:
    """What the played run breaks and other runs keep: from there on they go otherwise, and nothing is certain."""
    return [
        one
        for one in obligations
        if one.diverts
        and study.time(one.first) + one.least > study.time(one.second)
        and -rows[one.second, one.first] < one.least
        and rows[one.first, one.second] >= one.least
    ]


def _that_come_before(
    study: Study, broken: Sequence[tuple[_Key, Obligation]], turns: Sequence[Obligation]
) -> Iterator[tuple[_Key, Obligation]]:
    """Those that show to be broken, as they do once the second event comes, before any run goes otherwise than the
    played one: such a run keeps what that breaks, and comes to its first event."""
    firsts = {turn.first for turn in turns}
    graph = study.trace.graph
    # The played run, and plain intervals, show most of it.
    left: list[tuple[_Key, Obligation, list[int]]] = []
    for key, one in broken:
        others = [first for first in firsts if first != one.as_if]
        if all(study.time(one.second) <= study.time(first) for first in others):
            left.append((key, one, [first for first in others if not graph.never_later(one.second, first)]))
    rows = greatest_separations(graph, ((first, one.second) for _, one, others in left for first in others))
    for key, one, others in left:
        if all(rows[first, one.second] <= 0 for first in others):
            yield key, one


def _broken(study: Study, check: Check, one: Obligation, margin: int) -> Broken:
    with study.trace.graph.not_assuming(one.assumed, one.kept):
        run = witness(study.trace, one.first, one.second)
    shown = _shown(margin)
    by = UNLIMITED if shown is None else in_time(-shown)
    wording = one.wording()
    mend = wording.mend
    finding = Finding(
        kind=check.kind,
        severity=one.severity or check.severity,
        certain=False,
        subject=one.subject,
        step=one.step,
        place=one.place,
        message=wording.broken(by),
        margin_us=shown,
        replayed=_shows(study, check, one, run),
        run=narrate(study, run, one.instead),
        mend=None if mend is None or shown is None else mend(_needed(study, one, -shown)),
    )
    return Broken(finding, run, study.settlement)


def _shows(study: Study, check: Check, one: Obligation, run: Witness) -> bool:
    """Whether the witness, really played, breaks what the check states at this place of the text."""
    played = replay(study.machine, study.settlement, run)
    again = Study(study.machine, played, given(played.delays))
    if one.instead is not None:
        return one.instead.shown(again)
    return any(
        all(again.time(first) + other.least > again.time(second) for first, second in other.pairs)
        for other in check.obligations(again)
        if again.comes(other.second) and (other.subject, other.step, other.place) == (one.subject, one.step, one.place)
    )


def _thin(study: Study, check: Check, one: Obligation, margin: int, reserve_us: int) -> Broken:
    """It holds, and nothing can be shown to break; what would mend it is asked as if the reserve were due."""
    wording = one.wording()
    mend = wording.mend
    due = replace(one, least=one.least + reserve_us)
    finding = Finding(
        kind=check.kind,
        severity=Severity.WARNING,
        certain=False,
        subject=one.subject,
        step=one.step,
        place=one.place,
        message=wording.thin(in_time(margin)),
        margin_us=margin,
        replayed=None,
        run=(),
        mend=None
        if mend is None
        else f"for a reserve of {in_time(reserve_us)}: {mend(_needed(study, due, reserve_us - margin))}",
    )
    return Broken(finding, None)


def _needed(study: Study, one: Obligation, by: int) -> int:
    """How much longer the lever must take: what it alone gives may be less than what the margin says, where something
    else keeps the second event back so far."""
    if one.lever is None:
        return by
    graph = study.trace.graph
    behind = greatest_separation(graph, one.lever, one.first)
    return max(by, behind - longest_least_chain(graph, one.lever, one.second) + one.least)


def _shown(margin: int) -> int | None:
    least_separation = closed(-margin)
    return None if least_separation is None else -least_separation


def by_margin(margin: Margin) -> tuple[object, ...]:
    """Tightest first."""
    return (margin.margin_us is not None, margin.margin_us or 0, margin.place, margin.kind, margin.subject)
