"""One play: every delay is drawn once for each occasion, under a name that is the same in every play."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Sequence

from seqcheck.engine.controller import Outcome
from seqcheck.engine.player import Player
from seqcheck.engine.timeline import Draw, given, typical
from seqcheck.engine.trace import Choice, Read, Trace
from seqcheck.language.read import read_machine
from seqcheck.language.source import Source
from seqcheck.machine.model import Machine
from seqcheck.machine.time import Span

CLAMP = """controller { scan 8..12 ms  input 2..4 ms  output 0.5..1 ms }
valve V1 5/2 spring { coil Y1  on 18..28 ms  off 25..41 ms }
cylinder clamp on V1 {
    extend 380..450 ms  retract 300..360 ms  lag 4..8 ms
    sensor B1 at retracted delay 1..3 ms  sensor B2 at extended
}
sequence main { every step within 2 s  clamp+ clamp- }
"""


class SoManyRounds:
    """Stops the play as a round begins of which nothing is wanted any more."""

    def __init__(self, rounds: int) -> None:
        self.player: Player | None = None
        self._left = rounds

    def decide(self, choice: Choice, outcomes: Sequence[Outcome]) -> Outcome:
        return outcomes[0]

    def round_begins(self, read: Read, sequence: str) -> None:
        self._left -= 1
        if self._left < 0 and self.player is not None:
            self.player.stop()

    def step_comes_again(self, read: Read, step: str) -> None:
        pass

    def milestone_comes(self, read: Read, step: str) -> None:
        pass


def played(text: str, rounds: int, draw: Draw = typical, until_us: int | None = None) -> Trace:
    machine = read_machine(Source("a.steps", text))
    assert isinstance(machine, Machine), machine
    guide = SoManyRounds(rounds)
    player = guide.player = Player(machine, guide, draw, until_us=until_us)
    return player.play()


def occasions(text: str, rounds: int) -> dict[tuple[str, str], list[int]]:
    """The numbers of each delay, by what takes it and whose it is, in the order in which they were drawn."""
    found: dict[tuple[str, str], list[int]] = defaultdict(list)

    def draw(what: str, name: str, number: int, span: Span) -> int:
        found[what, name].append(number)
        return span.typical

    played(text, rounds, draw)
    return found


def test_each_delay_is_numbered_by_how_often_it_had_occurred_before() -> None:
    """Three whole rounds: three of each but of the strokes, which are numbered both ways together."""
    found = occasions(CLAMP, 3)
    assert [found["valve", f"Y1 {switched}"][:3] for switched in ("on", "off")] == [[0, 1, 2], [0, 1, 2]]
    assert found["delay", "B1"][:5] == [0, 1, 2, 3, 4]  # it goes off, and comes on
    assert found["lag", "clamp"][:6] == [0, 1, 2, 3, 4, 5]
    assert found["mark", "clamp 1000000"][:3] == [0, 2, 4]
    assert found["mark", "clamp 0"][:3] == [1, 3, 5]
    for (what, name), numbers in found.items():
        if what != "mark":
            assert numbers == list(range(len(numbers))), (what, name)


def test_the_same_name_draws_the_same_delay_and_no_other() -> None:
    """The second return of the valve takes 41 ms, all others the typical 33."""
    trace = played(CLAMP, 3, given({("valve", "Y1 off", 1): 41_000}))
    taken = [trace.times[shift.reached] - trace.times[shift.asked] for shift in trace.shifts if shift.to.value == "b"]
    assert taken[:3] == [33_000, 41_000, 33_000]


def test_a_valve_of_two_coils_numbers_the_shifts_of_each() -> None:
    text = """controller { scan 8..12 ms }
    valve V2 5/3 closed centre { coil Y2 to a  coil Y3 to b  on 20..30 ms  off 30..45 ms }
    cylinder lift on V2 { extend 600..700 ms  retract 500..620 ms  sensor B3 at retracted  sensor B4 at extended }
    sequence main {
        every step within 2 s
        step up { on Y2  until B4 }  step rest { dwell 100 ms }  step down { on Y3  until B3 }  step pause { dwell 1 s }
    }"""
    found = occasions(text, 3)
    for coil in ("Y2", "Y3"):
        for switched in ("on", "off"):
            assert found["valve", f"{coil} {switched}"][:3] == [0, 1, 2]


def test_a_play_goes_on_to_the_very_instant_that_is_asked_for() -> None:
    """``clamp+`` is entered at 0, written at 10, energized at 10.75 ms."""
    energized = 10_750
    for until, comes in ((energized - 1, False), (energized, True)):
        trace = played(CLAMP, 3, until_us=until)
        (spell,) = trace.spells["Y1"]
        assert trace.times[spell.on] == energized
        assert (spell.on in trace.happened) is comes
        assert max(trace.times[number] for number in trace.happened) <= until
        assert not trace.finished


def test_a_stroke_that_is_turned_before_its_end_is_cut_and_one_that_is_done_is_not() -> None:
    cut_short = "step out { set Y1  dwell 200 ms }  step back { reset Y1  until B1 }"
    trace = played(CLAMP.replace("clamp+ clamp-", f"{cut_short} clamp+ clamp-"), 1)
    assert [(stroke.out, stroke.cut) for stroke in trace.strokes_of["clamp"][:4]] == [
        (True, True),
        (False, False),
        (True, False),
        (False, False),
    ]
