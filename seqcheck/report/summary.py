"""The short account of one report: verdict, cycle times, tightest margin and handover, and what it was proved under.

What the text accepts is counted apart, and its margins are not the tightest.

Takes a plain ``Report``; gives lines of a page, few of them: a healthy machine's whole page is to stay under ten.
"""

from __future__ import annotations

from seqcheck.language.durations import format_duration
from seqcheck.machine.findings import Handover, Margin, Report, Severity
from seqcheck.report.amounts import counted, spelled_range
from seqcheck.report.layout import Line, Tone, labelled, paragraph

#: How the assumption begins that says that not every run was played.
_NOT_WHOLE = "not every run was played"


def title(report: Report) -> str:
    """``a.steps: Crate stapler``."""
    return f"{report.file}: {report.machine}" if report.machine else report.file


def opening_lines(report: Report) -> tuple[Line, ...]:
    """The title, with the verdict where all is well."""
    if report.verdict == "clean":
        return paragraph(f"{title(report)}: {verdict(report)}", hanging=4, tone=Tone.GOOD)
    return paragraph(title(report), hanging=4, tone=Tone.TITLE)


def summary_lines(report: Report) -> tuple[Line, ...]:
    """The verdict unless it opened the page, then what the report holds, then what it was proved under."""
    if report.problems:
        return labelled([("Verdict", verdict(report))], tone=Tone.ERROR)
    if report.verdict == "clean":
        return (*labelled(summary_rows(report)), *proved_under_lines(report))
    first, *rest = labelled([("Verdict", verdict(report)), *summary_rows(report)])
    return (Line(first.text, _tone(report)), *rest, *proved_under_lines(report))


def proved_under_lines(report: Report) -> tuple[Line, ...]:
    """Where the times came from and what was assumed, in one run of text."""
    times = f"times from {', '.join(report.sheets)}" if report.sheets else "times from the text alone"
    return paragraph(f"Proved under: {'; '.join((times, *report.assumptions))}", indent=2, hanging=2)


def is_whole(report: Report) -> bool:
    """Whether every run was played, or stands for others that were."""
    return not any(assumption.startswith(_NOT_WHOLE) for assumption in report.assumptions)


def verdict(report: Report) -> str:
    """The verdict in words, with the count of what was found."""
    if report.problems:
        return f"unreadable: {counted(len(report.problems), 'error')} in the input, so no timing was proved"
    accepted = len(report.findings) - len(report.counting)
    if report.verdict == "clean":
        if happening := sum(finding.happens for finding in report.findings):
            return f"clean but for {counted(happening, 'accepted finding')}"
        return "clean for all times in tolerance"
    counts = [
        counted(count, severity.value)
        for severity in Severity
        if (count := sum(finding.severity is severity for finding in report.counting))
    ]
    counts += [f"{accepted} accepted"] if accepted else []
    return f"findings: {', '.join(counts)}"


def accepted_margins(report: Report) -> frozenset[Margin]:
    """The margins behind findings that the text accepts."""
    accepted = {(one.kind, one.subject, one.step, one.place) for one in report.findings if one.accepted is not None}
    return frozenset(one for one in report.margins if (one.kind, one.subject, one.step, one.place) in accepted)


def tightest_margin(report: Report) -> Margin | None:
    """The tightest that has a limit and that the text does not accept."""
    accepted = accepted_margins(report)
    known = [margin for margin in report.margins if margin.margin_us is not None]
    counting = [margin for margin in known if margin not in accepted] if accepted else known
    return min(counting, key=lambda margin: margin.margin_us or 0, default=None)


def worst_handover(handovers: tuple[Handover, ...]) -> Handover:
    """The one with the greatest overlap or, without any, the least gap; refuses an empty tuple."""
    return min(handovers, key=lambda handover: (-handover.greatest_overlap_us, handover.least_gap_us))


def summary_rows(report: Report) -> list[tuple[str, str]]:
    """What the report holds, a label and a sentence each: cycle times, tightest margin, worst handover."""
    rows: list[tuple[str, str]] = []
    if report.cycles:
        rows.append(("Cycle", "; ".join(f"{name} {spelled_range(time)}" for name, time in report.cycles)))
    tightest = tightest_margin(report)
    if tightest is not None:
        rows.append(("Tightest", _spelled_margin(tightest)))
    if report.handovers:
        rows.append(("Handover", _spelled_handover(worst_handover(report.handovers))))
    return rows


def _tone(report: Report) -> Tone:
    if any(finding.severity is Severity.ERROR for finding in report.counting):
        return Tone.ERROR
    return Tone.WARNING


def _spelled_margin(margin: Margin) -> str:
    amount = margin.margin_us or 0
    words = f"broken by {format_duration(-amount)}" if amount < 0 else f"{format_duration(amount)} left"
    step = f" in {margin.step}" if margin.step and margin.step != margin.subject else ""
    return f"{words}: {margin.kind} of {margin.subject}{step}, line {margin.place.line}"


def _spelled_handover(handover: Handover) -> str:
    coils = f"{handover.valve} from {handover.from_coil} to {handover.to_coil}, line {handover.place.line}"
    if handover.greatest_overlap_us > 0:
        return f"coils overlap by up to {format_duration(handover.greatest_overlap_us)}: {coils}"
    return f"at least {format_duration(handover.least_gap_us)} between coils: {coils}"
