"""Reports made by hand for the tests of the report layer; the times are those of no real machine."""

from __future__ import annotations

from seqcheck.machine.findings import (
    Duration,
    Finding,
    Handover,
    Margin,
    Moment,
    PathPart,
    Problem,
    Report,
    Severity,
)
from seqcheck.machine.places import Place

FILE = "stapler.steps"
SHEETS = ("stapler.times.yaml", "measured.yaml")
ASSUMPTIONS = (
    "speeds even along the stroke",
    "no faulty part",
    "start: cylinders retracted, valves at rest",
    "start comes at any time after it is awaited",
)


def place(line: int, column: int = 1, file: str = FILE) -> Place:
    return Place(file, line, column, line, column + 1)


def short_pulse(**changes: object) -> Finding:
    """An error that is possible, replayed, with a run that goes on otherwise than others."""
    values: dict[str, object] = {
        "kind": "short-pulse",
        "severity": Severity.ERROR,
        "certain": False,
        "subject": "V3",
        "step": "main.tap",
        "place": place(25, 20),
        "message": "Y4 can go off before V3 has reached a, so that V3 stays at b",
        "margin_us": -3000,
        "replayed": True,
        "run": (
            Moment(0, "step main.tap entered"),
            Moment(12500, "Y4 energized"),
            Moment(80000, "Y4 off while V3 is still shifting"),
        ),
        "mend": "let the pulse of Y4 last at least 63 ms",
        "diverts": True,
    }
    return Finding(**(values | changes))  # type: ignore[arg-type]


def no_watchdog() -> Finding:
    """A note, as a healthy machine may have one."""
    return Finding(
        kind="no-watchdog",
        severity=Severity.NOTE,
        certain=True,
        subject="main",
        step=None,
        place=place(18, 1),
        message="2 steps wait for a sensor without a watchdog: main.raise, main.tap",
        margin_us=None,
        replayed=None,
        run=(),
        mend="write every step within 10 s",
    )


def healthy(*findings: Finding) -> Report:
    return Report(
        file=FILE,
        machine="Crate stapler",
        findings=findings,
        sheets=SHEETS,
        assumptions=ASSUMPTIONS,
        cycles=(("main", Duration(1_905_000, 2_139_500, 2_374_000)),),
        steps=(
            ("main.clamp+", Duration(408_500, 457_750, 507_000)),
            ("main.ready", Duration(0, 0, None)),
        ),
        critical_path=(
            PathPart("step main.clamp+ entered", 0, 0, 0),
            PathPart("Y1 energized", 13_000, 8_500, 13_000),
            PathPart("clamp extended", 491_000, 398_000, 478_000),
        ),
        handovers=(
            Handover("V2", "Y2", "Y3", place(19), -500, 500),
            Handover("V3", "Y4", "Y5", place(25), 40_000, 0),
        ),
        margins=(
            Margin("tight-watchdog", "main.raise", "main.raise", place(20), 1_241_000),
            Margin("short-pulse", "V3", "main.tap", place(25), 32_000),
            Margin("tight-watchdog", "main.ready", "main.ready", place(18), None),
        ),
    )


def unknown_valve(source: str | None = "cylinder lift on V9 { }", column: int = 18) -> Problem:
    return Problem(place(3, column), "there is no valve V9", source, "did you mean V1?")


def unreadable(*problems: Problem) -> Report:
    return Report(file=FILE, machine=None, problems=problems or (unknown_valve(),))
