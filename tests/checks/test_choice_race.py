"""A race is shown by a run in which the choice really goes the other way."""

from __future__ import annotations

from pathlib import Path

from seqcheck.pipeline import examine

CASES = Path(__file__).parents[1] / "cases"


def test_a_race_at_a_later_time_round_is_replayed() -> None:
    """The first time nothing has moved yet."""
    (found,) = examine(str(CASES / "choose_sensor_race_the_second_time.steps")).findings
    assert found.kind == "choice-race"
    assert found.replayed
