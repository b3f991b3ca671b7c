"""The moves of a machine and their times, against figures worked out by hand."""

from __future__ import annotations

import pytest

from seqcheck.chart.page_moves import Move, move_times
from seqcheck.checks.study import studies_of
from seqcheck.engine.explore import explore
from seqcheck.machine.findings import Duration
from tests.chart.charts import PROCESS
from tests.chart.page_samples import TWO_MOVES, sample

MS = 1000


def test_from_the_coil_to_the_input_of_the_sensor() -> None:
    """Valve, stroke and filter added up: V1 18..28 + 380..450 + 2..4 ms, and so on. Nothing waits for the end of the
    push: valve and stroke, 20..30 + 600..700 ms. Typical times are the middles."""
    assert sample(TWO_MOVES).moves == (
        (
            Move("main.gate+", "gate", "out", "Y1", True, "B2", True, "main.gate+"),
            Duration(400 * MS, 441 * MS, 482 * MS),
        ),
        (
            Move("main.push", "ram", "out", "Y2", True, None, True, "main.push"),
            Duration(620 * MS, 675 * MS, 730 * MS),
        ),
        (
            Move("main.pull", "ram", "in", "Y3", True, "B3", True, "main.pull"),
            Duration(522 * MS, 588 * MS, 654 * MS),
        ),
        (
            Move("main.gate-", "gate", "in", "Y1", False, "B1", True, "main.gate-"),
            Duration(327 * MS, 365_500, 404 * MS),
        ),
    )


def test_a_sensor_that_a_later_step_waits_for_ends_the_move() -> None:
    """B9 at half way is passed in the step that starts the move, B2 at the end is waited for by the next."""
    text = TWO_MOVES.replace("sensor B2 %I0.1", "sensor B9 at 45..55 %  sensor B2 %I0.1").replace(
        "gate+ within 1 s",
        "step leave { set Y1  until B9 within 700 ms }  step arrive { until B2  within 1 s }",
    )
    first, *_ = sample(text).moves
    assert first == (
        Move("main.leave", "gate", "out", "Y1", True, "B2", True, "main.arrive"),
        Duration(400 * MS, 441 * MS, 482 * MS),
    )


def test_the_same_move_made_twice_has_one_row() -> None:
    made_twice = sample(TWO_MOVES.replace("gate+ within 1 s", "repeat 2 { gate+ gate- }\n gate+"))
    moves = [move for move, _ in made_twice.moves]
    assert [move.step for move in moves] == [
        "main.gate+",
        "main.gate-",
        "main.gate+2",
        "main.push",
        "main.pull",
        "main.gate-2",
    ]
    assert len(set(moves)) == len(moves)


def test_a_move_that_is_always_cut_short_has_no_time() -> None:
    """The valve is back in the middle after 300 ms, long before the 600 ms that the ram takes at least."""
    times = {move.step: time for move, time in sample(TWO_MOVES.replace("dwell 900 ms", "dwell 300 ms")).moves}
    assert times["main.push"] is None
    assert times["main.gate+"] == Duration(400 * MS, 441 * MS, 482 * MS)


@pytest.mark.parametrize("wider", [0, 1])
def test_all_ways_in_which_a_machine_was_played_count(wider: int) -> None:
    """The same machine with a slower valve stands for a second way; the typical times stay those of the first."""
    one = sample(TWO_MOVES)
    other = sample(TWO_MOVES.replace("on 18..28 ms", "on 8..58 ms"))
    assert one.machine and other.machine
    ways = [one.machine, other.machine][: wider + 1]
    studies = [study for machine in ways for study in studies_of(machine, explore(machine))]
    _, time = move_times(one.machine, studies)[0]
    assert time == Duration((390 if wider else 400) * MS, 441 * MS, (512 if wider else 482) * MS)


def test_a_signal_that_follows_the_piston_ends_a_move() -> None:
    """A pressure switch 80 to 150 ms behind the end: 18..28 + 380..450 + 80..150 + 2..4 ms."""
    text = TWO_MOVES.replace("signal start", "signal tight %I0.9 follows gate.extended on 80..150 ms\nsignal start")
    shown = sample(text.replace("gate+ within 1 s", "step lift { set Y1  until tight  within 1 s }"))
    assert shown.moves[0] == (
        Move("main.lift", "gate", "out", "Y1", True, "tight", True, "main.lift"),
        Duration(480 * MS, 556 * MS, 632 * MS),
    )
    assert "%I0.9" in shown.page()


def test_valves_that_move_no_cylinder_make_moves_of_their_own() -> None:
    """Their times are those of the sheet; the tap that is normally open closes when its coil is energized."""
    moves = {(move.step, move.device, move.way): (move, time) for move, time in sample(PROCESS).moves}
    move, time = moves["main.more", "VT", "closes"]
    assert (move.coil, move.energized, move.sensor) == ("Y2", True, None)
    assert time == Duration(40 * MS, 40 * MS, 40 * MS)
    assert moves["main.more", "VT", "opens"][1] == Duration(60 * MS, 60 * MS, 60 * MS)
    assert moves["main.shut", "VM", "closes"][1] == Duration(1000 * MS, 1000 * MS, 1000 * MS)
    assert moves["main.crack", "VM", "opens"][1] is None
    assert not any(device in ("V1", "V2") for _, device, _ in moves)
