"""Which findings leave the other figures of a report good for all runs, and which only for runs without them."""

from __future__ import annotations

from pathlib import Path

import pytest

from seqcheck.pipeline import examine
from seqcheck.report.layout import page
from seqcheck.report.tables import margins_lines, times_lines

CASES = Path(__file__).parents[1] / "cases"
FAULTY = Path(__file__).parents[2] / "examples" / "faulty"

#: Both ways are played, or what is found changes nothing in how the machine goes on.
HOLD = (
    (CASES / "choose_sensor_race.steps", "choice-race"),
    (CASES / "never_for.steps", "broken-never"),
    (CASES / "limit_way.steps", "over-limit"),
    (FAULTY / "early_dwell.steps", "early-dwell"),
    (CASES / "handover_two_writes.steps", "coil-handover"),
    (CASES / "else_expires.steps", "tight-watchdog"),
    # Every run is cut so, the played one as well.
    (CASES / "cut_in_every_run.steps", "cut-stroke"),
    (FAULTY / "opposed_coils.steps", "opposed-coils"),
    (FAULTY / "no_watchdog.steps", "no-watchdog"),
)

#: Runs with it go on otherwise than those that are played, or no further.
DIVERT = (
    (FAULTY / "short_pulse.steps", "short-pulse"),
    (FAULTY / "cut_stroke.steps", "cut-stroke"),
    (FAULTY / "stale_signal.steps", "stale-signal"),
    (FAULTY / "missed_signal.steps", "missed-signal"),
    (FAULTY / "command_race.steps", "command-race"),
    (FAULTY / "overshoot.steps", "overshoot"),
    (FAULTY / "tight_watchdog.steps", "tight-watchdog"),
    # No run gets past it, and the play goes on all the same.
    (CASES / "watchdog_always.steps", "tight-watchdog"),
    (FAULTY / "dead_end.steps", "dead-end"),
    (CASES / "chase_in_one_branch.steps", "endless-loop"),
)


@pytest.mark.parametrize(("file", "kind"), HOLD, ids=lambda one: getattr(one, "stem", one))
def test_the_figures_hold_all_the_same(file: Path, kind: str) -> None:
    report = examine(str(file))
    found = [one for one in report.findings if one.kind == kind]
    assert found and not any(one.diverts for one in found)
    if not any(one.diverts for one in report.findings):
        assert "figures hold only" not in page(times_lines(report)) + page(margins_lines(report))


@pytest.mark.parametrize(("file", "kind"), DIVERT, ids=lambda one: getattr(one, "stem", one))
def test_the_figures_hold_only_without_it(file: Path, kind: str) -> None:
    report = examine(str(file))
    found = [one for one in report.findings if one.kind == kind]
    assert found and all(one.diverts for one in found)
    for shown in (page(times_lines(report)), page(margins_lines(report))):
        assert "the figures hold only for runs without them" in " ".join(shown.split())
