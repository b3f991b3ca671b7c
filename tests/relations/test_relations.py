"""What must hold between the reports on two texts, whatever the machine.

A few dozen machines as it stands; ``RELATION_EXAMPLES=500`` in the environment asks for as many for each relation.
"""

from __future__ import annotations

import os
import random
from dataclasses import replace

import pytest
from hypothesis import HealthCheck, assume, given, settings
from hypothesis import strategies as st

from tests.oracle.machines import machine_texts
from tests.oracle.whole import whole_texts
from tests.relations.outlook import Outlook, examined, outlook
from tests.relations.texts import (
    beside,
    new_names,
    other_typicals,
    renamed,
    reordered,
    scaled,
    slower_scan,
    widened,
    with_head_of,
)

EXAMPLES = int(os.environ.get("RELATION_EXAMPLES", "60"))

pytestmark = pytest.mark.slow

many_machines = settings(
    max_examples=EXAMPLES,
    deadline=None,
    suppress_health_check=[HealthCheck.too_slow, HealthCheck.data_too_large, HealthCheck.filter_too_much],
)
#: Where each takes several machines.
few_machines = settings(many_machines, max_examples=max(1, EXAMPLES // 3))
seeds = st.integers(0, 2**32).map(random.Random)

#: Shares of the stroke are whole multiples of half a percent and ``uneven`` of one percent, so that all products of a
#: time that is a multiple of this are whole and even, and neither they nor their middles are rounded.
EXACT = 40_000


def outlook_of(text: str) -> Outlook:
    """Texts that this version does not analyse have nothing to compare."""
    report = examined(text)
    assume(not report.problems)
    return outlook(report)


def bounds_of(one: Outlook) -> dict[str, tuple[int, int | None]]:
    return {name: (least, greatest) for name, (least, _, greatest) in one.durations.items()}


def same(time: int) -> int:
    return time


@many_machines
@given(machine_texts(), st.integers(2, 5))
def test_all_times_longer_make_all_margins_longer(text: str, factor: int) -> None:
    one, other = outlook_of(scaled(text, EXACT)), outlook_of(scaled(text, EXACT * factor))
    longer = one.mapped(str, lambda time: time * factor)
    assert replace(other, durations={}) == replace(longer, durations={})
    assert bounds_of(other) == bounds_of(longer)
    # A typical time is the mean of several visits, rounded down: the longer one less so.
    assert other.mapped(str, lambda time: time // factor) == one


@many_machines
@given(machine_texts(), seeds)
def test_other_names_change_nothing_but_the_names(text: str, draw: random.Random) -> None:
    names = new_names(text, draw)
    assert outlook_of(renamed(text, names)) == outlook_of(text).mapped(lambda name: renamed(name, names), same)


@many_machines
@given(machine_texts(), seeds)
def test_another_order_of_declarations_changes_nothing_but_places(text: str, draw: random.Random) -> None:
    assert outlook_of(reordered(text, draw)) == outlook_of(text)


@few_machines
@given(whole_texts(), whole_texts(), seeds)
def test_machines_that_share_nothing_are_proved_in_one_text_as_each_alone(
    text: str, side: str, draw: random.Random
) -> None:
    names = new_names(side, draw) | {"main": "main_too", "side": "side_too"}
    other = renamed(side, names)
    assert outlook_of(beside(text, other)) == outlook_of(text) | outlook_of(with_head_of(text, other))


@many_machines
@given(machine_texts(), seeds)
def test_wider_spans_never_remove_a_finding_nor_narrow_a_bound(text: str, draw: random.Random) -> None:
    """Where a report says that it speaks of some runs only (Proved under: played on from what goes wrong at typical
    times, or not every run was played), those of the wider machine may be others: a machine that is faulty then has to
    be so still, and no more is claimed."""
    wider = widened(text, draw)
    one, other = outlook_of(text), outlook_of(wider)
    if not (one.of_all_runs and other.of_all_runs):
        assert other.faulty or not one.faulty
        return
    lost = one.findings.keys() - other.findings.keys()
    assert not lost, f"{sorted(lost, key=str)}\n{text}\n{wider}"
    for key, margin in one.margins.items():
        if key in other.margins and margin is not None:
            now = other.margins[key]
            assert now is None or now <= margin, f"{key}: {margin} became {now}\n{wider}"
    for name, (least, _, greatest) in one.durations.items():
        if name in other.durations:
            low, _, high = other.durations[name]
            assert low <= least, f"{name}: at least {least} became {low}\n{wider}"
            assert high is None or (greatest is not None and high >= greatest), f"{name}: {greatest}, {high}\n{wider}"


@many_machines
@given(machine_texts(faulty=False), seeds)
def test_what_is_typical_changes_no_bound_and_no_margin(text: str, draw: random.Random) -> None:
    """Where nothing is found the played run stands for all others, whichever of them is played."""
    one, other = outlook_of(text), outlook_of(other_typicals(text, draw))
    assume(not one.faulty and not other.faulty)
    assert one.bounds == other.bounds
    assert one.margins == other.margins and one.handovers == other.handovers


@many_machines
@given(machine_texts(faulty=False), st.integers(0, 3_000), st.integers(0, 5_000))
def test_a_slower_scan_never_shortens_the_greatest_cycle(text: str, by_least: int, by_greatest: int) -> None:
    assume("choose" not in text)
    slower = slower_scan(text, by_least, by_greatest)
    assume(slower is not None)
    assert slower is not None
    one, other = outlook_of(text), outlook_of(slower)
    assume(not one.faulty and not other.faulty)
    for name, (_, _, greatest) in one.durations.items():
        if "." not in name:
            now = other.durations[name][2]
            assert now is None or (greatest is not None and now >= greatest), f"{name}: {greatest} became {now}"
