"""A plain player: one concrete run of a machine in global time.

Takes a machine, a source of delays, a number of cycles and a last moment; gives what happened and what went wrong.
Refuses (``NotImplementedError``) whatever it does not play, see ``refusals``.
"""

from __future__ import annotations

from seqcheck.machine.model import Machine
from seqcheck.machine.time import WHOLE_SHARE
from tests.oracle.clock import Clock
from tests.oracle.controller import ControllerPlay, Supervisor
from tests.oracle.draws import Draw
from tests.oracle.inputs import InputLine, Listener
from tests.oracle.judges import StepJudge
from tests.oracle.pistons import CylinderPlay, Watcher
from tests.oracle.records import Run
from tests.oracle.refusals import refuse
from tests.oracle.valves import ValvePlay
from tests.oracle.visits import Cause


def play(machine: Machine, draw: Draw, cycles: int, limit_us: int, stop_at_first: bool = False) -> Run:
    """Play until ``cycles`` cycles are done (to the end of that instant), nothing is left to come, or ``limit_us`` is
    over; with ``stop_at_first`` only to the end of the event that brings the first incident.

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
            lambda *news: self.judge.commanded(*news), lambda visit: self.judge.leaves(visit), self.switch
        )
        self.controller = ControllerPlay(self.clock, machine, self.lines, supervisor)
        cylinders = self._cylinders()
        self.judge = StepJudge(self.clock, machine, cylinders, self.lines, self.controller.active)
        self._lay_lines()
        self.valves = {
            name: ValvePlay(
                self.clock,
                machine,
                valve,
                tuple(play for play in cylinders.values() if play.valve == name),
            )
            for name, valve in machine.valves.items()
        }
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

    def _lay_lines(self) -> None:
        listener = Listener(self.judge.seen, self.judge.vanished, self.judge.spoils)
        for name, sensor in self.machine.sensors.items():
            start = WHOLE_SHARE if self.machine.cylinders[sensor.cylinder].starts_extended else 0
            on = sensor.low <= start <= sensor.high
            self.lines[name] = InputLine(self.clock, self.machine.controller, sensor, on, listener)

    def switch(self, target: str, on: bool, cause: Cause) -> None:
        coil = self.machine.coils.get(target)
        if coil is None:
            self.clock.log(f"output {target} {'on' if on else 'off'}")
        else:
            self.valves[coil.valve].switch(target, on, cause)

    def run(self, cycles: int, limit_us: int, stop_at_first: bool) -> None:
        self.controller.start()
        while not self._over(cycles, stop_at_first):
            following = self.clock.next()
            if following is None or following.time > limit_us:
                break
            self.clock.take()
            self.controller.settle()
            self._judge_dead_end()

    def _over(self, cycles: int, stop_at_first: bool) -> bool:
        if stop_at_first and self.clock.incidents:
            return True
        if len(self.controller.cycle_starts) <= cycles:
            return False
        following = self.clock.next()
        return following is None or following.time > self.clock.now

    def _judge_dead_end(self) -> None:
        """Nothing but watchdogs is to come: an outside signal that is awaited would still be on its way."""
        if self._dead or not self.clock.only_watchdogs():
            return
        self._dead = True
        for visit in self.controller.active:
            self.clock.incident("dead-end", visit.step.name, visit.step.name, "nothing is to come any more")

    def record(self) -> Run:
        return Run(
            self.controller.finished_visits(),
            {self.machine.sequences[0].name: tuple(self.controller.cycle_starts)},
            tuple(self.clock.log_lines),
            tuple(self.clock.incidents),
            tuple(self.clock.bounces),
            tuple(self.clock.draws),
        )
