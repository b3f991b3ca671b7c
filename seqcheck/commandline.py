"""The command ``seqcheck``: reads its arguments, has the files examined, writes the report, gives an exit status.

Exit status 0: nothing at or above ``--fail-on``; 1: something; 2: an input or an option could not be read, or the
report not be written. Faults of the input are part of the report. Modules that take long to load are imported once
they are needed.
"""

from __future__ import annotations

import argparse
import contextlib
import difflib
import sys
from collections.abc import Iterable, Iterator, Sequence
from functools import partial
from pathlib import Path

from seqcheck.arguments import NEVER, STANDARD, WRONG_ARGUMENTS, read_arguments
from seqcheck.compare.differences import FileComparison
from seqcheck.language.folders import sequences_named
from seqcheck.machine.findings import Finding, Report, Severity
from seqcheck.report.delivery import complain, finish, provide_streams, save, send, show
from seqcheck.report.destinations import Destination, destinations
from seqcheck.report.formats import COMPARISON_FORMATS, FOR_PEOPLE, FORMATS, Counts
from seqcheck.report.progress import working_on, working_through
from seqcheck.report.terminal import encoding_of

FINE = 0
FOUND = 1
UNREADABLE = WRONG_ARGUMENTS
INTERRUPTED = 130


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command with these arguments (those of the process if None) and give its exit status."""
    provide_streams()
    try:
        return _run(arguments)
    except KeyboardInterrupt:
        return INTERRUPTED
    except Exception as fault:
        if sys.flags.dev_mode:
            raise
        return _ended(UNREADABLE, f"this is a fault of seqcheck, not of your text: {_about(fault)}")


def exit_status(reports: Sequence[Report], fail_on: Sequence[str]) -> int:
    """``UNREADABLE`` if any file was; else ``FOUND`` if anything found counts for ``fail_on``."""
    if any(report.verdict == "unreadable" for report in reports):
        return UNREADABLE
    return FOUND if any(failing(finding, fail_on) for report in reports for finding in report.findings) else FINE


def failing(finding: Finding, fail_on: Sequence[str]) -> bool:
    """Whether a finding counts: not accepted, and as severe as one of ``fail_on`` or more, or of a kind in it."""
    ranks = [severity.value for severity in Severity]
    as_severe = ranks[ranks.index(finding.severity.value) :]
    return finding.accepted is None and not {finding.kind, *as_severe}.isdisjoint(fail_on)


def _run(arguments: Sequence[str] | None) -> int:
    try:
        options = read_arguments(arguments)
    except SystemExit as stop:
        # Help, version and complaints of argparse; what they printed may still wait in the stream.
        finish()
        return stop.code if isinstance(stop.code, int) else UNREADABLE
    commands = {"check": _check, "compare": _compare, "explain": _explain}
    return commands.get(options.command, _page)(options)


def _check(options: argparse.Namespace) -> int:
    fail_on: Sequence[str] = options.fail_on or (Severity.ERROR.value,)
    wanted = destinations(options.choices)
    named = sequences_named(options.files)
    texts = [name for name in named if isinstance(name, str)]
    refusal = wanted if isinstance(wanted, str) else _refused(options.files, (*texts, *options.times), wanted)
    refusal = refusal or _no_kind(fail_on)
    if refusal or isinstance(wanted, str):
        return _ended(UNREADABLE, refusal)
    examined = iter(_all_examined(texts, options))
    reports = [
        next(examined) if isinstance(one, str) else Report(one.place.file, None, problems=(one,)) for one in named
    ]
    status = exit_status(reports, fail_on)
    files = [one if isinstance(one, str) else one.place.file for one in named]
    for destination in wanted:
        status = _ended(status, _delivered(destination, files, reports, partial(failing, fail_on=fail_on)))
    return status


def _delivered(destination: Destination, files: Sequence[str], reports: Sequence[Report], counts: Counts) -> str | None:
    """``files``: the names of the texts, one for each report. What went wrong comes back, if anything did."""
    output = destination.output
    if output:
        overwriting = _overwriting(output, _read_for(files, reports))
        return overwriting or save(FORMATS[destination.form](reports, counts), output)
    if destination.form == FOR_PEOPLE:
        from seqcheck.report.text import text_lines

        return show(text_lines(reports, encoding_of(sys.stdout)))
    return send(FORMATS[destination.form](reports, counts))


def _compare(options: argparse.Namespace) -> int:
    fail_on: Sequence[str] = options.fail_on or (Severity.ERROR.value,)
    wanted = destinations(options.choices)
    names = (options.old, options.new)
    refusal = wanted if isinstance(wanted, str) else _refused(names, (*names, *options.times), wanted)
    refusal = refusal or _no_kind(fail_on)
    if refusal or isinstance(wanted, str):
        return _ended(UNREADABLE, refusal)
    from seqcheck.compare.compare import Examining, compare
    from seqcheck.compare.results import Bar

    examining = Examining(options.times, options.reserve, partial(_all_examined, options=options))
    bar = Bar(options.allow, partial(failing, fail_on=fail_on))
    with contextlib.nullcontext() if Path(options.new).is_dir() else working_on(options.new, sys.stderr):
        files = compare(*names, examining, bar)
    verdicts = {file.verdict for file in files}
    status = UNREADABLE if "unreadable" in verdicts else FOUND if "worse" in verdicts else FINE
    for destination in wanted:
        status = _ended(status, _delivered_comparison(destination, files))
    return status


def _delivered_comparison(destination: Destination, files: Sequence[FileComparison]) -> str | None:
    render = COMPARISON_FORMATS[destination.form]
    if destination.output:
        read = (name for file in files for name in (file.old, file.new, *file.sheets) if name)
        return _overwriting(destination.output, read) or save(render(files), destination.output)
    if destination.form == FOR_PEOPLE:
        from seqcheck.report.comparison import comparison_lines

        return show(comparison_lines(files, encoding_of(sys.stdout)))
    return send(render(files))


def _explain(options: argparse.Namespace) -> int:
    from seqcheck.checks.explain import explained_kinds, explanation, explanations
    from seqcheck.report.explanation import render_explanation, render_list

    if options.kind is None:
        return _ended(FINE, send(render_list(explanations())))
    one = explanation(options.kind)
    if one is None:
        advice = _advice(options.kind, explained_kinds(), "seqcheck explain lists all")
        return _ended(UNREADABLE, f"there is no kind of finding {options.kind}; {advice}")
    return _ended(FINE, send(render_explanation(one)))


def _page(options: argparse.Namespace) -> int:
    from seqcheck.report.tables import margins_lines, times_lines

    report = _examined(options.file, options.times)
    lines = times_lines if options.command == "times" else margins_lines
    return _ended(exit_status([report], (NEVER,)), show(lines(report, encoding_of(sys.stdout))))


def _ended(status: int, trouble: str | None) -> int:
    if trouble is None:
        return status
    complain(trouble)
    return UNREADABLE


def _examined(file: str, sheets: Sequence[str], reserve_us: int = 0) -> Report:
    from seqcheck.pipeline import examine

    with working_on(file, sys.stderr):
        return examine(file, sheets, reserve_us)


def _all_examined(texts: Sequence[str], options: argparse.Namespace) -> Sequence[Report]:
    if len(texts) == 1:
        return [_examined(texts[0], options.times, options.reserve)]
    from seqcheck.pipeline import examine
    from seqcheck.workers import examine_all

    with working_through(len(texts), sys.stderr) as advance:
        one = partial(examine, sheets=tuple(options.times), reserve_us=options.reserve)
        return examine_all(texts, one, options.jobs, advance)


def _refused(files: Sequence[str], inputs: Sequence[str], wanted: Sequence[Destination]) -> str | None:
    """Why these arguments make no sense together."""
    if files.count(STANDARD) > 1:
        return "standard input (-) can be read only once"
    outputs = [one.output for one in wanted if one.output]
    return next(filter(None, (_overwriting(output, inputs) for output in outputs)), None)


def _no_kind(fail_on: Sequence[str]) -> str | None:
    """What is wrong with a word of ``--fail-on``; the kinds are loaded only where one is not a severity."""
    words = [severity.value for severity in Severity] + [NEVER]
    if set(fail_on) <= set(words):
        return None
    from seqcheck.checks.catalogue import CHECKS

    words += [check.kind for check in CHECKS]
    unknown = next((word for word in fail_on if word not in words), None)
    if unknown is None:
        return None
    advice = _advice(unknown, words, f"there are {', '.join(words)}")
    return f"--fail-on: {unknown} is no severity and no kind of finding; {advice}"


def _advice(word: str, words: Sequence[str], otherwise: str) -> str:
    near = difflib.get_close_matches(word, words, 1, 0.6)
    return f"did you mean {near[0]}?" if near else otherwise


def _overwriting(output: str, inputs: Iterable[str]) -> str | None:
    return f"--output would overwrite an input: {output}" if any(_same_file(output, one) for one in inputs) else None


def _read_for(files: Sequence[str], reports: Sequence[Report]) -> Iterator[str]:
    """The sheets that the texts themselves name, as they may be found from here."""
    for file, report in zip(files, reports, strict=True):
        for name in (*report.sheets, *(problem.place.file for problem in report.problems)):
            yield name
            yield str(Path(file).parent / name)


def _same_file(one: str, other: str) -> bool:
    try:
        return Path(one).samefile(other)
    except (OSError, ValueError):
        return False


def _about(fault: Exception) -> str:
    """What happened and in which line of the program, for a report of the fault."""
    trace = fault.__traceback__
    while trace is not None and trace.tb_next is not None:
        trace = trace.tb_next
    where = f"{Path(trace.tb_frame.f_code.co_filename).name}:{trace.tb_lineno}" if trace else "?"
    noted = getattr(fault, "__notes__", (where,))[-1]
    return f"{type(fault).__name__}: {fault} ({noted})"
