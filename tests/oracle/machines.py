"""Random machines as texts of the sequence language, for hypothesis.

Every text is one the player plays: one sequence, no choose, no jump. Times are random whole microseconds, so that ties
are rare. Most texts come out clean; a faulty one has one to four of ``FAULTS``, each of which draws some of its times
from a range in which many are too tight, or adds steps that ask for trouble. Each block of steps brings its cylinders
back to where they started, so that the cycle closes.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from hypothesis import strategies as st
from hypothesis.strategies import DrawFn, SearchStrategy

from seqcheck.language.read import read_machine
from seqcheck.language.source import Source
from seqcheck.machine.model import Machine
from tests.oracle.writer import Writer, drawn, indent

CENTRES = ("closed centre", "exhaust centre", "pressure centre", "tandem centre", "float centre")
FAULTS = ("pulse", "dwell", "watchdog", "rest", "filter", "opposed", "hasty", "passing")
NAMES = ("clamp", "lift", "pusher", "gate")


@dataclass(frozen=True, slots=True)
class Drive:
    """One valve with its cylinder. Away is the way from where the cylinder starts, with the coil to ``a``; home is the
    way back, a spring's own doing."""

    cylinder: str
    kind: str
    away_coil: str
    home_coil: str | None
    away_sensor: str
    home_sensor: str
    mid_sensor: str | None
    has_gap: bool


# --- devices ---


def controller(write: Writer) -> str:
    match write.pick("scan", "scan", "task", "ideal"):
        case "scan":
            round_time = f"scan {write.span(3, 12, 6)}"
        case "task":
            round_time = f"task {write.span(8, 15, 5)}  run {write.span(1, 5, 3)}"
        case _:
            return ""
    return f"controller {{ {round_time}  {_transfer(write, 'input', 4)}  {_transfer(write, 'output', 2)} }}"


def _transfer(write: Writer, word: str, most: float) -> str:
    match write.pick("none", "one", "two"):
        case "one":
            return f"{word} {write.span(0, 8 * most if write.errs('filter', 60) else most, 3)}"
        case "two":
            return f"{word} on {write.span(0, most, 2)} off {write.span(0, most, 2)}"
    return ""


def _valve(write: Writer, number: int, kind: str) -> str:
    on, off = f"on {write.span(15, 25, 12)}", f"off {write.span(20, 35, 12)}"
    first, second = f"Y{number}1", f"Y{number}2"
    if kind == "spring":
        return f"valve V{number} 5/2 spring {{ coil {first}  {on}  {off} }}"
    gap = f"gap {write.either('rest', (1, 15), (10, 60))}" if write.chance(25) or write.errs("rest", 60) else ""
    decay = f"decay {write.span(0, 3, 5)}" if write.chance(20) else ""
    coils = f"coil {first} to a  coil {second} to b"
    if kind == "bistable":
        return f"valve V{number} 5/2 bistable {{ {coils}  {on}  {decay}  {gap} }}"
    return f"valve V{number} 5/3 {kind} {{ {coils}  {on}  {off}  {decay}  {gap} }}"


def new_drive(write: Writer, number: int) -> tuple[str, Drive]:
    """A valve and its cylinder. A reversed cylinder is out at ``b`` and the sequence starts with it extended."""
    kind = write.pick("spring", "bistable", write.pick(*CENTRES))
    name, reverse = NAMES[number - 1], write.chance(15)
    from_coil = " from coil" if write.chance(20) else ""
    words = [
        f"extend {write.span(200, 600, 90)}{from_coil}",
        f"retract {write.span(200, 500, 90)}{from_coil}",
        f"lag {write.span(0, 30, 20)}" if write.chance(30) else "",
        f"uneven {write.whole(1, 25)} %" if write.chance(40) else "",
        f"overrun {write.span(0, 8, 8)}" if write.chance(30) else "",
        "starts extended" if reverse else "",
        f"sensor B{number}1 at {write.pick('retracted', 'retracted', '0..4 %', '0..7.5 %')}{_delay(write)}",
    ]
    middle = f"B{number}3" if write.chance(50) or write.errs("passing", 60) else None
    if middle is not None:
        low = write.whole(30, 55)
        high = low + write.whole(*((1, 8) if write.errs("passing", 60) else (8, 25)))
        words.append(f"sensor {middle} at {low}..{high} %{_delay(write)}")
    words.append(f"sensor B{number}2 at {write.pick('extended', 'extended', '96..100 %', '93..100 %')}{_delay(write)}")
    valve = _valve(write, number, kind)
    head = f"{valve}\ncylinder {name} on V{number}{' reversed' if reverse else ''} {{"
    text = "\n    ".join([head, *(word for word in words if word)]) + "\n}"
    coils = f"Y{number}1", None if kind == "spring" else f"Y{number}2"
    sensors = (f"B{number}1", f"B{number}2") if reverse else (f"B{number}2", f"B{number}1")
    return text, Drive(name, kind, *coils, *sensors, middle, " gap " in valve)


def _delay(write: Writer) -> str:
    return f" delay {write.span(0, 3, 3)}" if write.chance(20) else ""


# --- steps ---


def within(write: Writer) -> str:
    return f"within {write.either('watchdog', (2500, 9000), (250, 900))}" if write.chance(40) else ""


def command(write: Writer, drive: Drive, away: bool) -> str:
    if drive.home_coil is None:
        return f"{'set' if away else 'reset'} {drive.away_coil}"
    coil, other = (drive.away_coil, drive.home_coil) if away else (drive.home_coil, drive.away_coil)
    if drive.kind == "bistable":
        opposed = write.errs("opposed", 50)
        return write.pick(
            f"on {coil}",
            f"pulse {coil} {write.either('pulse', (90, 180), (5, 60))}",
            f"set {coil}" if opposed else f"on {coil}  reset {other}",
        )
    return f"on {coil}"


def _exit(write: Writer, drive: Drive, away: bool) -> str:
    sensor, other = (drive.away_sensor, drive.home_sensor) if away else (drive.home_sensor, drive.away_sensor)
    match write.pick("until", "until", "until", "both", "pair", "coil", "steady", "dwell"):
        case "both":
            return f"until {sensor}  dwell {write.ms(1, 700)}"
        case "pair":
            return f"until {sensor} and not {other}"
        case "coil" if drive.home_coil is None:
            return f"until {'' if away else 'not '}{drive.away_coil} and {sensor}"
        case "steady":
            return f"until {sensor} steady {write.ms(1, 120)}"
        case "dwell":
            return f"dwell {write.either('dwell', (900, 1500), (150, 700))}"
    return f"until {sensor}"


def move(write: Writer, drive: Drive, away: bool) -> list[str]:
    """One way, and what rests behind it."""
    if write.chance(30):
        outward = away is (drive.away_sensor.endswith("2"))
        return [f"{drive.cylinder}{'+' if outward else '-'}  {within(write)}".rstrip(), *_rest(write, drive)]
    return [write.step(command(write, drive, away), _exit(write, drive, away), within(write)), *_rest(write, drive)]


def _rest(write: Writer, drive: Drive) -> list[str]:
    """A pause before the opposed coil, where the valve asks for one."""
    return [write.step(f"dwell {write.either('rest', (60, 200), (1, 60))}")] if drive.has_gap else []


def stop_midway(write: Writer, drive: Drive) -> list[str]:
    """Stopped on the sensor in the middle, then on; or, with a spring, turned round on it."""
    assert drive.mid_sensor is not None
    if drive.home_coil is None:
        there = write.step(f"set {drive.away_coil}", f"until {drive.mid_sensor}", within(write))
        return [there, write.step(f"reset {drive.away_coil}", f"until {drive.home_sensor}", within(write))]
    return [
        write.step(f"on {drive.away_coil}", f"until {drive.mid_sensor}", within(write)),
        write.step(f"dwell {write.either('rest', (100, 400), (1, 60))}"),
        write.step(f"on {drive.away_coil}", f"until {drive.away_sensor}"),
        *_rest(write, drive),
        *move(write, drive, False),
    ]


def _hasty_trips(write: Writer, drive: Drive) -> list[str]:
    """Away, back for a moment only, and away again: the sensor may still be on from before."""
    away = [write.step(command(write, drive, True), f"until {drive.away_sensor}") for _ in range(2)]
    back = write.step(command(write, drive, False), f"dwell {write.ms(1, 400)}")
    return [away[0], back, away[1], *move(write, drive, False)]


def round_trip(write: Writer, drive: Drive, between: Callable[[], list[str]] = list) -> list[str]:
    """Away and back, with ``between`` in between."""
    if write.errs("hasty", 40):
        return _hasty_trips(write, drive)
    if drive.mid_sensor is not None and drive.kind != "bistable" and write.chance(35):
        return stop_midway(write, drive)
    if drive.kind == "spring" and write.chance(15):
        hold = f"pulse {drive.away_coil} {write.either('pulse', (1000, 1500), (250, 700))}"
        away = write.step(hold, f"until {drive.away_sensor}")
        return [away, write.step(f"until {drive.home_sensor}", within(write))]
    return [*move(write, drive, True), *between(), *move(write, drive, False)]


def pause(write: Writer) -> list[str]:
    """Something besides the cylinders: an output, a signal, a plain wait, a single round."""
    match write.pick("dwell", "output", "signal", "round"):
        case "output":
            output = f"K{len(write.outputs) + 1}"
            write.outputs.append(output)
            switching = write.pick(f"on {output}", f"pulse {output} {write.ms(5, 300)}")
            return [write.step(switching, f"dwell {write.ms(1, 400)}")]
        case "signal":
            signal = f"ready{len(write.signals) + 1}"
            write.signals.append(signal)
            wanted = write.pick(signal, f"not {signal}")
            dwell = f"dwell {write.ms(1, 50)}" if write.chance(20) else ""
            return [write.step(f"until {wanted}", dwell, within(write))]
        case "round":
            return [write.step("")]
    return [write.step(f"dwell {write.ms(1, 300)}")]


def _branch(write: Writer, drives: list[Drive]) -> list[str]:
    steps = pause(write) if write.chance(20) else []
    if len(drives) > 1 and write.chance(30):
        return steps + together(write, drives)
    for drive in drives:
        steps += round_trip(write, drive)
    return steps


def _block(write: Writer, drives: list[Drive]) -> list[str]:
    first, *others = write.shuffled(drives)
    if first.mid_sensor is not None and write.errs("passing", 80):
        passing = [_passing(write, first.mid_sensor)]
        return ["together {", *indent(round_trip(write, first)), "} and {", *indent(passing), "}"]
    match write.pick("trip", "trip", "nested", "together", "together", "repeat", "pause"):
        case "nested" if others:
            return round_trip(write, first, lambda: round_trip(write, others[0]))
        case "together" if others:
            return together(write, [first, *others])
        case "repeat":
            return [f"repeat {write.pick(2, 3)} {{", *indent(round_trip(write, first)), "}"]
        case "pause":
            return pause(write)
    return round_trip(write, first)


def together(write: Writer, drives: list[Drive]) -> list[str]:
    """Branches with cylinders of their own each; sometimes one more that waits for a step of the first."""
    cut = write.whole(1, len(drives) - 1)
    ones, twos = _branch(write, drives[:cut]), _branch(write, drives[cut:])
    lines = ["together {", *indent(ones), "} and {", *indent(twos)]
    if ones[0].startswith("step ") and write.chance(20):
        name = ones[0].split()[1]
        lines += ["} and {", *indent([write.step(f"until main.{name}"), write.step(f"until not main.{name}")])]
    return [*lines, "}"]


def _passing(write: Writer, sensor: str) -> str:
    """A step that waits for a piston to pass: it may miss it."""
    return write.step(f"until {sensor}", write.pick("", f"dwell {write.ms(1, 400)}", f"steady {write.ms(1, 40)}"))


@st.composite
def machine_texts(draw: DrawFn, faulty: bool | None = None, most_cylinders: int = 4) -> str:
    """A text with 1 to ``most_cylinders`` cylinders; ``faulty`` is drawn where it is None."""
    write = Writer(drawn(draw))
    if write.chance(50) if faulty is None else faulty:
        write.faults = write.some(FAULTS, 4)
    numbers = range(1, write.whole(1, most_cylinders) + 1)
    devices, drives = zip(*(new_drive(write, number) for number in numbers), strict=True)
    lines = [line for _ in range(write.whole(1, 3)) for line in _block(write, list(drives))]
    if write.chance(70):
        lines += round_trip(write, drives[0])
    every = ["    every step within 20 s"] if write.chance(20) else []
    signals = [
        f"signal {name} from outside{f' after {write.span(0, 200, 300)}' if write.chance(70) else ''}"
        for name in write.signals
    ]
    outputs = [f"output {name} {{ on {write.span(0, 10, 10)} off {write.span(0, 10, 10)} }}" for name in write.outputs]
    head = f"sequence main{' once' if write.chance(15) else ''} {{"
    parts = ['machine "Random station"', controller(write), *devices, *outputs, *signals]
    text = [*parts, head, *every, *indent(lines), "}"]
    return "\n".join(line for line in text if line) + "\n"


def machines(faulty: bool | None = None, most_cylinders: int = 4) -> SearchStrategy[Machine]:
    """The machines of such texts. A text that cannot be read is a fault of the strategy or of the reader."""

    def read(text: str) -> Machine:
        machine = read_machine(Source("random.steps", text))
        if not isinstance(machine, Machine):
            raise AssertionError("\n".join([*(str(problem) for problem in machine), text]))
        return machine

    return machine_texts(faulty, most_cylinders).map(read)
