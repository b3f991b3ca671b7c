"""A plain player: one concrete run of a machine in global time.

Takes a machine, a source of delays, a number of cycles and a last moment; gives what happened and what went wrong.
Refuses (``NotImplementedError``) whatever it does not play, see ``refusals``.
"""

from __future__ import annotations

from collections.abc import Callable

from seqcheck.machine.conditions import terms_of
from seqcheck.machine.devices import FollowingSignal
from seqcheck.machine.model import Machine
from seqcheck.machine.time import WHOLE_SHARE
from tests.oracle.clock import Clock
from tests.oracle.controller import ControllerPlay, Supervisor
from tests.oracle.cycles import CycleBook
from tests.oracle.draws import Draw
from tests.oracle.inputs import Feed, InputLine, Listener
from tests.oracle.judges import StepJudge
from tests.oracle.pistons import CylinderPlay, Shift, Watcher, direction, valves_of
from tests.oracle.reads import Cause
from tests.oracle.records import Run
from tests.oracle.refusals import refuse
from tests.oracle.rules import rulebook
from tests.oracle.scene import Followers, Scene
from tests.oracle.valves import ValvePlay


def play(machine: Machine, draw: Draw, cycles: int, limit_us: int, stop_at_first: bool = False) -> Run:
    """Play until ``cycles`` cycles of the first sequence that goes round are done (to the end of that instant), nothing
    is left to come, or ``limit_us`` is over; with ``stop_at_first`` only to the end of the event that brings the first
    incident that diverts the machine.

    Raises ``NotImplementedError`` for what it does not play, ``EndlessLoop`` where steps chase each other without time
    passing, and whatever ``draw`` raises."""
    refuse(machine)
    player = _Player(machine, draw)
    player.run(cycles, limit_us, stop_at_first)
    return player.record()


class _Player:
    def __init__(self, machine: Machine, draw: Draw) -> None:
        self.machine = machine
        self.clock = Clock(draw)
        self.lines: dict[str, InputLine] = {}
        supervisor = Supervisor(
            lambda *news: self.judge.commanded(*news), lambda wait: self.judge.leaves(wait), self.switch
        )
        self.controller = ControllerPlay(self.clock, machine, self.lines, supervisor)
        self.cylinders = self._cylinders()
        self.judge = StepJudge(self.clock, machine, self.cylinders, self.lines, self.controller)
        self.valves = {
            name: ValvePlay(self.clock, machine, valve, self._reaches(name)) for name, valve in machine.valves.items()
        }
        self._begin()
        self.scene = Scene(machine, self.lines, self.valves, self.cylinders, self.controller)
        self._lay_lines()
        self.followers = Followers(self.clock, machine, self.lines, self.scene)
        books = {each.name: CycleBook(machine, each, self.controller) for each in machine.sequences}
        self.cycles = books
        self.rules = rulebook(self.clock, machine.rules, self.scene.holds, lambda name: books[name].begun())
        self._dead = False

    def _cylinders(self) -> dict[str, CylinderPlay]:
        watcher = Watcher(
            lambda cylinder, out: self.judge.arrived(cylinder, out),
            lambda sensor, out: self.judge.entered_range(sensor, out),
            lambda cylinder: self.judge.stands(cylinder),
        )
        return {
            name: CylinderPlay(self.clock, self.machine, cylinder, self.lines, watcher)
            for name, cylinder in self.machine.cylinders.items()
        }

    def _reaches(self, valve: str) -> Callable[[Shift], None]:
        """What a valve tells: the cylinders that look at it may be driven in another way."""
        concerned = [play for play in self.cylinders.values() if valve in valves_of(play.cylinder)]

        def tell(shift: Shift) -> None:
            for play in concerned:
                play.follow(self._driven(play), shift)

        return tell

    def _driven(self, play: CylinderPlay) -> bool | None:
        positions = {name: valve.reached for name, valve in self.valves.items()}
        return direction(self.machine, play.cylinder, positions)

    def _begin(self) -> None:
        for play in self.cylinders.values():
            play.begin(self._driven(play))

    def _lay_lines(self) -> None:
        """Signals that follow the machine have what they follow from the start, those before them included."""
        listener = Listener(self._see, self.judge.vanished, self.judge.spoils)
        for name, sensor in self.machine.sensors.items():
            start = WHOLE_SHARE if self.machine.cylinders[sensor.cylinder].starts_extended else 0
            on = sensor.low <= start <= sensor.high
            self.lines[name] = InputLine(self.clock, Feed.of(self.machine, sensor), on, listener)
        left = [signal for signal in self.machine.signals.values() if isinstance(signal, FollowingSignal)]
        while left:
            names = {signal.name for signal in left}
            ready = [each for each in left if not names & {term.subject for term in terms_of(each.follows)}]
            assert ready, "signals that follow each other in a circle"
            for signal in ready:
                on = self.scene.holds(signal.follows)
                self.lines[signal.name] = InputLine(self.clock, Feed.of(self.machine, signal), on, listener)
                left.remove(signal)

    def _see(self, line: str, on: bool) -> None:
        self.controller.knowledge.stirred = True
        self.judge.seen(line, on)

    def switch(self, target: str, on: bool, cause: Cause) -> None:
        coil = self.machine.coils.get(target)
        if coil is not None:
            self.valves[coil.valve].switch(target, on, cause)
            return
        self.clock.log(f"output {target} {'on' if on else 'off'}")
        if on:
            self.scene.outputs.add(target)
        else:
            self.scene.outputs.discard(target)

    def run(self, cycles: int, limit_us: int, stop_at_first: bool) -> None:
        self.controller.start()
        self._notice()
        while not self._over(cycles, stop_at_first):
            following = self.clock.next()
            if following is None or following.time > limit_us:
                break
            self.clock.take()
            self.rules.event()
            self.controller.settle()
            self._notice()
            self._judge_dead_end()

    def _notice(self) -> None:
        """After an event and what it has made the controller do."""
        self.rules.event()
        self.followers.notice()
        following = self.clock.next()
        if following is None or following.time > self.clock.now:
            self.rules.instant()

    def _over(self, cycles: int, stop_at_first: bool) -> bool:
        if stop_at_first and self.clock.diverted:
            return True
        sequences = self.machine.sequences
        leading = next((sequence for sequence in sequences if not sequence.once), sequences[0])
        if len(self.controller.cycle_starts[leading.name]) <= cycles:
            return False
        following = self.clock.next()
        return following is None or following.time > self.clock.now

    def _judge_dead_end(self) -> None:
        """Nothing but judgements is to come: an outside signal that is awaited would still be on its way."""
        if self._dead or not self.clock.nothing_to_come():
            return
        self._dead = True
        for wait in self.controller.waits():
            self.clock.incident("dead-end", wait.name, wait.name, "nothing is to come any more")

    def record(self) -> Run:
        return Run(
            self.controller.finished_visits(),
            {name: tuple(starts) for name, starts in self.controller.cycle_starts.items()},
            {name: book.finished() for name, book in self.cycles.items()},
            tuple(self.controller.choosing.taken),
            self.rules.finish(),
            tuple(self.clock.log_lines),
            tuple(self.clock.incidents),
            tuple(self.clock.bounces),
            tuple(self.clock.draws),
        )
