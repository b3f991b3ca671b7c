"""The player on random machines: what must be so in every run, whatever the machine."""

from __future__ import annotations

from collections.abc import Iterator

from hypothesis import HealthCheck, assume, given, settings
from hypothesis import strategies as st

from seqcheck.machine.model import Machine
from seqcheck.machine.time import WHOLE_SHARE
from tests.oracle import draws
from tests.oracle.machines import machines
from tests.oracle.player import play
from tests.oracle.records import Run

LIMIT = 400_000_000

random_machines = settings(
    max_examples=60, deadline=None, suppress_health_check=[HealthCheck.too_slow, HealthCheck.data_too_large]
)

any_draw = st.one_of(
    st.sampled_from([draws.least, draws.typical, draws.greatest]),
    st.integers(0, 2**32).map(draws.at_random),
    st.integers(0, 2**32).map(draws.at_corners),
)


@random_machines
@given(machines(), any_draw)
def test_a_run_played_again_with_its_own_delays_is_the_same(machine: Machine, draw: draws.Draw) -> None:
    run = play(machine, draw, 2, LIMIT)
    own = {(drawn.what, drawn.name, drawn.n): drawn.value for drawn in run.draws}
    assert len(own) == len(run.draws)
    assert play(machine, draws.given(own, draws.least), 2, LIMIT) == run


@random_machines
@given(machines(), any_draw)
def test_every_delay_lies_in_its_span_and_time_never_runs_back(machine: Machine, draw: draws.Draw) -> None:
    run = play(machine, draw, 2, LIMIT)
    assert all(drawn.span.least <= drawn.value <= drawn.span.greatest for drawn in run.draws)
    times = [line.time for line in run.log]
    assert times == sorted(times)
    assert all(visit.left is None or visit.entered <= visit.left for visit in run.visits)


@random_machines
@given(machines(), any_draw)
def test_first_incident_is_the_same_when_play_stops_there(machine: Machine, draw: draws.Draw) -> None:
    run = play(machine, draw, 2, LIMIT)
    short = play(machine, draw, 2, LIMIT, stop_at_first=True)
    assert short.incidents == run.incidents[: len(short.incidents)]
    assert bool(short.incidents) is bool(run.incidents)
    assert short.log == run.log[: len(short.log)]


@random_machines
@given(machines(), any_draw)
def test_sensors_are_on_just_while_the_piston_is_there(machine: Machine, draw: draws.Draw) -> None:
    run = play(machine, draw, 2, LIMIT)
    for cylinder in machine.cylinders.values():
        on = dict.fromkeys(cylinder.sensors, False)
        start = WHOLE_SHARE if cylinder.starts_extended else 0
        on |= {name: _covers(machine, name, start, start) for name in cylinder.sensors}
        for low, high, until in _places(run, machine, cylinder.name, start):
            for line in until:
                _, name, word = line.split()
                on[name] = word == "on"
            for name in cylinder.sensors:
                assert on[name] is _covers(machine, name, low, high), (name, low, high)


def _covers(machine: Machine, sensor: str, low: int, high: int) -> bool:
    made = machine.sensors[sensor]
    return made.low <= low and high <= made.high


def _places(run: Run, machine: Machine, name: str, start: int) -> Iterator[tuple[int, int, list[str]]]:
    """Where the piston is (between two marks or at an end) and which of its sensors changed as it came there."""
    own = machine.cylinders[name].sensors
    marks = sorted({0, WHOLE_SHARE} | {edge for s in own for edge in (machine.sensors[s].low, machine.sensors[s].high)})
    low = high = start
    out: bool | None = None
    changes: list[str] = []
    moves = [line.text for line in run.log if line.text.startswith((f"cylinder {name} ", "sensor "))]
    for text in moves:
        words = text.split()
        if words[0] == "sensor":
            if words[1] in own:
                changes.append(text)
            continue
        yield low, high, changes
        changes = []
        match words[2:]:
            case ["starts", way]:
                out = way == "out"
            case ["leaves" | "at", mark]:
                low = high = int(mark)
                if words[2] == "leaves" or low not in (0, WHOLE_SHARE):
                    following = marks[marks.index(low) + (1 if out else -1)]
                    low, high = min(low, following), max(low, following)
    yield low, high, changes


@random_machines
@given(machines(faulty=False), any_draw)
def test_machines_meant_clean_close_their_cycle_where_nothing_goes_wrong(machine: Machine, draw: draws.Draw) -> None:
    run = play(machine, draw, 3, 4 * LIMIT)
    assume(not run.incidents)
    starts = run.cycle_starts["main"]
    assert machine.sequences[0].once or len(starts) == 4
    assert all(visit.left is not None for visit in run.visits if visit.cycle < len(starts) - 1)
