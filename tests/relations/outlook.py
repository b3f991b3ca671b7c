"""What a report says, without where it says it: what two texts of the same machine have in common."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from seqcheck.language.source import Source
from seqcheck.machine.findings import Report, Severity
from seqcheck.pipeline import examine_source

#: How a report begins to say that it does not speak of all runs.
_SOME_RUNS = ("played on from what goes wrong", "not every run was played")

#: Kind, subject and step.
Key = tuple[str, str, str | None]


@dataclass(frozen=True, slots=True)
class Outlook:
    """``findings``: severity, whether certain, margin; all others in microseconds. ``of_all_runs``: nothing that the
    report says it was proved under leaves runs out."""

    findings: dict[Key, tuple[str, bool, int | None]]
    margins: dict[Key, int | None]
    durations: dict[str, tuple[int, int, int | None]]
    handovers: dict[tuple[str, str, str], tuple[int, int]]
    of_all_runs: bool

    def mapped(self, name: Callable[[str], str], time: Callable[[int], int]) -> Outlook:
        """With other names and times."""

        def key(one: Key) -> Key:
            return one[0], name(one[1]), None if one[2] is None else name(one[2])

        def maybe(one: int | None) -> int | None:
            return None if one is None else time(one)

        return Outlook(
            {key(one): (severity, certain, maybe(us)) for one, (severity, certain, us) in self.findings.items()},
            {key(one): maybe(us) for one, us in self.margins.items()},
            {name(one): (time(low), time(mid), maybe(high)) for one, (low, mid, high) in self.durations.items()},
            {
                (name(valve), name(end), name(start)): (time(gap), time(overlap))
                for (valve, end, start), (gap, overlap) in self.handovers.items()
            },
            self.of_all_runs,
        )

    def __or__(self, other: Outlook) -> Outlook:
        """Of two machines in one."""
        return Outlook(
            self.findings | other.findings,
            self.margins | other.margins,
            self.durations | other.durations,
            self.handovers | other.handovers,
            self.of_all_runs and other.of_all_runs,
        )

    @property
    def bounds(self) -> dict[str, tuple[int, int | None]]:
        """Least and greatest of cycles and steps."""
        return {name: (least, greatest) for name, (least, _, greatest) in self.durations.items()}

    @property
    def faulty(self) -> bool:
        return any(severity != Severity.NOTE.value for severity, _, _ in self.findings.values())


def examined(text: str) -> Report:
    return examine_source(Source("relation.steps", text))


def outlook(report: Report) -> Outlook:
    """Of several findings or margins of one kind, subject and step (an exit that asks a sensor twice) the tightest. The
    note on what is unused stands at the first of its list: that is a place, not a subject."""
    assert not report.problems, report.problems
    findings: dict[Key, tuple[str, bool, int | None]] = {}
    for one in sorted(report.findings, key=lambda one: _tightness(one.margin_us), reverse=True):
        subject = "" if one.kind == "unused" else one.subject
        findings[one.kind, subject, one.step] = (one.severity.value, one.certain, one.margin_us)
    margins: dict[Key, int | None] = {}
    for margin in sorted(report.margins, key=lambda one: _tightness(one.margin_us), reverse=True):
        margins[margin.kind, margin.subject, margin.step] = margin.margin_us
    return Outlook(
        findings,
        margins,
        {name: (one.least, one.typical, one.greatest) for name, one in (*report.cycles, *report.steps)},
        {
            (one.valve, one.from_coil, one.to_coil): (one.least_gap_us, one.greatest_overlap_us)
            for one in report.handovers
        },
        not any(one.startswith(_SOME_RUNS) for one in report.assumptions),
    )


def _tightness(margin_us: int | None) -> float:
    return float("-inf") if margin_us is None else margin_us
