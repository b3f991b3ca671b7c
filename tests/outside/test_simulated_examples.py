"""Every example machine simulated with simpy, and its cycle held against what is proved of it.

The models are written from the texts alone. With all times typical the simulation takes exactly the typical cycle; with
all least or all greatest the least and the greatest; with random ones it stays between them, and so does a controller
that really goes round and round, whatever the phase. Where a piston may be stopped anywhere, the bounds are safe and a
little wide, as the report says.
"""

from __future__ import annotations

import random
from pathlib import Path

import pytest

from seqcheck.machine.findings import Duration, Report
from seqcheck.pipeline import examine
from tests.outside import faulty_stations, stations
from tests.outside.controllers import Controller, Drawing, Looping
from tests.outside.plant import Draw, Times
from tests.outside.station import Station

CHECKOUT = Path(__file__).resolve().parents[2]
RUNS = 1000
#: Fewer of those that really go round: they take longer.
LOOPS = 300

MODELS: dict[str, type[Station]] = {
    "crate_stapler": stations.CrateStapler,
    "tile_press": stations.TilePress,
    "bin_shaker": stations.BinShaker,
    "rinse_skid": stations.RinseSkid,
    "change/before": stations.LiftBefore,
    "change/after": stations.LiftAfter,
    "faulty/broken_never": faulty_stations.FreshRinser,
    "faulty/choice_race": faulty_stations.CrateScale,
    "faulty/coil_handover": faulty_stations.BottleLift,
    "faulty/command_race": faulty_stations.DryingCabin,
    "faulty/cut_stroke": faulty_stations.TapeApplicator,
    "faulty/early_dwell": faulty_stations.TrayUnloader,
    "faulty/missed_signal": faulty_stations.ParcelPusher,
    "faulty/no_watchdog": faulty_stations.OutAndBack,
    "faulty/not_settled": faulty_stations.BottleSorter,
    "faulty/opposed_coils": faulty_stations.HopperGate,
    "faulty/over_limit": faulty_stations.LidGluer,
    "faulty/overshoot": faulty_stations.DrillingTable,
    "faulty/short_pulse": faulty_stations.Stamp,
    "faulty/stale_accept": faulty_stations.GlueStamp,
    "faulty/stale_signal": faulty_stations.SawClamp,
    "faulty/tight_watchdog": faulty_stations.OutAndBack,
    "faulty/unreachable": faulty_stations.BottleRinser,
    "faulty/unused": faulty_stations.CorkFeeder,
}
#: Nothing comes round in these.
NO_CYCLE = ("faulty/dead_end", "faulty/endless_loop")
#: What is found there changes the course of a run: it leaves a step too early. The figures of the report hold for the
#: others, as it says.
COURSE = "faulty/stale_signal"
#: What is found there makes a run wait for ever: for a valve that did not get there, for a sensor that was missed, for
#: one to go on which the table has come to stand.
STANDSTILL = ("faulty/short_pulse", "faulty/missed_signal", "faulty/overshoot")


def least(times: Times) -> int:
    return times[0]


def typical(times: Times) -> int:
    return times[2] if len(times) == 3 else (times[0] + times[1]) // 2


def greatest(times: Times) -> int:
    return times[1]


def at_random(seed: int) -> Draw:
    draw = random.Random(seed)
    return lambda times: draw.randint(times[0], times[1])


def report_on(name: str) -> Report:
    report = examine(str(CHECKOUT / "examples" / f"{name}.steps"))
    assert not report.problems
    return report


def cycle_of(report: Report) -> Duration:
    return dict(report.cycles)["main"]


def course_of(report: Report) -> int:
    """What a cycle takes at most where signals from outside leave it open: the sum of the steps that they do not."""
    return sum(one.greatest or 0 for name, one in report.steps if name.startswith("main."))


def is_wide(report: Report) -> bool:
    return any("bounds safe there" in assumption for assumption in report.assumptions)


def settled(name: str, controller: type[Controller], draw: Draw) -> list[int]:
    """The cycle of a run after the first, which starts at rest."""
    return MODELS[name](controller, draw).run(2)[1:]


def test_every_example_is_simulated() -> None:
    folder = CHECKOUT / "examples"
    names = {file.relative_to(folder).with_suffix("").as_posix() for file in folder.rglob("*.steps")}
    assert names == {*MODELS, *NO_CYCLE}


@pytest.mark.parametrize("name", [name for name in MODELS if name != "faulty/overshoot"])
def test_typical_cycle(name: str) -> None:
    found = settled(name, Drawing, typical)
    assert set(found) == {cycle_of(report_on(name)).typical}


@pytest.mark.parametrize("name", MODELS)
def test_least_and_greatest_cycle(name: str) -> None:
    report = report_on(name)
    cycle = cycle_of(report)
    most = course_of(report) if cycle.greatest is None else cycle.greatest
    shortest, longest = min(settled(name, Drawing, least)), max(settled(name, Drawing, greatest))
    if is_wide(report):
        assert cycle.least <= shortest and longest <= most
    else:
        assert (shortest, longest) == (cycle.least, most)


@pytest.mark.slow
@pytest.mark.parametrize("controller", [Drawing, Looping])
@pytest.mark.parametrize("name", MODELS)
def test_random_runs_stay_within_the_bounds(name: str, controller: type[Controller]) -> None:
    cycle = cycle_of(report_on(name))
    runs = RUNS if controller is Drawing else LOOPS
    found = [time for seed in range(runs) for time in settled(name, controller, at_random(seed))]
    assert (len(found) == runs) != (name in STANDSTILL), "a run comes to a standstill, or none does"
    outside = [time for time in found if not cycle.least <= time <= (cycle.greatest or time)]
    if name == COURSE:
        assert outside, "the fault of this machine does not show"
        assert all(time < cycle.least for time in outside), "a step left too early makes no cycle longer"
    else:
        assert not outside
    assert max(found) - min(found) > (cycle.greatest or 0) / 1000, "the runs hardly differ"


@pytest.mark.parametrize(
    ("name", "model", "allowed"),
    [
        ("faulty/broken_never", faulty_stations.FreshRinser, 0),
        ("faulty/over_limit", faulty_stations.LidGluer, 1_500_000),
    ],
)
@pytest.mark.parametrize("controller", [Drawing, Looping])
def test_what_breaks_a_rule_lasts_as_long_as_the_report_says(
    name: str,
    model: type[faulty_stations.FreshRinser] | type[faulty_stations.LidGluer],
    allowed: int,
    controller: type[Controller],
) -> None:
    """Never longer, and nearly so long in one run of some hundreds."""
    (finding,) = report_on(name).findings
    assert finding.margin_us is not None
    most = allowed - finding.margin_us
    stations_run = [model(controller, at_random(seed)) for seed in range(300)]
    lasted = [time for station in stations_run if station.run(2) for time in station.lasted]
    assert len(lasted) >= 300
    assert 0.95 * most < max(lasted) <= most


@pytest.mark.parametrize("controller", [Drawing, Looping])
def test_runs_of_the_state_graph_add_up_to_cycles_of_any_number_of_rounds(controller: type[Controller]) -> None:
    """The rinse skid fills and drains the vessel again while the water is cloudy, as often as it likes."""
    report = report_on("rinse_skid")
    names = {state.number: state.name for state in report.states}
    choose = next(state.number for state in report.states if state.choice is not None)
    filling, draining = (
        {run.duration for run in report.runs if names[run.begin] == begin and names[run.end] == end}
        for begin, end in (("main.dose entered", "stirrer begins"), ("stirrer begins", names[choose]))
    )
    ((fill,), (drain,)) = filling, draining
    (done,) = {run.duration for run in report.runs if run.begin == choose and names[run.end] == "main begins"}
    seen = set()
    for seed in range(100):
        station = stations.RinseSkid(controller, at_random(seed))
        for time, rounds in zip(station.run(2), station.rounds, strict=True):
            assert fill.greatest is not None and drain.greatest is not None and done.greatest is not None
            assert time >= rounds * (fill.least + drain.least) + done.least
            assert time <= rounds * (fill.greatest + drain.greatest) + done.greatest
            seen.add(rounds)
    assert {1, 2, 3} <= seen
