"""The page of ``compare``: for each text what is worse, then everything else that a change did.

Takes comparisons and the encoding of what the page is written to; gives lines of an 80-column page.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from rich.cells import cell_len

from seqcheck.compare.differences import (
    Change,
    Difference,
    DurationChange,
    FileComparison,
    FindingChange,
    MarginChange,
    Part,
    growth,
)
from seqcheck.compare.spelling import spelled_span
from seqcheck.language.durations import format_duration
from seqcheck.machine.findings import Duration, Finding
from seqcheck.machine.time import Span
from seqcheck.report.amounts import MAYBE_WIDE, OPEN, counted
from seqcheck.report.findings import headline
from seqcheck.report.layout import BLANK, Line, Tone, labelled, page, paragraph
from seqcheck.report.plain import plain_record
from seqcheck.report.problems import problem_lines

#: A longer section ends with the count of what is left out; the JSON form has everything.
LONGEST_SECTION = 20
_LONGEST_LABEL = 32

_SECTIONS = (
    ("Devices", Part.DEVICE),
    ("Times given", Part.TIME),
    ("Steps", Part.STEP),
    ("Rules", Part.RULE),
)


def render_comparison(files: Sequence[FileComparison]) -> str:
    """The whole page as one text, without any colour."""
    return page(comparison_lines(files))


def comparison_lines(files: Sequence[FileComparison], encoding: str = "utf-8") -> tuple[Line, ...]:
    """Every text in which something differs; of several texts, those without any difference are only counted."""
    shown = [file for file in files if len(files) == 1 or file.verdict != "same"]
    lines: list[Line] = []
    for number, file in enumerate(shown):
        lines.extend((BLANK,) if number else ())
        lines.extend(_file_lines(plain_record(file, encoding), encoding))
    if len(files) > 1:
        lines.extend((*((BLANK,) if lines else ()), *paragraph(_total(files), tone=Tone.TITLE)))
    return tuple(lines)


def spelled_growth(duration: DurationChange) -> str:
    """``12 ms slower at most, 3 ms quicker at least``; a new or gone one says so."""
    old, new = duration.old, duration.new
    if old is None or new is None:
        return "gone" if new is None else "new"
    words = [_grown(old.greatest, new.greatest, "at most"), _grown(old.least, new.least, "at least")]
    said = [word for word in words if word]
    return ", ".join(said) or _grown(old.typical, new.typical, "typically")


def spelled_margin(margin: MarginChange) -> str:
    """``margin of tight-watchdog in main.raise 40 ms down to 6 ms``."""
    about = f"margin of {_about(margin)}"
    if margin.difference is Difference.NEW:
        return f"{about} is new: {_amount(margin.new_us)}"
    if margin.difference is Difference.GONE:
        return f"{about} is gone: it was {_amount(margin.old_us)}"
    way = "down" if margin.shrank else "up"
    return f"{about} {_amount(margin.old_us)} {way} to {_amount(margin.new_us)}"


def _file_lines(file: FileComparison, encoding: str) -> tuple[Line, ...]:
    lines = [*_opening(file)]
    for problem in file.problems:
        lines.extend((BLANK, *problem_lines(problem, encoding)))
    worse = [_spelled(one) for one in file.worse]
    lines += _section("Worse", worse, Tone.ERROR)
    lines += _section("Findings", [_spelled_finding(one) for one in file.findings if not one.worse])
    lines += _durations("Cycle times", [one for one in file.cycles if not one.worse])
    lines += _durations("Cycle times by choice", file.choices)
    lines += _section("Margins", _margin_rows([one for one in file.margins if not one.worse]))
    lines += _durations("Step times", file.steps)
    for title, part in _SECTIONS:
        lines += _section(title, [_spelled_change(one) for one in file.changes if one.part is part])
    for words in file.left_out:
        lines.extend((BLANK, *paragraph(f"Left out: {words}", indent=2, hanging=2)))
    return tuple(lines)


def _opening(file: FileComparison) -> tuple[Line, ...]:
    name = file.old if file.new is None else file.new
    machine = f": {file.machine}" if file.machine else ""
    tones = {"unreadable": Tone.ERROR, "worse": Tone.ERROR, "same": Tone.GOOD}
    title = paragraph(f"{name}{machine}: {_verdict(file)}", hanging=4, tone=tones.get(file.verdict, Tone.TITLE))
    if file.old is None or file.new is None:
        return title
    stored = "the stored report of " if file.stored else ""
    return (*title, *paragraph(f"Against {stored}{file.old}", indent=2, hanging=2))


def _verdict(file: FileComparison) -> str:
    if file.verdict == "unreadable":
        return "not compared: one of the two sides could not be examined"
    if file.old is None or file.new is None:
        there = "a new text" if file.old is None else "this text is gone"
        return f"{there}, worse: {_counts(file)}" if file.verdict == "worse" else there
    if file.verdict == "worse":
        return f"worse: {_counts(file)}"
    if file.verdict == "changed":
        return "changed, nothing worse"
    return "no difference" + (" in findings, margins and times" if file.stored else "")


def _counts(file: FileComparison) -> str:
    findings = sum(one.worse for one in file.findings)
    margins = sum(one.worse for one in file.margins)
    cycles = sum(one.worse for one in file.cycles)
    said = (
        (findings, f"{counted(findings, 'new finding')}"),
        (cycles, f"{counted(cycles, 'cycle')} slower"),
        (margins, f"{counted(margins, 'margin')} smaller"),
    )
    return ", ".join(words for count, words in said if count)


def _section(title: str, rows: Sequence[str], tone: Tone = Tone.PLAIN) -> list[Line]:
    if not rows:
        return []
    lines = [BLANK, Line(f"  {title}", Tone.TITLE if tone is Tone.PLAIN else tone)]
    for row in rows[:LONGEST_SECTION]:
        lines += paragraph(row, indent=4, hanging=4, tone=tone)
    return [*lines, *_left_out(len(rows))]


def _durations(title: str, durations: Sequence[DurationChange]) -> list[Line]:
    if not durations:
        return []
    rows = [(one.name, f"{spelled_growth(one)}: {_before_and_after(one)}") for one in durations[:LONGEST_SECTION]]
    if max(cell_len(name) for name, _ in rows) > _LONGEST_LABEL:
        lines = tuple(line for row in rows for line in paragraph("  ".join(row), indent=4, hanging=4))
    else:
        lines = labelled(rows, indent=4)
    return [BLANK, Line(f"  {title}", Tone.TITLE), *lines, *_left_out(len(durations))]


def _left_out(count: int) -> tuple[Line, ...]:
    return (Line(f"    {count - LONGEST_SECTION} more left out here"),) if count > LONGEST_SECTION else ()


def _margin_rows(margins: Sequence[MarginChange]) -> list[str]:
    """Those that changed one by one; new ones and those that are gone only by count and the tightest of them."""
    rows = [spelled_margin(one) for one in margins if one.difference is Difference.CHANGED]
    for difference, words in ((Difference.NEW, "new"), (Difference.GONE, "gone")):
        alike = [one for one in margins if one.difference is difference]
        if len(alike) == 1:
            rows.append(spelled_margin(alike[0]))
        elif alike:
            tightest = min(alike, key=_tightness)
            amount = _amount(tightest.new_us if difference is Difference.NEW else tightest.old_us)
            rows.append(f"{len(alike)} margins are {words}; the tightest of them is {amount}: {_about(tightest)}")
    return rows


def _about(margin: MarginChange) -> str:
    subject = "" if margin.subject == margin.step else f" of {margin.subject}"
    return f"{margin.kind}{subject}{f' in {margin.step}' if margin.step else ''}"


def _tightness(margin: MarginChange) -> tuple[bool, int]:
    amount = margin.new_us if margin.difference is Difference.NEW else margin.old_us
    return amount is not None, amount or 0


def _spelled(one: FindingChange | MarginChange | DurationChange) -> str:
    match one:
        case FindingChange():
            return _spelled_finding(one)
        case MarginChange():
            return spelled_margin(one)
        case DurationChange():
            return f"cycle of {one.name} {spelled_growth(one)}: {_before_and_after(one)}"


def _spelled_finding(change: FindingChange) -> str:
    finding, before = change.finding, change.before
    if before is None:
        return f"{change.difference.value}: {headline(finding)}: {finding.message}"
    was, now = _state(before), _state(finding)
    moved = "; ".join(f"{after}, was {old}" for old, after in zip(was, now, strict=True) if old != after)
    return f"changed: {headline(finding)}: {moved}"


def _state(finding: Finding) -> tuple[str, ...]:
    sureness = "certain" if finding.certain else "possible"
    accepted = "not accepted" if finding.accepted is None else f"accepted ({finding.accepted})"
    return finding.severity.value, sureness, _amount(finding.margin_us), accepted


def _spelled_change(change: Change) -> str:
    if change.difference is not Difference.CHANGED:
        where = f", {change.new}" if change.new else ""
        return f"{change.name} is {change.difference.value}{where}"
    return f"{change.name}: {change.aspect} {change.new}, was {change.old}"


def _grown(old: int | None, new: int | None, where: str) -> str:
    if old == new:
        return ""
    if old is None or new is None:
        return f"{OPEN} {where}" if new is None else f"no longer {OPEN} {where}"
    way = "slower" if growth(old, new) > 0 else "quicker"
    return f"{format_duration(abs(new - old))} {way} {where}"


def _before_and_after(duration: DurationChange) -> str:
    if duration.old is None or duration.new is None:
        return _range(duration.new or duration.old)
    return f"{_range(duration.new)}, was {_range(duration.old)}"


def _range(duration: Duration | None) -> str:
    if duration is None:
        return ""
    mark = "" if duration.exact else MAYBE_WIDE
    if duration.greatest is None:
        return f"{format_duration(duration.least)} to {OPEN}{mark}"
    return f"{spelled_span(Span.between(duration.least, duration.greatest))}{mark}"


def _amount(margin_us: int | None) -> str:
    if margin_us is None:
        return OPEN
    return f"broken by {format_duration(-margin_us)}" if margin_us < 0 else format_duration(margin_us)


def _total(files: Iterable[FileComparison]) -> str:
    verdicts = [file.verdict for file in files]
    words = {"unreadable": "not compared", "worse": "worse", "changed": "changed", "same": "without a difference"}
    parts = [f"{verdicts.count(verdict)} {word}" for verdict, word in words.items() if verdict in verdicts]
    return f"{counted(len(verdicts), 'text')}: {', '.join(parts)}"
