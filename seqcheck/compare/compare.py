"""From the names of something old and something new to what the change did.

Takes two texts, two folders, or a stored report as the old side; gives a comparison for each text. What cannot be read
is a problem of the text that it belongs to, the others are compared all the same.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from pathlib import Path, PurePosixPath

from seqcheck.compare.differences import Change, FileComparison
from seqcheck.compare.meaning import machine_changes
from seqcheck.compare.names import matched
from seqcheck.compare.results import (
    Bar,
    choice_changes,
    cycle_changes,
    finding_changes,
    margin_changes,
    step_changes,
    under_new_names,
    with_other_choices,
)
from seqcheck.compare.stored import is_stored, stored_reports
from seqcheck.language.folders import sequences_named
from seqcheck.language.read import read_machine
from seqcheck.language.source import Source, decode, read_source
from seqcheck.machine.findings import Problem, Report
from seqcheck.machine.model import Machine
from seqcheck.machine.places import Place
from seqcheck.machine.records import record
from seqcheck.pipeline import examine_source

#: Examines many texts; their reports come in the order of the names.
ExamineAll = Callable[[Sequence[str]], Sequence[Report]]

#: The most bytes of a stored report: it may hold thousands of texts.
GREATEST_STORED = 128 * 1024 * 1024
#: So many names of stored reports a message shows.
_MOST_NAMED = 5
STORED_HOLDS = (
    "the old side is a stored report, which holds neither devices nor the texts of steps: only findings, margins and"
    " times are compared"
)


@record
class Side:
    """One text, examined; ``machine`` is None where only a stored report is left of it, or it could not be read."""

    name: str
    report: Report
    machine: Machine | None


@record
class Examining:
    """How both sides are examined: the timing sheets laid over them, and the reserve asked of every margin.
    ``examine_all`` does the same for many texts."""

    sheets: Sequence[str]
    reserve_us: int
    examine_all: ExamineAll


#: Old and new; None where there was no such text, or is none any more.
Pair = tuple[Side | None, Side | None]


def compare(old: str, new: str, examining: Examining, bar: Bar) -> tuple[FileComparison, ...]:
    """``old`` and ``new`` are two texts or two folders; ``old`` may be a stored report, and ``-`` is standard input."""
    pair = _folders if Path(old).is_dir() or Path(new).is_dir() else _files
    found = pair(old, new, examining)
    if isinstance(found, Problem):
        return (FileComparison(old, new, None, (found,), compared=False),)
    return tuple(compare_sides(before, after, bar) for before, after in found)


def compare_sides(old: Side | None, new: Side | None, bar: Bar) -> FileComparison:
    names = (None if old is None else old.name, None if new is None else new.name)
    machine = new.report.machine if new is not None else old.report.machine if old is not None else None
    problems = tuple(problem for side in (old, new) if side is not None for problem in side.report.problems)
    changes: tuple[Change, ...] = ()
    renamed: Mapping[str, str] = {}
    if old is not None and new is not None and old.machine is not None and new.machine is not None:
        changes, renamed = machine_changes(old.machine, new.machine)
    sheets = tuple(sheet for side in (old, new) if side is not None for sheet in _sheets(side))
    if problems:
        return FileComparison(*names, machine, problems, compared=False, changes=changes, sheets=sheets)
    before = Report("", None) if old is None else under_new_names(old.report, renamed)
    after = Report("", None) if new is None else new.report
    both = old is not None and new is not None
    return FileComparison(
        *names,
        machine,
        findings=finding_changes(before, after, bar),
        margins=margin_changes(before, after, bar) if both else (),
        cycles=cycle_changes(before, after, bar) if both else (),
        choices=choice_changes(before, after) if both else (),
        steps=step_changes(before, after) if both else (),
        changes=changes,
        left_out=tuple(_left_out(old, before, after)),
        sheets=sheets,
        stored=old is not None and old.machine is None,
    )


def _left_out(old: Side | None, before: Report, after: Report) -> Iterator[str]:
    """``before`` has its steps named as they are now."""
    if old is not None and old.machine is None:
        yield STORED_HOLDS
    for name in with_other_choices(before, after):
        yield f"the choices of {name} have more branches or fewer, so its cycle times by choice are not compared"


def _sheets(side: Side) -> Iterator[str]:
    """Those of the text lie beside it, those of the command line where it says."""
    for sheet in side.report.sheets:
        yield from (sheet, str(Path(side.name).parent / sheet))


def _files(old: str, new: str, examining: Examining) -> Iterable[Pair] | Problem:
    before, after = _old_source(old), read_source(new)
    if isinstance(after, Source) and is_stored(after):
        return _refused(new, "this is a stored report, and only the old side may be one", "name a sequence text here")
    if isinstance(before, Problem) or not is_stored(before):
        return ((_text_side(old, before, examining), _text_side(new, after, examining)),)
    reports = stored_reports(before)
    if isinstance(reports, Problem):
        return reports
    chosen = 0 if len(reports) == 1 else matched([new], [Path(new).name], [one.file for one in reports])[0]
    if chosen is None:
        held = f"it holds {', '.join(one.file for one in reports[:_MOST_NAMED])}" if reports else "it is empty"
        return _refused(old, f"the stored report holds nothing of {new}", f"{held}{_more(len(reports))}")
    return ((_stored_side(reports[chosen]), _text_side(new, after, examining)),)


def _folders(old: str, new: str, examining: Examining) -> Iterable[Pair] | Problem:
    if not Path(new).is_dir():
        return _refused(old, "the old side is a folder, the new one is not", "name two texts or two folders")
    after = _texts_below(new)
    if isinstance(after, Problem):
        return after
    if Path(old).is_dir():
        before = _texts_below(old)
        return before if isinstance(before, Problem) else _pairs(before, after, examining)
    source = _old_source(old)
    if isinstance(source, Problem):
        return source
    if not is_stored(source):
        return _refused(old, "the old side is a text, the new one is a folder", "name two texts or two folders")
    reports = stored_reports(source)
    return reports if isinstance(reports, Problem) else _stored_pairs(reports, after, examining)


def _texts_below(folder: str) -> dict[str, str] | Problem:
    """The names of the texts by their names below the folder."""
    found: dict[str, str] = {}
    for name in sequences_named([folder]):
        if isinstance(name, Problem):
            return name
        found[Path(name).relative_to(folder).as_posix()] = name
    return found


def _pairs(before: Mapping[str, str], after: Mapping[str, str], examining: Examining) -> Iterator[Pair]:
    sides = _examined([*before.values(), *after.values()], examining)
    for relative in sorted({*before, *after}, key=lambda name: PurePosixPath(name).parts):
        yield _side(sides, before.get(relative)), _side(sides, after.get(relative))


def _stored_pairs(reports: Sequence[Report], after: Mapping[str, str], examining: Examining) -> Iterator[Pair]:
    """In the order of the folder; what it no longer has comes last."""
    sides = _examined(list(after.values()), examining)
    chosen = matched(list(after.values()), list(after), [one.file for one in reports])
    for name, number in zip(after.values(), chosen, strict=True):
        yield None if number is None else _stored_side(reports[number]), sides[name]
    for number, report in enumerate(reports):
        if number not in chosen:
            yield _stored_side(report), None


def _examined(names: Sequence[str], examining: Examining) -> dict[str, Side]:
    every = list(dict.fromkeys(names))
    return {
        name: Side(name, report, _machine(read_source(name), examining.sheets))
        for name, report in zip(every, examining.examine_all(every), strict=True)
    }


def _side(sides: Mapping[str, Side], name: str | None) -> Side | None:
    return None if name is None else sides[name]


def _old_source(name: str) -> Source | Problem:
    return read_source(name, GREATEST_STORED) if name.lower().endswith(".json") else read_source(name)


def _text_side(name: str, source: Source | Problem, examining: Examining) -> Side:
    # What goes by the name of a stored report may be larger than a text.
    judged = decode(name, source.text.encode()) if isinstance(source, Source) else source
    if isinstance(judged, Problem):
        return Side(name, Report(name, None, problems=(judged,)), None)
    report = examine_source(judged, examining.sheets, examining.reserve_us)
    return Side(name, report, _machine(judged, examining.sheets))


def _machine(source: Source | Problem, sheets: Sequence[str]) -> Machine | None:
    machine = None if isinstance(source, Problem) else read_machine(source, sheets)
    return machine if isinstance(machine, Machine) else None


def _stored_side(report: Report) -> Side:
    return Side(report.file, report, None)


def _more(count: int) -> str:
    return f" and {count - _MOST_NAMED} more" if count > _MOST_NAMED else ""


def _refused(name: str, message: str, advice: str) -> Problem:
    return Problem(Place(name, 1, 1, 1, 1), message, None, advice)
