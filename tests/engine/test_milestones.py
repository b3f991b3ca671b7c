"""A play that comes round ends where it has gone round once since it was as in the round before; nothing is lost."""

from __future__ import annotations

import json
from typing import Any

import pytest

from seqcheck.engine import program
from seqcheck.engine.explore import explore
from seqcheck.engine.settlement import Settlement
from seqcheck.language.read import read_machine
from seqcheck.language.source import Source
from seqcheck.machine.model import Machine
from seqcheck.pipeline import examine_source
from seqcheck.report.json import render_json
from tests.bench.stations import in_a_row
from tests.oracle.ruled import ruled_text

#: Random machines of one sequence with rules, findings and something under way as a round begins.
COME_ROUND = (5000, 5003, 5014, 5023, 5039, 5078, 5081, 5084, 5109, 5110, 5133)


def typical_play(text: str) -> Settlement:
    machine = read_machine(Source("a.steps", text))
    assert isinstance(machine, Machine), machine
    return explore(machine).settlements[0]


def visits(settlement: Settlement, step: str) -> int:
    return sum(visit.step.name == f"main.{step}" for visit in settlement.trace.visits)


def test_the_beginning_of_a_round_alone_is_played_a_third_time() -> None:
    """At the start the lifts are at their ends, later a little off: once all four have moved, after sixteen steps, a
    round is like the one before. ``s16`` is a milestone."""
    play = typical_play(in_a_row(64, stations=4))
    assert play.path.rest
    assert (visits(play, "s0"), visits(play, "s15"), visits(play, "s17"), visits(play, "s63")) == (3, 3, 2, 2)
    begin, end = (play.trace.times[play.path.passages[number].at] for number in (play.path.first, play.path.last))
    assert play.trace.times[-1] > play.trace.times[play.path.again] + (end - begin)


def test_without_milestones_all_of_it_is(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(program, "_LEAST_APART", 1_000)
    play = typical_play(in_a_row(64, stations=4))
    assert not play.path.rest
    assert (visits(play, "s1"), visits(play, "s63")) == (3, 3)


@pytest.mark.parametrize(("steps", "apart"), [(64, 16), (4_096, 128)])
def test_milestones_are_few_and_none_is_the_first_step(steps: int, apart: int) -> None:
    machine = read_machine(Source("a.steps", in_a_row(steps, stations=4)))
    assert isinstance(machine, Machine)
    milestones = program.compile_sequence(machine.sequences[0]).milestones
    assert milestones == {f"main.s{number}" for number in range(apart, steps, apart)}


def told(text: str) -> Any:
    """The report but for how long the runs go on that are shown in it."""
    report = json.loads(render_json([examine_source(Source("a.steps", text))]))
    for one in report["reports"]:
        for finding in one.get("findings", ()):
            finding.pop("witness", None)
    return report


@pytest.mark.parametrize("text", [in_a_row(64, stations=4), *map(ruled_text, COME_ROUND)])
def test_the_report_is_the_same_with_a_milestone_at_every_step(text: str, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(program, "_LEAST_APART", 1_000)
    without = told(text)
    monkeypatch.setattr(program, "_LEAST_APART", 1)
    assert told(text) == without


def test_milestones_shorten_some_of_these(monkeypatch: pytest.MonkeyPatch) -> None:
    """Or else the test before this one would ask nothing."""
    monkeypatch.setattr(program, "_LEAST_APART", 1)
    assert sum(typical_play(ruled_text(seed)).path.rest for seed in COME_ROUND) >= 8
