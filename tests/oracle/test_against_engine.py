"""The engine against the second player, on random machines.

A few hundred machines as it stands; ``ORACLE_EXAMPLES=3000`` in the environment asks for as many of each kind. With
``CI`` set the machines are the same each time (see ``tests/conftest.py``), so that a change is judged by what it does.
"""

from __future__ import annotations

import os

import pytest
from hypothesis import HealthCheck, assume, given, settings
from hypothesis import strategies as st

from tests.oracle import compare, draws
from tests.oracle.apart import TEXTS
from tests.oracle.compare import Disagreement, Examined, examine, first_of, some_draws
from tests.oracle.controller import EndlessLoop
from tests.oracle.machines import machine_texts
from tests.oracle.player import play

EXAMPLES = int(os.environ.get("ORACLE_EXAMPLES", "120"))

pytestmark = pytest.mark.slow

many_machines = settings(
    max_examples=EXAMPLES,
    deadline=None,
    suppress_health_check=[HealthCheck.too_slow, HealthCheck.data_too_large, HealthCheck.filter_too_much],
)

seeds = st.integers(0, 2**32)


def _examined(text: str) -> Examined:
    """Where steps can chase each other without time passing, both must say so, and there is no more to compare. (Where
    nothing but a signal from outside takes time, which may take none, the engine has nothing to say.)"""
    examined = examine(text)
    idle = any(duration.least == 0 for _, duration in examined.times.cycles)
    assume(not idle)
    if any(one.finding.kind == "endless-loop" for one in examined.proof.broken):
        with pytest.raises(EndlessLoop):
            play(examined.machine, draws.least, examined.cycles, compare.LIMIT)
        assume(False)
    return examined


def _agree(text: str, found: list[Disagreement]) -> None:
    assert not found, "\n".join([text, *map(str, found)])


@many_machines
@given(machine_texts(), seeds)
def test_no_run_leaves_the_bounds_or_goes_wrong_unforeseen(text: str, seed: int) -> None:
    """Where the typical run goes wrong, of that run alone: see ``compare``."""
    examined = _examined(text)
    found: list[Disagreement] = []
    for name, draw in some_draws(2, 2, seed):
        run = play(examined.machine, draw, examined.cycles, compare.LIMIT, stop_at_first=True)
        first = first_of(examined, run)
        if first is not None:
            found += compare.unforeseen(examined, name, first)
        else:
            found += compare.beyond_bounds(examined, name, run)
        if first is not None and draw is draws.typical:
            break
    _agree(text, found)


@many_machines
@given(machine_texts(faulty=False))
def test_least_and_greatest_runs_meet_the_bounds_of_a_closed_cycle(text: str) -> None:
    examined = _examined(text)
    assume(compare.is_closed(examined))
    _agree(text, list(compare.bounds_not_met(examined)))


@many_machines
@given(machine_texts(faulty=True))
def test_what_was_replayed_shows_in_the_player_too(text: str) -> None:
    _agree(text, list(compare.not_reproduced(_examined(text))))


@many_machines
@given(machine_texts(faulty=True), seeds)
def test_what_is_certain_shows_in_every_run_that_nothing_else_spoils_before(text: str, seed: int) -> None:
    examined = _examined(text)
    assume(any(one.finding.certain and one.finding.margin_us is not None for one in examined.proof.broken))
    found: list[Disagreement] = []
    for name, draw in some_draws(2, 2, seed):
        run = play(examined.machine, draw, examined.cycles, compare.LIMIT, stop_at_first=True)
        if first_of(examined, run) is None:
            found += compare.not_so_certain(examined, name)
    _agree(text, found)


@pytest.mark.parametrize("name", TEXTS)
def test_texts_that_were_once_apart(name: str) -> None:
    _agree(TEXTS[name], list(compare.disagreements(examine(TEXTS[name]), some_draws(10, 10))))
