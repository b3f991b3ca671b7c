"""The reports on random machines of the whole language against the second player.

A few hundred machines as it stands, the same ones each time; ``ORACLE_MACHINES=2000`` in the environment asks for more,
``ORACLE_RULED=1000`` for more of those with random rules.
Those of which the report says that not every run was played are left out; they are few.
"""

from __future__ import annotations

import os

import pytest

from tests.oracle.compare_whole import (
    disagreements,
    examine,
    runs_of,
)
from tests.oracle.ruled import ruled_text
from tests.oracle.whole import whole_text

MACHINES = int(os.environ.get("ORACLE_MACHINES", "300"))
RULED = int(os.environ.get("ORACLE_RULED", "60"))
AT_ONCE = 25
#: On these the two have been of different minds once.
APART_ONCE = (2081, 2101, 2134, 2168, 2238, 2406, 2838, 2906, 3349, 3960)
RUNS = 6

pytestmark = pytest.mark.slow


@pytest.mark.parametrize("first", range(0, MACHINES, AT_ONCE))
def test_reports_agree_with_the_player(first: int) -> None:
    left_out = 0
    for seed in range(first, first + AT_ONCE):
        text = whole_text(seed)
        examined = examine(text)
        if not examined.whole:
            left_out += 1
            continue
        assert not examined.report.problems, "\n".join([text, *map(str, examined.report.problems)])
        if "endless-loop" in examined.kinds:
            continue
        found = list(disagreements(examined, runs_of(examined.machine, seed, RUNS)))
        assert not found, "\n".join([f"machine {seed}", text, *map(str, found[:5])])
    assert left_out <= AT_ONCE // 3


@pytest.mark.parametrize("seed", APART_ONCE)
def test_where_they_were_apart_they_agree(seed: int) -> None:
    examined = examine(whole_text(seed))
    assert examined.whole
    assert not list(disagreements(examined, runs_of(examined.machine, seed, 2 * RUNS)))


@pytest.mark.parametrize("first", range(0, RULED, AT_ONCE))
def test_what_rules_limit_agrees_with_the_player(first: int) -> None:
    """Whatever a run breaks is found, and no run breaks it by more."""
    for seed in range(first, first + AT_ONCE):
        text = ruled_text(seed)
        examined = examine(text)
        assert not examined.report.problems, "\n".join([text, *map(str, examined.report.problems)])
        if not examined.whole or "endless-loop" in examined.kinds:
            continue
        found = list(disagreements(examined, runs_of(examined.machine, seed, RUNS)))
        assert not found, "\n".join([f"machine {seed}", text, *map(str, found[:5])])
