"""What a proof rests on, in short sentences."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from seqcheck.checks.assumed_times import told_devices, told_results
from seqcheck.checks.study import Study
from seqcheck.checks.wording import in_time
from seqcheck.machine.devices import Cylinder, OutsideSignal, Position
from seqcheck.machine.model import Machine
from seqcheck.machine.time import WHOLE_SHARE


def assumptions(
    machine: Machine, typical: Sequence[Study], accepted: bool = False, strays: bool = False, all_sewn: bool = True
) -> tuple[str, ...]:
    """``typical``: the play at typical times of each part of the machine; ``accepted``: the text accepts something that
    happens in some runs only; ``strays``: the run at typical times breaks what others keep;
    ``all_sewn``: all that may follow one another was played in one, as far as that matters to margins."""
    return (
        *_assumed(machine),
        "every time anywhere in its span, anew each time",
        *_speeds(list(machine.cylinders.values())),
        "no faulty part",
        _start(machine),
        *_signals(machine),
        *_proof(typical),
        *(("played on from what goes wrong at typical times, where other runs may go right",) if strays else ()),
        *(() if all_sewn else ("margins across choices may be smaller: not every way was played behind every other",)),
        *(("what is accepted happens, or does not, as it does at typical times",) if accepted else ()),
    )


def _assumed(machine: Machine) -> Iterator[str]:
    devices = told_devices(machine)
    if devices is not None:
        yield f"ordinary times assumed ({devices}), so {told_results(machine)}"


def _speeds(cylinders: list[Cylinder]) -> Iterator[str]:
    uneven = [f"{one.name} up to {one.uneven * 100 / WHOLE_SHARE:g} %" for one in cylinders if one.uneven]
    if cylinders:
        yield "speeds even along the stroke" if not uneven else f"speeds uneven ({', '.join(uneven)}), others even"


def _start(machine: Machine) -> str:
    extended = [cylinder.name for cylinder in machine.cylinders.values() if cylinder.starts_extended]
    at_a = [valve.name for valve in machine.valves.values() if valve.starts is Position.A]
    parts = ["start at rest, cylinders retracted"]
    parts += [f"{', '.join(extended)} extended"] if extended else []
    parts += [f"{', '.join(at_a)} at a"] if at_a else []
    return ", ".join(parts)


def _signals(machine: Machine) -> Iterator[str]:
    outside = [signal for signal in machine.signals.values() if isinstance(signal, OutsideSignal)]
    free = [signal.name for signal in outside if signal.after is None]
    if free:
        yield f"at any time from outside: {', '.join(free)}"
    for signal in outside:
        if signal.after is not None:
            yield (
                f"{signal.name} from outside {in_time(signal.after.least)} to {in_time(signal.after.greatest)} "
                "after a step begins to wait"
            )


def _proof(typical: Sequence[Study]) -> Iterator[str]:
    """What was proved apart, where the bounds are safe but need not be exact, or where the proof stops short."""
    if len(typical) > 1:
        apart = (" and ".join(one.name for one in study.machine.sequences) for study in typical)
        yield f"proved apart, as they share nothing: {'; '.join(apart)}"
    anywhere = sorted({cylinder for study in typical for cylinder, _ in study.settlement.regions})
    if anywhere:
        yield f"{', '.join(anywhere)} stopped anywhere that the times allow (bounds safe there)"
    if not all(study.whole for study in typical):
        yield "not every run was played (see not-settled)"
