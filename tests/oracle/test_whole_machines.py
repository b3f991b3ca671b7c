"""The player on random machines of the whole language: what must be so in every run, whatever the machine."""

from __future__ import annotations

from collections import Counter

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from seqcheck.machine.model import Machine, steps_of
from tests.oracle import draws
from tests.oracle.controller import EndlessLoop
from tests.oracle.features import ALL, features
from tests.oracle.look import machine_of
from tests.oracle.player import play
from tests.oracle.records import Run
from tests.oracle.whole import whole_text, whole_texts

LIMIT = 60_000_000

random_machines = settings(
    max_examples=60, deadline=None, suppress_health_check=[HealthCheck.too_slow, HealthCheck.data_too_large]
)

any_draw = st.one_of(
    st.sampled_from([draws.least, draws.typical, draws.greatest]),
    st.builds(draws.either_way, st.integers(0, 2**32), st.integers(0, 2**32).map(draws.at_random)),
    st.integers(0, 2**32).map(draws.at_corners),
)


def ran(machine: Machine, draw: draws.Draw, **more: bool) -> Run:
    return play(machine, draw, 2, LIMIT, **more)


def test_texts_are_read_and_use_every_part_of_the_language() -> None:
    machines = [machine_of(whole_text(seed)) for seed in range(300)]
    used = Counter(feature for machine in machines for feature in features(machine))
    assert {feature: used[feature] for feature in ALL if used[feature] < 5} == {}
    assert set(used) <= set(ALL)
    steps = sorted(sum(1 for sequence in machine.sequences for _ in steps_of(sequence)) for machine in machines)
    assert 3 <= steps[len(steps) // 10] <= steps[len(steps) * 9 // 10] <= 14


def test_same_seed_gives_the_same_text() -> None:
    assert whole_text(7) == whole_text(7)
    assert len({whole_text(seed) for seed in range(20)}) == 20


def test_healthy_ones_are_mostly_clean_and_faulty_ones_are_often_not() -> None:
    def share(faulty: bool) -> float:
        runs = [ran(machine_of(whole_text(seed, faulty)), draws.typical) for seed in range(80)]
        return sum(not run.incidents for run in runs) / len(runs)

    assert share(False) > 0.9
    assert 0.3 < share(True) < share(False)


@random_machines
@given(whole_texts(), any_draw)
def test_a_run_played_again_with_its_own_delays_is_the_same(text: str, draw: draws.Draw) -> None:
    machine = machine_of(text)
    run = ran(machine, draw)
    own = {(drawn.what, drawn.name, drawn.n): drawn.value for drawn in run.draws}
    assert len(own) == len(run.draws)
    assert ran(machine, draws.given(own, draws.least)) == run


@random_machines
@given(whole_texts(), any_draw)
def test_every_delay_lies_in_its_span_and_time_never_runs_back(text: str, draw: draws.Draw) -> None:
    run = ran(machine_of(text), draw)
    assert all(drawn.span.least <= drawn.value <= drawn.span.greatest for drawn in run.draws)
    times = [line.time for line in run.log]
    assert times == sorted(times)
    assert all(visit.left is None or visit.entered <= visit.left for visit in run.visits)
    assert all(taken.arrived <= taken.time for taken in run.choices)


@random_machines
@given(whole_texts(), any_draw)
def test_first_diversion_is_the_same_when_play_stops_there(text: str, draw: draws.Draw) -> None:
    machine = machine_of(text)
    run, short = ran(machine, draw), ran(machine, draw, stop_at_first=True)
    assert short.first_diversion == run.first_diversion
    assert short.incidents == run.incidents[: len(short.incidents)]
    assert short.log == run.log[: len(short.log)]


@random_machines
@given(whole_texts(), any_draw)
def test_each_choice_goes_into_the_branch_that_it_takes(text: str, draw: draws.Draw) -> None:
    """Every step that is entered comes behind one that was left, a choice or a join at that very read."""
    run = ran(machine_of(text), draw)
    reads = {0, *(visit.left for visit in run.visits if visit.left is not None)}
    reads |= {taken.time for taken in run.choices}
    joins = {drawn.time for drawn in run.draws if drawn.what == "round" and drawn.name.startswith("join ")}
    ideal = not any(drawn.what == "round" for drawn in run.draws)
    assert ideal or {visit.entered for visit in run.visits} <= reads | joins


@random_machines
@given(whole_texts(), any_draw)
def test_rules_are_told_as_broken_just_where_they_are_measured_so(text: str, draw: draws.Draw) -> None:
    machine = machine_of(text)
    run = ran(machine, draw)
    told = Counter(incident.subject for incident in run.incidents if incident.kind in ("broken-never", "over-limit"))
    for rule in run.rules:
        assert rule.broken is (told[rule.text] > 0)
        if not rule.broken and rule.longest is not None:
            assert rule.shortest is None or rule.shortest <= rule.longest


@pytest.mark.parametrize("seed", range(0, 200, 10))
def test_no_machine_chases_its_own_steps(seed: int) -> None:
    for number in range(seed, seed + 10):
        machine = machine_of(whole_text(number))
        for draw in (draws.least, draws.greatest):
            try:
                ran(machine, draw)
            except EndlessLoop as loop:
                raise AssertionError(whole_text(number)) from loop
