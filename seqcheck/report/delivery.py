"""Handing a report over: to standard output, or into a file.

Takes lines of a page or a text. What went wrong comes back in words, None where nothing did; a reader that has gone
(``| head``) has seen enough, and is no trouble.
"""

from __future__ import annotations

import contextlib
import errno
import os
import sys
from collections.abc import Callable, Sequence

from seqcheck.report.terminal import encoding_of, write_lines, write_text

TYPE_CHECKING = False  # As typing has it: help does without loading that.
if TYPE_CHECKING:
    # With them comes rich, which help and version do without.
    from seqcheck.report.layout import Line


def show(lines: Sequence[Line]) -> str | None:
    """A page for people on standard output."""
    return _trouble(lambda: write_lines(lines, sys.stdout))


def show_beside(lines: Sequence[Line]) -> None:
    """A page for people on standard error, if that takes any: standard output is for a program."""
    with contextlib.suppress(OSError):
        write_lines(lines, sys.stderr)


def send(text: str) -> str | None:
    """A text for programs on standard output."""
    return _trouble(lambda: write_text(text, sys.stdout))


def save(text: str, name: str) -> str | None:
    """A text in the file ``name``."""
    from seqcheck.report.files import write_file

    try:
        write_file(name, text)
    except (OSError, ValueError) as fault:
        return f"cannot write the report to {name}: {_reason(fault)}"
    return None


def complain(message: str) -> None:
    """One line on standard error, if that takes any."""
    from seqcheck.report.plain import plain

    with contextlib.suppress(OSError):
        print(f"seqcheck: error: {plain(message, encoding_of(sys.stderr))}", file=sys.stderr, flush=True)


def finish() -> None:
    """Deliver what still waits for standard output."""
    _trouble(sys.stdout.flush)


def provide_streams() -> None:
    """A process may be started without standard output or error; what goes there is then dropped."""
    for name in ("stdout", "stderr"):
        if getattr(sys, name) is None:
            setattr(sys, name, open(os.devnull, "w", encoding="utf-8"))  # noqa: SIM115


def _trouble(write: Callable[[], object]) -> str | None:
    try:
        write()
    except OSError as fault:
        _let_go_of_output()
        # Windows reports a closed pipe as an invalid argument.
        gone = isinstance(fault, BrokenPipeError) or (os.name == "nt" and fault.errno == errno.EINVAL)
        return None if gone else f"cannot write the report: {_reason(fault)}"
    return None


def _let_go_of_output() -> None:
    """What still waits for a stream that takes nothing must not be tried again when the process ends."""
    with contextlib.suppress(OSError, ValueError):
        stream = sys.stdout.fileno()
        nowhere = os.open(os.devnull, os.O_WRONLY)
        os.dup2(nowhere, stream)
        os.close(nowhere)


def _reason(fault: Exception) -> str:
    return getattr(fault, "strerror", None) or str(fault)
