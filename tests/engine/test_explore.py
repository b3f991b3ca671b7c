"""The timed state graph: what is played, where plays join, and how much of it there is."""

from __future__ import annotations

from typing import Any

import pytest

from seqcheck.engine.explore import explore, most_work
from seqcheck.engine.player import Player
from seqcheck.engine.regions import regions_of
from seqcheck.engine.settlement import Settlement, StateGraph
from seqcheck.engine.states import timed_states
from seqcheck.language.read import read_machine
from seqcheck.language.source import Source
from seqcheck.machine.model import Machine
from seqcheck.pipeline import examine_source
from tests.bench.texts import side_by_side
from tests.oracle.whole import whole_text

CONTROLLER = "controller { scan 8..12 ms  input 2..4 ms  output 0.5..1 ms }\n"
CLAMP = """valve V1 5/2 spring { coil Y1  on 18..28 ms  off 25..40 ms }
cylinder clamp on V1 { extend 380..450 ms  retract 300..360 ms  sensor B1 at retracted  sensor B2 at extended }
"""


def explored(text: str) -> StateGraph:
    machine = read_machine(Source("a.steps", CONTROLLER + text))
    assert isinstance(machine, Machine), machine
    return explore(machine)


def choices_in_a_row(count: int) -> str:
    signals = "\n".join(f"signal s{number} from outside" for number in range(count))
    steps = "\n".join(
        f"choose {{ when s{number} {{ clamp+ clamp- }} otherwise {{ step w{number} {{ dwell {50 + number} ms }} }} }}"
        for number in range(count)
    )
    return f"{CLAMP}{signals}\nsequence main {{\nevery step within 2 s\n{steps}\n}}"


def test_a_machine_without_choices_is_played_once() -> None:
    graph = explored(CLAMP + "sequence main { every step within 2 s  clamp+ clamp- }")
    (only,) = graph.settlements
    assert graph.complete and only.settled
    assert only.path.round is not None


@pytest.mark.parametrize("count", [10, 20, 40])
def test_choices_in_a_row_cost_a_play_and_two_runs_each(count: int) -> None:
    """A thousand ways for ten choices, and twenty runs from state to state."""
    graph = explored(choices_in_a_row(count))
    assert graph.complete
    assert len(graph.settlements) == count + 1
    timed = timed_states(graph)
    assert (len(timed.states), len(timed.runs)) == (count + 1, 2 * count + 1)


def test_both_outcomes_join_where_the_machine_is_the_same_again() -> None:
    graph = explored(choices_in_a_row(2))
    assert all(one.path.joined is not None for one in graph.settlements)
    known: set[int] = set()
    for one in graph.settlements:
        assert one.path.joined is not None
        assert one.states[one.path.joined] in known or one.path.settled is not None
        known |= set(one.states)


def test_an_order_that_is_open_is_played_both_ways_and_one_that_is_not_but_once() -> None:
    """A pulse of 300 ms against a step that ends the command of its coil 290..302 ms later, 300..312 (typically as the
    pulse ends), or 400..412."""
    text = (
        "valve V1 5/2 spring {{ coil Y1  on 18..28 ms  off 25..40 ms }}\noutput K\n"
        "sequence main {{ step go {{ pulse Y1 300 ms  on K  dwell {dwell} ms }}"
        "  step hold {{ on Y1  dwell 20 ms }}  step rest {{ dwell 500 ms }} }}"
    )
    assert len(explored(text.format(dwell=290)).settlements) > 1
    assert len(explored(text.format(dwell=300)).settlements) > 1
    assert len(explored(text.format(dwell=400)).settlements) == 1


def test_sequences_that_never_meet_are_not_whole() -> None:
    text = (
        "sequence main { step a { dwell 100 ms }  step b { dwell 50 ms } }\n"
        "sequence side { step c { dwell 130 ms }  step d { dwell 70 ms } }"
    )
    graph = explored(text)
    assert not graph.settlements[0].settled


def test_the_same_machine_is_explored_the_same_way() -> None:
    one, other = (timed_states(explored(choices_in_a_row(4))) for _ in range(2))
    assert [(run.begin, run.end, run.duration) for run in one.runs] == [
        (run.begin, run.end, run.duration) for run in other.runs
    ]


LIFT = """valve V2 5/3 closed centre { coil Y2 to a  coil Y3 to b  on 20..30 ms  off 30..45 ms }
cylinder lift on V2 { extend 600..700 ms  retract 500..620 ms  sensor B3 at retracted  sensor B4 at extended }
"""


@pytest.mark.parametrize(
    ("text", "first", "rounds"),
    [
        ("sequence main { step a { dwell 50 ms } }", 0, 1),
        # The first round begins at rest, all others as Y3 has just been released
        (f"{LIFT}sequence main {{ every step within 2 s  lift+ lift- }}", 1, 1),
        # Every other round is another one
        (
            "flag odd\nsequence main { choose {"
            " when odd { step a { reset odd  dwell 50 ms } } otherwise { step b { set odd  dwell 80 ms } } } }",
            0,
            2,
        ),
    ],
    ids=["one", "one-behind-another", "two"],
)
def test_a_play_goes_once_round_through_all_that_comes_again(text: str, first: int, rounds: int) -> None:
    (only,) = explored(text).settlements
    assert only.path.settled == first
    assert only.path.joined == first + rounds
    assert only.path.round is not None
    begin, end = only.path.round
    assert end - begin == rounds == only.last - only.first
    assert only.states[begin] == only.states[end]
    assert len(set(only.states[begin:end])) == rounds


def test_no_play_goes_on_far_beyond_the_work_that_is_left() -> None:
    """A machine whose rounds never meet again: 147 open orders tie the bounds of one play to its start."""
    machine = read_machine(Source("random.steps", whole_text(3397)))
    assert isinstance(machine, Machine)
    graph = explore(machine)
    assert not all(one.settled for one in graph.settlements)
    assert sum(one.trace.graph.work for one in graph.settlements) < 2 * most_work(machine)


def test_looking_at_what_is_awaited_is_work() -> None:
    """A pulse that is over after hundreds of rounds, each of 900 steps that ask for eight things, and for one."""
    asked = "b0 or (b1 and b2 and b3) or (b1 and b3) or (b2 and b3)"
    text = "".join(f"flag b{number}\n" for number in range(4)) + (
        "output K\nsequence main {{ step on {{ set b0  set b1  pulse K 10 min }}"
        "  repeat 900 {{ step wait {{ until {asked} }} step next {{ }} }} }}"
    )
    rounds = [
        len(graph.settlements[0].path.passages) for graph in (explored(text.format(asked=one)) for one in (asked, "b0"))
    ]
    assert rounds[0] < rounds[1]


#: The second cylinder may come off its end, turn or stop wherever the first one has the valve turned.
TWO_ON_ONE_VALVE = """valve V1 5/2 spring { coil Y1  on 18..118 ms  off 18..118 ms }
cylinder A on V1 { extend 100..200 ms  retract 100..200 ms  sensor B1 at retracted  sensor B2 at extended }
cylinder B on V1 { extend 600..700 ms  retract 600..700 ms  lag 200..300 ms  sensor B3 at retracted }
sequence main { step out { set Y1  until B2 }  step back { reset Y1  until B1 and B3 } }
never A.moving and B.moving
"""


def _stand_where_their_bounds_leave_them(one: Settlement) -> bool:
    known = {(stroke.cylinder, stroke.number) for stroke in one.trace.strokes if stroke.cut}
    found = dict(regions_of(one.trace, {}))
    return all(one.regions.get(stroke) == found.get(stroke) for stroke in known)


def test_every_play_has_stopped_pistons_where_its_own_bounds_leave_them(monkeypatch: pytest.MonkeyPatch) -> None:
    """27 ways, in most of which it hangs on where a piston stops where it stops next."""
    played: list[Player] = []

    class Counted(Player):
        def __init__(self, *given: Any, **named: Any) -> None:
            super().__init__(*given, **named)
            played.append(self)

    monkeypatch.setattr("seqcheck.engine.explore.Player", Counted)
    graph = explored(TWO_ON_ONE_VALVE)
    complete, ways = graph.complete, graph.settlements
    assert complete
    assert sum(bool(one.regions) for one in ways) > 20
    assert sum(one.settled and _stand_where_their_bounds_leave_them(one) for one in ways) == len(ways)
    plays = len(played)
    assert plays < 4 * len(ways)


def test_where_it_stays_open_where_a_piston_stops_not_all_is_proved(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("seqcheck.engine.explore._MOST_PLACINGS", 0)
    graph = explored(TWO_ON_ONE_VALVE)
    unsure = [one.settled for one in graph.settlements if not _stand_where_their_bounds_leave_them(one)]
    assert unsure and not any(unsure)
    report = examine_source(Source("a.steps", CONTROLLER + TWO_ON_ONE_VALVE))
    assert "not-settled" in {one.kind for one in report.findings}


@pytest.mark.parametrize("branches", [2, 32])
def test_many_moves_side_by_side_are_wholly_played(branches: int) -> None:
    """320 moves whose branches have nothing in common: all of it comes round, however much has to be compared."""
    machine = read_machine(Source("a.steps", side_by_side(branches, 320 // branches)))
    assert isinstance(machine, Machine), machine
    graph = explore(machine)
    whole = graph.complete and all(one.settled for one in graph.settlements)
    assert whole  # Not the graph itself: to show that takes minutes.
