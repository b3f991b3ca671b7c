"""Motion steps: ``clamp+`` as the commands and the exit that it comes to.

Takes a motion step and the registry; gives a step of the model; reports cylinders that cannot be moved so, and ends
without a sensor where nothing else ends the step.
"""

from __future__ import annotations

from seqcheck.language.cylinders import end_sensor
from seqcheck.language.problems import short
from seqcheck.language.registry import Registry
from seqcheck.language.syntax import ConditionsText, CylinderText, MotionText, MoveText, ValveText
from seqcheck.machine.conditions import AllOf, Condition, Term, TermKind
from seqcheck.machine.devices import ValveReturn
from seqcheck.machine.steps import Command, CommandKind, Move, Step, Watchdog


def resolve_motion(registry: Registry, text: MotionText, name: str, watchdog: Watchdog | None) -> Step:
    """A motion step; what is wrong in it is left out."""
    commands: dict[str, Command] = {}
    positions: dict[str, tuple[str, MoveText]] = {}
    moved: dict[str, MoveText] = {}
    sensors: list[Term] = []
    for move in text.moves:
        cylinder = _cylinder(registry, move)
        if cylinder is None:
            continue
        if cylinder.name.text in moved:
            message = f"{short(cylinder.name.text)} stands here twice"
            registry.problems.report(move.place, message, "one step moves a cylinder one way")
            continue
        moved[cylinder.name.text] = move
        command = _command(registry, cylinder, move, positions)
        if command is not None:
            commands.setdefault(command.target, command)
        sensor = end_sensor(cylinder, move.out)
        if sensor is not None:
            sensors.append(Term(TermKind.SENSOR, sensor.name.text, None, move.place))
        elif text.exit.dwell is None:
            end = "extended" if move.out else "retracted"
            message = f"{short(cylinder.name.text)} has no sensor at {end} that could end this step"
            registry.problems.report(move.place, message, "write `dwell 500 ms`, say, behind it, or give it a sensor")
    until: Condition | None = None
    if sensors:
        until = sensors[0] if len(sensors) == 1 else AllOf(tuple(sensors), text.place)
    moves = tuple(Move(cylinder, move.out, move.place) for cylinder, move in moved.items())
    dwell = text.exit.dwell.time if text.exit.dwell else None
    return Step(name, None, tuple(commands.values()), until, None, dwell, watchdog, moves, text.place)


def _cylinder(registry: Registry, move: MoveText) -> CylinderText | None:
    if not registry.is_a(move.cylinder, "cylinder"):
        return None
    cylinder = registry.devices[move.cylinder.text]
    assert isinstance(cylinder, CylinderText)
    if isinstance(cylinder.drive, ConditionsText):
        message = f"{short(cylinder.name.text)} is not on one valve: this says not what to switch"
        registry.problems.report(move.place, message, "write a `step` with the coils it needs")
        return None
    return cylinder


def _command(
    registry: Registry, cylinder: CylinderText, move: MoveText, positions: dict[str, tuple[str, MoveText]]
) -> Command | None:
    """What brings the cylinder's valve to the position that moves it so."""
    assert not isinstance(cylinder.drive, ConditionsText)
    valve = registry.devices.get(cylinder.drive.text)
    if not isinstance(valve, ValveText):
        return None
    wanted = "a" if move.out != (cylinder.reverse is not None) else "b"
    before = positions.setdefault(valve.name.text, (wanted, move))
    if before[0] != wanted:
        first = before[1].cylinder.text
        both = f"{short(first)} and {short(move.cylinder.text)}"
        message = f"{both} are on one valve, {short(valve.name.text)}, and need opposite positions"
        registry.problems.report(move.place, message, "move them in two steps")
        return None
    if valve.kind is ValveReturn.SPRING:
        kind = CommandKind.SET if wanted == "a" else CommandKind.RESET
        return Command(kind, valve.coils[0].name.text, None, move.place) if valve.coils else None
    for coil in valve.coils:
        if coil.to is not None and coil.to.text == wanted:
            return Command(CommandKind.ON, coil.name.text, None, move.place)
    return None
