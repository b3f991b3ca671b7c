"""The JSON form of ``compare``: one object with an entry for each text, also for those without a difference.

Takes comparisons; gives JSON text (RFC 8259). A value that is not there is left out; null is a margin or a time that
an outside signal leaves open.
"""

from __future__ import annotations

import json
from collections.abc import Sequence

from seqcheck.compare.differences import (
    Change,
    Difference,
    DurationChange,
    FileComparison,
    FindingChange,
    MarginChange,
)
from seqcheck.machine.findings import Duration, Problem
from seqcheck.report.json import Json, exactness, finding_facts, reason, without_lone_surrogates

FORMAT = "seqcheck-comparison"
VERSION = 1


def render_comparison_json(files: Sequence[FileComparison]) -> str:
    """The whole object as indented text that ends with a newline."""
    whole = {"format": FORMAT, "version": VERSION, "comparisons": [_file(file) for file in files]}
    return without_lone_surrogates(json.dumps(whole, ensure_ascii=False, indent=2, allow_nan=False)) + "\n"


def _file(file: FileComparison) -> Json:
    return {
        "old": file.old,
        "new": file.new,
        "machine": file.machine,
        "verdict": file.verdict,
        "errors": [_error(one) for one in file.problems],
        "findings": [_finding(one) for one in file.findings],
        "margins": [_margin(one) for one in file.margins],
        "cycles": {one.name: {**_durations(one), "worse": one.worse} for one in file.cycles},
        "choices": {one.name: _branch(one) for one in file.choices},
        "steps": {one.name: _durations(one) for one in file.steps},
        "changes": [_change(one) for one in file.changes],
        "left_out": list(file.left_out),
    }


def _error(problem: Problem) -> Json:
    """The message ends with the advice."""
    place = problem.place
    message = f"{problem.message.rstrip('.')}; {problem.advice}" if problem.advice else problem.message
    return {"file": place.file, "line": place.line, "column": place.column, "message": message}


def _finding(change: FindingChange) -> Json:
    """As it is now, or as it was where it is gone; with what of it has changed."""
    finding, before = change.finding, change.before
    was: Json = {}
    if before is not None:
        was = {
            "was": {
                "severity": before.severity.value,
                "certain": before.certain,
                "margin_us": before.margin_us,
                **reason(before),
            }
        }
    return {
        "change": change.difference.value,
        "worse": change.worse,
        **finding_facts(finding),
        **reason(finding),
        **was,
    }


def _margin(change: MarginChange) -> Json:
    old: Json = {} if change.difference is Difference.NEW else {"old_margin_us": change.old_us}
    new: Json = {} if change.difference is Difference.GONE else {"new_margin_us": change.new_us}
    return {
        "change": change.difference.value,
        "worse": change.worse,
        "kind": change.kind,
        "subject": change.subject,
        "step": change.step,
        **old,
        **new,
    }


def _durations(change: DurationChange) -> Json:
    both = (("old", change.old), ("new", change.new))
    return {word: _duration(duration) for word, duration in both if duration is not None}


def _branch(change: DurationChange) -> Json:
    """Which way is typical nobody says."""
    both = (("old", change.old), ("new", change.new))
    return {word: {"min_us": one.least, "max_us": one.greatest} for word, one in both if one is not None}


def _duration(duration: Duration) -> Json:
    typical = {"typical_us": duration.typical}
    return {"min_us": duration.least, **typical, "max_us": duration.greatest, **exactness(duration)}


def _change(change: Change) -> Json:
    told = (("aspect", change.aspect), ("old", change.old), ("new", change.new))
    return {
        "part": change.part.value,
        "name": change.name,
        "change": change.difference.value,
        **{word: value for word, value in told if value is not None},
    }
