"""Plays of known runs: whatever may follow on what leads to a state is played behind it, in a few plays."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

import pytest

from seqcheck.engine.controller import Outcome
from seqcheck.engine.explore import explore
from seqcheck.engine.guide import Signature
from seqcheck.engine.seams import Seams
from seqcheck.engine.settlement import Settlement, StateGraph
from seqcheck.language.read import read_machine
from seqcheck.language.source import Source
from seqcheck.machine.model import Machine
from tests.bench.texts import CONTROLLER, choices
from tests.oracle.whole import whole_text

#: Where ways part, and how the choice there came out; the end of a run.
Run = tuple[Signature, Outcome | None]

NESTED = f"""{CONTROLLER}
output K
signal a from outside
signal b from outside
signal c from outside
sequence main {{
    step go {{ on K  dwell 300 ms }}
    choose {{
        when a {{ choose {{ when b {{ step ab {{ dwell 1 s }} }} otherwise {{ step a1 {{ dwell 300 ms }} }} }} }}
        when b {{ step b1 {{ dwell 200 ms }} }}
        otherwise {{ step none {{ dwell 400 ms }} }}
    }}
    choose {{ when c {{ step c1 {{ dwell 150 ms }} }} otherwise {{ jump main.go }} }}
}}
"""


def explored(text: str, apart_us: int = 0) -> StateGraph:
    machine = read_machine(Source("a.steps", text))
    assert isinstance(machine, Machine), machine
    graph = explore(machine, apart_us)
    assert graph.complete and all(one.settled for one in graph.settlements)
    return graph


def runs_of(one: Settlement) -> list[Run]:
    """One after the other; the last, which a play mostly does not go on with, left out."""
    parting = [passage for passage in one.path.passages if len(passage.outcomes) > 1]
    return [(passage.signature, passage.outcome) for passage in parting[:-1]]


def shown(plays: Sequence[Settlement], length: int) -> set[tuple[Run, ...]]:
    return {way for one in plays for way in windows(runs_of(one), length)}


def windows(runs: Sequence[Run], length: int) -> Iterator[tuple[Run, ...]]:
    for first in range(len(runs) - length + 1):
        yield tuple(runs[first : first + length])


def wanted(plays: Sequence[Settlement], length: int) -> set[tuple[Run, ...]]:
    """All ways of so many runs through the graph: where one ends, every way on."""
    outcomes = {one.signature: one.outcomes for play in plays for one in play.path.passages if len(one.outcomes) > 1}
    leads_to = {run: following[0] for run, following in shown(plays, 2)}
    found: set[tuple[Run, ...]] = {((state, outcome),) for state, ways in outcomes.items() for outcome in ways}
    for _ in range(length - 1):
        found = {
            (*way, (leads_to[way[-1]], outcome))
            for way in found
            if way[-1] in leads_to
            for outcome in outcomes[leads_to[way[-1]]]
        }
    return found


@pytest.mark.parametrize("text", [choices(1), choices(2), choices(6), NESTED], ids=["one", "two", "six", "nested"])
def test_every_run_is_played_behind_every_run_that_leads_to_it(text: str) -> None:
    graph = explored(text)
    every = wanted(graph.settlements, 2)
    assert every - shown(graph.settlements, 2)
    assert every <= shown([*graph.settlements, *graph.sewn], 2)


def test_what_is_brief_is_played_between_all_that_lies_before_and_behind() -> None:
    """Each otherwise is a dwell of 50 ms, each other way two strokes of far more than 100."""
    graph = explored(choices(4))
    brief = [way for way in wanted(graph.settlements, 3) if way[1][1] is not None and way[1][1].taken == 1]
    assert set(brief) - shown(graph.settlements, 3)
    assert set(brief) <= shown([*graph.settlements, *graph.sewn], 3)
    assert not wanted(graph.settlements, 3) <= shown([*graph.settlements, *graph.sewn], 3)
    asked = explored(choices(4), 2_000_000)
    assert wanted(asked.settlements, 3) <= shown([*asked.settlements, *asked.sewn], 3)


@pytest.mark.parametrize("count", [5, 10, 20])
def test_a_few_plays_show_them_all(count: int) -> None:
    assert 1 <= len(explored(choices(count)).sewn) <= 12


def test_nothing_more_is_played_where_no_ways_part() -> None:
    text = choices(0).replace("every step within 5 s\n", "every step within 5 s\nC0+ C0-\n")
    assert explored(text).sewn == ()


def test_ways_go_as_they_were_meant_to() -> None:
    """They come to no state that is not known, take the outcomes that they were given, and go on behind the last."""
    sewn = 0
    for seed in range(2000, 2030):
        machine = read_machine(Source("a.steps", whole_text(seed)))
        assert isinstance(machine, Machine)
        graph = explore(machine)
        known = {one.signature for play in graph.settlements for one in play.path.passages}
        for one, (way, _) in zip(graph.sewn, Seams(graph.settlements, 0).ways(), strict=False):
            sewn += 1
            taken = [passage.outcome for passage in one.path.passages if passage.outcome is not None]
            assert tuple(taken[: len(way.outcomes)]) == way.outcomes, seed
            assert len(one.path.passages) > way.fresh + 1 or one.trace.finished or one.path.last is None, seed
            assert {passage.signature for passage in one.path.passages} <= known, seed
    assert sewn > 10
