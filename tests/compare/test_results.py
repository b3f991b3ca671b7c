"""Two reports held against each other: what is new, gone, moved, and which of it is worse."""

from __future__ import annotations

from dataclasses import replace

import pytest

from seqcheck.compare.differences import Difference, MarginChange, growth, loss
from seqcheck.compare.results import (
    Bar,
    choice_changes,
    cycle_changes,
    finding_changes,
    margin_changes,
    step_changes,
    under_new_names,
    with_other_choices,
)
from seqcheck.machine.findings import ChoiceTime, Duration, Finding, Margin, Report, Severity
from tests.report.samples import healthy, no_watchdog, place, short_pulse


def errors(finding: Finding) -> bool:
    return finding.severity is Severity.ERROR and finding.accepted is None


BAR = Bar(0, errors)


def margins(*values: tuple[str, int | None]) -> Report:
    found = tuple(Margin("short-pulse", name, "main.a", place(line), us) for line, (name, us) in enumerate(values, 1))
    return Report("a.steps", "A", margins=found)


def test_findings_are_matched_by_kind_subject_and_step_wherever_they_stand() -> None:
    moved = short_pulse(place=place(99, 3), message="in other words")
    assert finding_changes(healthy(short_pulse()), healthy(moved), BAR) == ()
    elsewhere = short_pulse(step="main.other")
    changes = finding_changes(healthy(short_pulse()), healthy(elsewhere), BAR)
    assert [(one.difference, one.finding, one.worse) for one in changes] == [
        (Difference.NEW, elsewhere, True),
        (Difference.GONE, short_pulse(), False),
    ]


@pytest.mark.parametrize(
    ("before", "now", "worse"),
    [
        ({"severity": Severity.WARNING}, {}, True),
        ({}, {"severity": Severity.WARNING}, False),
        ({"accepted": "known"}, {}, True),
        ({}, {"accepted": "known"}, False),
        ({}, {"certain": True}, False),
        ({}, {"margin_us": -5000}, False),
    ],
)
def test_a_finding_that_has_changed_is_worse_where_it_counts_only_now(
    before: dict[str, object], now: dict[str, object], worse: bool
) -> None:
    (change,) = finding_changes(healthy(short_pulse(**before)), healthy(short_pulse(**now)), BAR)
    assert change.difference is Difference.CHANGED
    assert (change.before, change.finding, change.worse) == (short_pulse(**before), short_pulse(**now), worse)


def test_a_new_note_is_told_and_not_worse() -> None:
    (change,) = finding_changes(healthy(), healthy(no_watchdog()), BAR)
    assert (change.difference, change.worse) == (Difference.NEW, False)


def test_findings_alike_are_paired_by_margin() -> None:
    old = healthy(short_pulse(margin_us=-1), short_pulse(margin_us=-7))
    new = healthy(short_pulse(margin_us=-7), short_pulse(margin_us=-1), short_pulse(margin_us=-3))
    told = [(one.difference, one.finding.margin_us) for one in finding_changes(old, new, BAR)]
    assert told == [(Difference.CHANGED, -3), (Difference.NEW, -1)]


@pytest.mark.parametrize(("allow_us", "worse"), [(0, True), (33_999, True), (34_000, False)])
def test_a_margin_that_shrank_by_more_than_allowed_is_worse(allow_us: int, worse: bool) -> None:
    changes = margin_changes(margins(("V1", 40_000)), margins(("V1", 6_000)), Bar(allow_us, errors))
    assert changes == (MarginChange(Difference.CHANGED, "short-pulse", "V1", "main.a", 40_000, 6_000, worse),)
    assert changes[0].shrank


def test_a_margin_that_grew_is_told_and_not_worse() -> None:
    (change,) = margin_changes(margins(("V1", 6_000)), margins(("V1", 40_000)), BAR)
    assert (change.worse, change.shrank) == (False, False)


def test_the_tightest_margin_of_several_places_counts() -> None:
    old = margins(("V1", 40_000), ("V1", 6_000))
    assert margin_changes(old, margins(("V1", 6_000)), BAR) == ()
    (change,) = margin_changes(old, margins(("V1", 40_000), ("V1", 5_000)), BAR)
    assert (change.old_us, change.new_us) == (6_000, 5_000)


def test_margins_come_by_what_they_lost_then_new_ones_then_those_gone() -> None:
    old = margins(("V1", 5), ("V2", 9), ("V3", 1), ("V4", 2))
    new = margins(("V0", 7), ("V1", 4), ("V2", 2), ("V3", 3))
    assert [one.subject for one in margin_changes(old, new, BAR)] == ["V2", "V1", "V3", "V0", "V4"]


def test_an_open_margin_is_below_and_an_open_time_above_every_other() -> None:
    (change,) = margin_changes(margins(("V1", -(10**9))), margins(("V1", None)), Bar(10**12, errors))
    assert change.worse and change.shrank
    (change,) = margin_changes(margins(("V1", None)), margins(("V1", -(10**9))), BAR)
    assert not change.worse and not change.shrank
    assert loss(None, None) == growth(None, None) == 0
    assert growth(10**9, None) == float("inf") and growth(None, 10**9) == float("-inf")
    assert (loss(5, 3), growth(5, 3)) == (2, -2)


@pytest.mark.parametrize(
    ("old", "new", "allow_us", "worse"),
    [
        ((1, 2, 3), (1, 2, 4), 0, True),
        ((1, 2, 3), (1, 2, 4), 1, False),
        ((1, 2, 4), (1, 2, 3), 0, False),
        ((1, 2, 3), (0, 2, 3), 0, False),
        ((1, 2, 3), (1, 2, None), 10**9, True),
        ((1, 2, None), (1, 2, 3), 0, False),
    ],
)
def test_a_cycle_is_worse_where_its_greatest_time_grew(
    old: tuple[int, int, int], new: tuple[int, int, int], allow_us: int, worse: bool
) -> None:
    before, after = (replace(healthy(), cycles=(("main", Duration(*times)),)) for times in (old, new))
    (change,) = cycle_changes(before, after, Bar(allow_us, errors))
    assert (change.name, change.worse) == ("main", worse)


def test_steps_are_told_new_changed_and_gone_and_never_worse_themselves() -> None:
    same, slow, slower = Duration(1, 1, 1), Duration(2, 3, 4), Duration(2, 3, 9)
    before = replace(healthy(), steps=(("main.a", same), ("main.b", slow), ("main.c", same)))
    after = replace(healthy(), steps=(("main.d", same), ("main.b", slower), ("main.a", same)))
    told = [(one.name, one.old, one.new, one.worse) for one in step_changes(before, after)]
    assert told == [("main.d", None, same, False), ("main.b", slow, slower, False), ("main.c", same, None, False)]


def test_a_renamed_step_keeps_its_results() -> None:
    old = replace(
        healthy(short_pulse(subject="main.tap")),
        margins=(Margin("early-dwell", "main.tap", "main.tap", place(1), 5),),
        steps=(("main.tap", Duration(1, 1, 1)),),
    )
    new = under_new_names(old, {"main.tap": "main.hit"})
    assert (new.findings[0].subject, new.findings[0].step) == ("main.hit", "main.hit")
    assert (new.margins[0].subject, new.margins[0].step, new.steps[0][0]) == ("main.hit", "main.hit", "main.hit")


def by_choice(*greatest: int | None, line: int = 20, sequence: str = "main") -> Report:
    choices = [
        ChoiceTime(sequence, place(line + number), f"when in line {line + number}", Duration(1_000, 1_000, one))
        for number, one in enumerate(greatest)
    ]
    return Report("a.steps", "A", choices=tuple(choices))


def test_branches_are_told_apart_by_their_order_wherever_they_stand() -> None:
    assert choice_changes(by_choice(2_000, None), by_choice(2_000, None, line=31)) == ()
    (change,) = choice_changes(by_choice(2_000, None), by_choice(2_000, 9_000, line=31))
    assert (change.name, change.worse) == ("main, when in line 32", False)
    assert (change.old, change.new) == (Duration(1_000, 1_000, None), Duration(1_000, 1_000, 9_000))


def test_a_typical_time_by_choice_that_nobody_gives_is_no_difference() -> None:
    new = by_choice(2_000)
    usual = replace(new, choices=(replace(new.choices[0], duration=Duration(1_000, 1_500, 2_000)),))
    assert choice_changes(new, usual) == ()


def test_choices_with_other_branches_are_not_held_against_each_other() -> None:
    old, new = by_choice(2_000, 3_000), by_choice(9_000)
    assert choice_changes(old, new) == ()
    assert with_other_choices(old, new) == ("main",)
    assert with_other_choices(old, by_choice(9_000, 9_000)) == with_other_choices(by_choice(), new) == ()
