"""Reports that ``check --format json`` has stored, read back.

Takes JSON text; gives reports with what it holds (findings, margins, cycle times, also by choice, and step times), or a
problem with its place where it is no such report. What a comparison does not ask (runs, handovers) is left out.
"""

from __future__ import annotations

import json
from typing import Any

from seqcheck.language.source import Source
from seqcheck.machine.findings import ChoiceTime, Duration, Finding, Margin, Problem, Report, Severity
from seqcheck.machine.places import Place

#: What ``report.json`` writes, and the versions of it that are understood here.
FORMAT = "seqcheck-report"
VERSIONS = (1,)

#: No time that seqcheck writes is as great.
_GREATEST = 10**18
_ADVICE = "store one with `seqcheck check --format json --output FILE`"


class _Wrong(Exception):
    """Something in the object is not what a report holds there."""


def is_stored(source: Source) -> bool:
    """Whether this is meant as a stored report: no sequence text begins with a brace."""
    return source.text.lstrip().startswith("{")


def stored_reports(source: Source) -> tuple[Report, ...] | Problem:
    try:
        whole = json.loads(source.text)
    except json.JSONDecodeError as fault:
        return _problem(source, f"this is no JSON: {fault.msg}", fault.lineno, fault.colno)
    except (RecursionError, ValueError) as fault:
        return _problem(source, f"this JSON cannot be read: {fault}")
    try:
        if _get(whole, "format", str) != FORMAT:
            return _problem(source, "this JSON is no report of seqcheck")
        if _get(whole, "version", int) not in VERSIONS:
            return _problem(source, f"this report has version {whole['version']}, which this seqcheck does not know")
        return tuple(_report(one) for one in _get(whole, "reports", list))
    except _Wrong as fault:
        return _problem(source, f"this report of seqcheck is damaged: {fault}")


def _problem(source: Source, message: str, line: int = 1, column: int = 1) -> Problem:
    return Problem(Place(source.name, line, column, line, column), message, None, _ADVICE)


def _report(one: Any) -> Report:
    file = _get(one, "file", str)
    return Report(
        file,
        _get(one, "machine", str, None),
        findings=tuple(_finding(part, file) for part in _get(one, "findings", list)),
        problems=tuple(_error(part, file) for part in _get(one, "errors", list)),
        cycles=_durations(_get(one, "cycles", dict)),
        # Reports of before there were choices have no such key.
        choices=tuple(_choice(part, file) for part in _get(one, "choices", list)) if "choices" in one else (),
        steps=_durations(_get(one, "steps", dict)),
        margins=tuple(_margin(part, file) for part in _get(one, "margins", list)),
    )


def _finding(one: Any, file: str) -> Finding:
    severity = _get(one, "severity", str)
    if severity not in [known.value for known in Severity]:
        raise _Wrong(f"there is no severity {severity!r}")
    return Finding(
        kind=_get(one, "kind", str),
        severity=Severity(severity),
        certain=_get(one, "certain", bool),
        subject=_get(one, "subject", str),
        step=_get(one, "step", str, None),
        place=_place(one, file),
        message=_get(one, "message", str),
        margin_us=_get(one, "margin_us", int, None),
        replayed=_get(one, "replayed", bool, None),
        run=(),
        mend=None,
        accepted=_get(one, "accepted", str, None) if "accepted" in one else None,
    )


def _error(one: Any, file: str) -> Problem:
    return Problem(_place(one, file), _get(one, "message", str))


def _margin(one: Any, file: str) -> Margin:
    line = _get(one, "line", int)
    return Margin(
        _get(one, "kind", str),
        _get(one, "subject", str),
        _get(one, "step", str, None),
        Place(file, line, 1, line, 1),
        _get(one, "margin_us", int, None),
    )


def _choice(one: Any, file: str) -> ChoiceTime:
    line, least = _get(one, "line", int), _get(one, "min_us", int)
    return ChoiceTime(
        _get(one, "sequence", str),
        Place(file, line, 1, line, 1),
        _get(one, "way", str),
        Duration(least, least, _get(one, "max_us", int, None), _is_exact(one)),
    )


def _durations(named: dict[str, Any]) -> tuple[tuple[str, Duration], ...]:
    return tuple((name, _duration(one)) for name, one in named.items())


def _duration(one: Any) -> Duration:
    greatest = _get(one, "max_us", int, None)
    return Duration(_get(one, "min_us", int), _get(one, "typical_us", int), greatest, _is_exact(one))


def _is_exact(one: Any) -> bool:
    """Reports of before this was said have no such key."""
    return bool(_get(one, "exact", bool)) if "exact" in one else True


def _place(one: Any, file: str) -> Place:
    line, column = _get(one, "line", int), _get(one, "column", int)
    return Place(file, line, column, line, column)


def _get(one: Any, key: str, *kinds: type | None) -> Any:
    """The value of a key, which must be of one of these kinds; None among them allows null."""
    if not isinstance(one, dict):
        raise _Wrong("something in it is no object")
    if key not in one:
        raise _Wrong(f"the key {key!r} is missing")
    value = one[key]
    fits = value is None if None in kinds and value is None else any(type(value) is kind for kind in kinds)
    if not fits or (type(value) is int and abs(value) > _GREATEST):
        raise _Wrong(f"the value of {key!r} is not what a report holds there")
    return value
