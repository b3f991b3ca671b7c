"""What two reports differ in: findings, margins, cycle and step times, cycles by choice, and which of that is worse.

Takes two reports of texts that could be examined, and what counts as worse; gives changes in the order in which the
new report has them, what is gone behind them. Where a text stands makes no difference: findings and margins are told
apart by kind, subject and step.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import replace
from itertools import zip_longest

from seqcheck.compare.differences import Difference, DurationChange, FindingChange, MarginChange, growth, loss
from seqcheck.machine.findings import ChoiceTime, Duration, Finding, Margin, Report
from seqcheck.machine.records import record

Key = tuple[str, str, str | None]


@record
class Bar:
    """What makes a change worse: a margin that shrank or a greatest cycle time that grew by more than ``allow_us``, or
    a finding that ``counts`` and did not before."""

    allow_us: int
    counts: Callable[[Finding], bool]


def under_new_names(report: Report, renamed: Mapping[str, str]) -> Report:
    """An old report in which every step has the name that it has now."""
    if not renamed:
        return report
    return replace(
        report,
        findings=tuple(_renamed_finding(one, renamed) for one in report.findings),
        margins=tuple(_renamed_margin(one, renamed) for one in report.margins),
        steps=tuple((renamed.get(name, name), duration) for name, duration in report.steps),
    )


def finding_changes(old: Report, new: Report, bar: Bar) -> tuple[FindingChange, ...]:
    """Several findings of one kind, subject and step are paired by margin, the tightest first."""
    before, after = _grouped(old.findings), _grouped(new.findings)
    changes: list[FindingChange] = []
    for key in dict.fromkeys((*after, *before)):
        for was, now in zip_longest(before.get(key, ()), after.get(key, ())):
            change = _finding_change(was, now, bar)
            if change is not None:
                changes.append(change)
    return tuple(changes)


def margin_changes(old: Report, new: Report, bar: Bar) -> tuple[MarginChange, ...]:
    """Those that shrank most come first, then those that grew, then new ones and those that are gone."""
    before, after = _tightest(old.margins), _tightest(new.margins)
    changes = []
    for key in dict.fromkeys((*after, *before)):
        if key not in before:
            changes.append(MarginChange(Difference.NEW, *key, None, after[key], False))
        elif key not in after:
            changes.append(MarginChange(Difference.GONE, *key, before[key], None, False))
        elif before[key] != after[key]:
            worse = loss(before[key], after[key]) > bar.allow_us
            changes.append(MarginChange(Difference.CHANGED, *key, before[key], after[key], worse))
    return tuple(sorted(changes, key=_by_loss))


def cycle_changes(old: Report, new: Report, bar: Bar) -> tuple[DurationChange, ...]:
    return tuple(
        replace(one, worse=one.old is not None and one.new is not None and _grown(one.old, one.new) > bar.allow_us)
        for one in _duration_changes(old.cycles, new.cycles)
    )


def choice_changes(old: Report, new: Report) -> tuple[DurationChange, ...]:
    """Cycles with one branch of a choice, in the words of the new report. Branches are told apart by their order, as
    their lines move; a sequence that has more or fewer of them now is left out."""
    before, after = _by_sequence(old.choices), _by_sequence(new.choices)
    pairs = (
        (was, now)
        for name, branches in after.items()
        if len(branches) == len(before.get(name, ()))
        for was, now in zip(before[name], branches, strict=True)
    )
    return tuple(
        DurationChange(f"{now.sequence}, {now.way}", was.duration, now.duration, False)
        for was, now in pairs
        if (was.duration.least, was.duration.greatest) != (now.duration.least, now.duration.greatest)
    )


def with_other_choices(old: Report, new: Report) -> tuple[str, ...]:
    """The sequences whose choices have more branches now, or fewer."""
    before, after = _by_sequence(old.choices), _by_sequence(new.choices)
    return tuple(name for name in after if name in before and len(after[name]) != len(before[name]))


def step_changes(old: Report, new: Report) -> tuple[DurationChange, ...]:
    """No step is worse by itself: what it costs shows in the cycle and in the margins."""
    return tuple(_duration_changes(old.steps, new.steps))


def _grown(old: Duration, new: Duration) -> float:
    return growth(old.greatest, new.greatest)


def _by_sequence(choices: Iterable[ChoiceTime]) -> dict[str, list[ChoiceTime]]:
    found: dict[str, list[ChoiceTime]] = defaultdict(list)
    for one in choices:
        found[one.sequence].append(one)
    return dict(found)


def _grouped(findings: Iterable[Finding]) -> dict[Key, list[Finding]]:
    groups: dict[Key, list[Finding]] = defaultdict(list)
    for one in findings:
        groups[one.kind, one.subject, one.step].append(one)
    for group in groups.values():
        group.sort(key=lambda one: (one.margin_us is not None, one.margin_us or 0))
    return groups


def _finding_change(was: Finding | None, now: Finding | None, bar: Bar) -> FindingChange | None:
    if now is None:
        assert was is not None
        return FindingChange(Difference.GONE, was, None, False)
    worse = bar.counts(now) and (was is None or not bar.counts(was))
    if was is None:
        return FindingChange(Difference.NEW, now, None, worse)
    if _essence(was) == _essence(now):
        return None
    return FindingChange(Difference.CHANGED, now, was, worse)


def _essence(finding: Finding) -> tuple[object, ...]:
    """What about a finding is worth telling when it changes; not its place, nor its words."""
    return finding.severity, finding.certain, finding.margin_us, finding.accepted


def _tightest(margins: Iterable[Margin]) -> dict[Key, int | None]:
    found: dict[Key, int | None] = {}
    for one in margins:
        key = (one.kind, one.subject, one.step)
        if key not in found or loss(found[key], one.margin_us) > 0:
            found[key] = one.margin_us
    return found


def _by_loss(change: MarginChange) -> tuple[int, float]:
    order = (Difference.CHANGED, Difference.NEW, Difference.GONE)
    return order.index(change.difference), -loss(change.old_us, change.new_us) if order[0] is change.difference else 0


def _duration_changes(
    old: Iterable[tuple[str, Duration]], new: Iterable[tuple[str, Duration]]
) -> Iterator[DurationChange]:
    before, after = dict(old), dict(new)
    for name in dict.fromkeys((*after, *before)):
        was, now = before.get(name), after.get(name)
        # Whether they are exact tells nothing of the machine; reports of before that was said do not know.
        if was is None or now is None or replace(was, exact=now.exact) != now:
            yield DurationChange(name, was, now, False)


def _renamed_finding(finding: Finding, renamed: Mapping[str, str]) -> Finding:
    step = finding.step and renamed.get(finding.step, finding.step)
    return replace(finding, subject=renamed.get(finding.subject, finding.subject), step=step)


def _renamed_margin(margin: Margin, renamed: Mapping[str, str]) -> Margin:
    step = margin.step and renamed.get(margin.step, margin.step)
    return replace(margin, subject=renamed.get(margin.subject, margin.subject), step=step)
