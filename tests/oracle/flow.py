"""What a random machine of the whole language does: blocks of steps that choose, jump, retry and wait."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

from tests.oracle.machines import Drive, command, round_trip, together, within
from tests.oracle.writer import Writer, indent, name_of


@dataclass(frozen=True, slots=True)
class Process:
    """A valve in a pipe: ``away`` and ``home`` coils (a spring's own doing where there is none), the signals that say
    that it is there, and the longest time it takes."""

    valve: str
    away: str
    home: str | None
    there: str
    back: str
    longest_us: int


@dataclass(frozen=True, slots=True)
class Stopped:
    """A cylinder with a stop valve, whose coil is ``lets``; ``home_coil`` is None where a spring brings it back."""

    cylinder: str
    out_coil: str
    home_coil: str | None
    lets: str
    home_sensor: str
    mid_sensor: str
    out_sensor: str


@dataclass(slots=True)
class Flow:
    """The devices there are, and what writes steps with them. ``meetings`` is what the main sequence does with another
    one."""

    write: Writer
    ideal: bool = False
    drives: list[Drive] = field(default_factory=list)
    processes: list[Process] = field(default_factory=list)
    stopped: list[Stopped] = field(default_factory=list)
    following: list[str] = field(default_factory=list)
    followers: dict[str, str] = field(default_factory=dict)
    flags: list[str] = field(default_factory=list)
    meetings: list[str] = field(default_factory=list)

    # --- names ---

    def follow(self, condition: str, drive: Drive | None = None) -> str:
        """A signal that follows a condition of the machine."""
        name = f"eye{len(self.following) + 1}"
        delays = f" on {self.write.span(0, 40, 40)} off {self.write.span(0, 30, 30)}" if self.write.chance(70) else ""
        self.following.append(f"signal {name} follows {condition}{delays}")
        if drive is not None:
            self.followers[drive.cylinder] = f"{name} {condition}"
        return name

    def signal(self, word: str = "part", but: str | None = None) -> str:
        """A signal from outside, sometimes one that is asked elsewhere too; not ``but``."""
        known = [name for name in self.write.signals if name != but]
        if known and self.write.chance(30):
            return self.write.pick(*known)
        name = f"{word}{len(self.write.signals) + 1}"
        self.write.signals.append(name)
        return name

    def flag(self) -> str:
        self.flags.append(f"mark{len(self.flags) + 1}")
        return self.flags[-1]

    def output(self) -> str:
        self.write.outputs.append(f"K{len(self.write.outputs) + 1}")
        return self.write.outputs[-1]

    # --- blocks ---

    def block(self, depth: int = 0) -> list[str]:
        """Some steps that leave everything as they have found it."""
        kinds: list[Callable[[], list[str]]] = [self.trip, self.alternatives, self.retry]
        kinds += [lambda: self.asked(depth), lambda: self.asked(depth), self.felt, self.felt_late]
        kinds += [self.row, lambda: self.turned_back(depth), self.by_flag]
        if self.processes:
            kinds += [self.pipe, self.pipe, self.gauged]
        if self.stopped:
            kinds += [self.halted, self.halted]
        if self.drives and self.write.chance(12):
            return ["together {", *indent(self.asked(1)), "} and {", *indent(self.idle()), "}"]
        return self.write.pick(*kinds)()

    def small(self, depth: int) -> list[str]:
        """What a branch does; nothing at times."""
        if depth < 1 and self.write.chance(30):
            return self.block(depth + 1)
        return self.write.pick(self.trip, self.idle, self.idle, list)()

    def idle(self) -> list[str]:
        """A step without cylinders; one round only where a round takes time."""
        what = self.write.pick("dwell", "output", "round")
        if what == "output":
            return [self.write.step(f"on {self.output()}", f"dwell {self.write.ms(20, 200)}")]
        if what == "round" and not self.ideal:
            return [self.write.step()]
        return [self.write.step(f"dwell {self.write.ms(1, 200)}")]

    def trip(self) -> list[str]:
        drive = self.write.pick(*self.drives)
        if drive.cylinder in self.followers and self.write.chance(60):
            return self.followed_trip(drive)
        if len(self.drives) > 1 and self.write.chance(15):
            return together(self.write, self.drives)
        return round_trip(self.write, drive)

    def followed_trip(self, drive: Drive) -> list[str]:
        """The way on which the cylinder comes to what its signal follows ends with that signal."""
        name, condition = self.followers[drive.cylinder].split()
        outward = drive.away_sensor.endswith("2")
        far = "extended" if outward else "retracted"
        exits = [drive.away_sensor, drive.home_sensor]
        if not condition.endswith("between"):
            exits[0 if condition.endswith(far) else 1] = name
        lines: list[str] = []
        for away, seen in zip((True, False), exits, strict=True):
            lines += [self.write.step(command(self.write, drive, away), f"until {seen}"), *self.rest(drive)]
        return lines

    def rest(self, drive: Drive) -> list[str]:
        return [self.write.step(f"dwell {self.write.ms(60, 200)}")] if drive.has_gap else []

    def away(self, drive: Drive, *exits: str) -> str:
        """A plain step that sends the cylinder away, with an exit of its own."""
        return self.write.step(self.plain(drive), *exits)

    def home(self, drive: Drive, *exits: str) -> list[str]:
        """The way back from wherever ``away`` has sent it."""
        exits = exits or (f"until {drive.home_sensor}", within(self.write))
        if drive.home_coil is None:
            return [self.write.step(f"reset {drive.away_coil}", *exits)]
        if drive.kind == "bistable":
            back = f"pulse {drive.home_coil} {self.write.ms(90, 180)}"
            return [*self.rest(drive), self.write.step(back, *exits), *self.rest(drive)]
        if drive.has_gap:
            off = self.write.step(f"reset {drive.away_coil}", f"dwell {self.write.ms(60, 200)}")
            return [off, self.write.step(f"on {drive.home_coil}", *exits), *self.rest(drive)]
        return [self.write.step(f"reset {drive.away_coil}  on {drive.home_coil}", *exits)]

    def plain(self, drive: Drive) -> str:
        """Sends the cylinder all the way, whatever step comes next."""
        if drive.kind == "bistable":
            return f"pulse {drive.away_coil} {self.write.ms(90, 180)}"
        return f"set {drive.away_coil}"

    def sent(self, drive: Drive, least: float, most: float) -> list[str]:
        """On its way for some time."""
        return [self.away(drive), self.write.step(f"dwell {self.write.ms(least, most)}")]

    def choose(self, *branches: tuple[str, list[str]], behind: str = "") -> list[str]:
        """``branches`` by ``when ..`` or ``otherwise``."""
        lines = ["choose {"]
        for word, steps in branches:
            lines += [f"    {word} {{", *indent(indent(steps)), "    }"]
        return [*lines, f"}} {behind}".rstrip()]

    def asked(self, depth: int) -> list[str]:
        """A choice on signals from outside."""
        write, one = self.write, self.signal()
        match write.pick("otherwise", "otherwise", "both", "standing", "three"):
            case "both":
                return self.choose((f"when {one}", self.small(depth)), (f"when not {one}", self.small(depth)))
            case "standing":
                two, target = self.signal("late", one), self.idle()
                behind = f"within {write.ms(50, 400)} else {name_of(target[0])}" if write.chance(60) else ""
                ways = (f"when {one}", self.small(depth)), (f"when {two}", self.small(depth))
                return [*self.choose(*ways, behind=behind), *target]
            case "three":
                two = self.signal("part", one)
                last = ("otherwise", self.small(depth))
                return self.choose((f"when {one} and {two}", self.idle()), (f"when {two}", self.small(depth)), last)
        return self.choose((f"when {one}", self.small(depth)), ("otherwise", self.small(depth)))

    def felt(self) -> list[str]:
        """A choice on a sensor or a signal that follows, some time after the cylinder was sent."""
        write = self.write
        drive = write.pick(*self.drives)
        sent = self.sent(drive, *((250, 700) if write.errs("late", 50) else (900, 1400)))
        late = [write.step(f"until {drive.away_sensor}")]
        good = self.idle() if write.chance(70) else []
        ways = [(f"when {drive.away_sensor}", good), ("otherwise", late)]
        if write.chance(30):
            ways = [(f"when not {drive.away_sensor}", late), (f"when {drive.away_sensor}", good)]
        return [*sent, *self.choose(*ways), *self.home(drive)]

    def felt_late(self) -> list[str]:
        """A choice that stands until one of two sensors comes: the order of them is known, or is not."""
        write = self.write
        drive = write.pick(*self.drives)
        others = [each for each in self.drives if each is not drive]
        sent = self.sent(drive, 1, 40)
        if others and write.chance(60):
            first = self.sent(others[0], 1, 40)
            both = write.step(f"until {drive.away_sensor} and {others[0].away_sensor}")
            ways = (f"when {drive.away_sensor}", self.idle()), (f"when {others[0].away_sensor}", list[str]())
            return [*sent, *first, *self.choose(*ways), both, *self.home(drive), *self.home(others[0])]
        near = drive.mid_sensor or drive.away_sensor
        gone = write.step(f"until {drive.away_sensor}")
        behind = f"within {write.either('late', (2000, 4000), (200, 600))} else {name_of(gone)}"
        ways = (f"when not {drive.home_sensor} and {near}", self.idle()), (f"when {drive.away_sensor}", list[str]())
        return [*sent, *self.choose(*ways, behind=write.pick("", behind)), gone, *self.home(drive)]

    def row(self) -> list[str]:
        """Several choices one after the other."""
        lines: list[str] = []
        for _ in range(self.write.pick(2, 3)):
            other = self.write.pick(self.idle, list)()
            lines += self.choose((f"when {self.signal()}", self.idle()), ("otherwise", other))
        return lines

    def by_flag(self) -> list[str]:
        """A flag that one choice sets and another asks."""
        flag, one = self.flag(), self.signal()
        write = self.write
        noted = [write.step(f"set {flag}", f"dwell {write.ms(20, 60)}")]
        plain = [write.step(f"reset {flag}", f"dwell {write.ms(20, 60)}")]
        first = self.choose((f"when {one}", noted), ("otherwise", plain))
        between = self.idle() if write.chance(50) else []
        return [*first, *between, *self.choose((f"when {flag}", self.small(1)), ("otherwise", self.small(1)))]

    def turned_back(self, depth: int) -> list[str]:
        """A jump back to do it all again, as long as someone outside asks for it; in a loop at times."""
        write = self.write
        again = self.idle()
        inner = self.trip() if depth < 1 else []
        ways = self.choose((f"when {self.signal('again')}", [f"jump {name_of(again[0])}"]), ("otherwise", []))
        lines = [*again, *inner, *ways]
        return ["repeat 2 {", *indent(lines), "}"] if write.chance(25) else lines

    def alternatives(self) -> list[str]:
        """Exits with ``or`` and ``not``."""
        write = self.write
        drive = write.pick(*self.drives)
        one = self.signal("push")
        match write.pick("two", "end", "sides", "steady"):
            case "two":
                return [write.step(f"until {one} or {self.signal('push', one)}", within(write))]
            case "end":
                shut = f"{drive.away_sensor} or ({one} and not {drive.home_sensor} and {drive.away_sensor})"
                return [self.away(drive, f"until {shut}"), *self.home(drive)]
            case "sides":
                sent = self.sent(drive, 1, 60)
                past = write.step(f"until not {drive.home_sensor} and ({drive.away_sensor} or {one})")
                return [*sent, past, write.step(f"until {drive.away_sensor}"), *self.home(drive)]
        held = f"until {drive.away_sensor} or {drive.away_coil}  steady {write.ms(1, 60)}"
        return [self.away(drive, held), write.step(f"until {drive.away_sensor}"), *self.home(drive)]

    def retry(self) -> list[str]:
        """A step with a way out: on to what is done anyway, or back to try again."""
        write = self.write
        drive = write.pick(*self.drives)
        if write.chance(40):
            again = self.idle()
            span = write.ms(100, 500)
            return [*again, write.step(f"until {self.signal('ready')}", f"within {span} else {name_of(again[0])}")]
        back = self.home(drive)
        limit = f"within {write.either('retry', (1500, 2500), (230, 700))} else {name_of(back[-1])}"
        return [self.away(drive, f"until {drive.away_sensor}", limit), *back]

    def pipe(self) -> list[str]:
        """Open and close a valve in a pipe; cut short, or asked too early, with the fault."""
        write = self.write
        valve = write.pick(*self.processes)
        on = "on" if valve.home is not None else "set"
        least = valve.longest_us / 1000
        dwell = f"dwell {write.either('short', (least + 60, least + 400), (least / 3, least))}"
        opened = write.step(f"{on} {valve.away}", write.pick(f"until {valve.there}", dwell))
        between = self.idle() if write.chance(50) else []
        if valve.home is None:
            return [opened, *between, write.step(f"reset {valve.away}", f"until {valve.back}")]
        return [opened, *between, write.step(f"on {valve.home}", write.pick(f"until {valve.back}", dwell))]

    def gauged(self) -> list[str]:
        """A choice on whether a valve in a pipe is there yet."""
        write = self.write
        valve = write.pick(*self.processes)
        least = valve.longest_us / 1000 + 100
        time = write.either("late", (least, least + 300), (least / 4, least))
        opened = write.step(f"{'on' if valve.home else 'set'} {valve.away}", f"dwell {time}")
        late = [write.step(f"on {valve.away}", f"until {valve.there}")]
        ways = self.choose((f"when {valve.there}", self.idle()), ("otherwise", late))
        shut = f"on {valve.home}" if valve.home else f"reset {valve.away}"
        return [opened, *ways, write.step(shut, f"until {valve.back}")]

    def halted(self) -> list[str]:
        """A cylinder with a stop valve: straight on, or with a stop on the way out."""
        write = self.write
        arm = write.pick(*self.stopped)
        out = f"set {arm.out_coil}" + (f"  reset {arm.home_coil}" if arm.home_coil else "")
        back = f"reset {arm.out_coil}" + (f"  set {arm.home_coil}" if arm.home_coil else "")
        lines = [write.step(out, f"set {arm.lets}", f"until {arm.mid_sensor if write.chance(50) else arm.out_sensor}")]
        if arm.mid_sensor in lines[0]:
            lines += [write.step(f"reset {arm.lets}", f"dwell {write.ms(60, 200)}")]
            lines += [write.step(f"set {arm.lets}", f"until {arm.out_sensor}")]
        lines.append(write.step(back, f"until {arm.home_sensor}"))
        return [*lines, write.step(f"reset {arm.lets}", f"dwell {write.ms(60, 120)}")]
