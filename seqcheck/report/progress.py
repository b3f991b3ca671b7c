"""A sign of life while long work runs: on a terminal only, after a moment, wiped out at its end."""

from __future__ import annotations

import contextlib
import threading
import time
from collections.abc import Callable, Iterator
from typing import TextIO

from seqcheck.report.plain import plain

#: Seconds of silence: most examinations are over by then.
PATIENCE = 0.7
#: Seconds between two looks of a bar.
_PAUSE = 0.1
_LONGEST_NAME = 40
_BAR = 30


@contextlib.contextmanager
def working_on(name: str, stream: TextIO) -> Iterator[None]:
    """While the block runs, say so on ``stream`` when that is a terminal."""
    if not stream.isatty():
        yield
        return
    # Plain ASCII, so that the blanks which wipe it out are as many.
    shown = f"seqcheck: examining {plain(name, 'ascii')[-_LONGEST_NAME:]} ..."
    with _line(lambda: shown, stream):
        yield


@contextlib.contextmanager
def working_through(total: int, stream: TextIO) -> Iterator[Callable[[int], None]]:
    """While the block runs, show how many of so many files are done; the block is given what to call with that
    count. Nothing is shown where ``stream`` is no terminal."""
    if not stream.isatty():
        yield lambda done: None
        return
    reached = 0

    def bar() -> str:
        full = _BAR * reached // total if total else _BAR
        return f"seqcheck: [{'#' * full}{'.' * (_BAR - full)}] {reached} of {total} files"

    with _line(bar, stream) as show:

        def advance(done: int) -> None:
            nonlocal reached
            reached = done
            show()

        yield advance


@contextlib.contextmanager
def _line(text: Callable[[], str], stream: TextIO) -> Iterator[Callable[[], None]]:
    """One line, first shown when ``PATIENCE`` is over, then anew when the block asks for it."""
    shown = threading.Event()
    last = 0.0
    widest = 0

    def say() -> None:
        nonlocal last, widest
        shown.set()
        last = time.monotonic()
        widest = max(widest, len(text()))
        _write(f"\r{text()}\r", stream)

    def again() -> None:
        if shown.is_set() and time.monotonic() - last >= _PAUSE:
            say()

    timer = threading.Timer(PATIENCE, say)
    timer.daemon = True
    timer.start()
    try:
        yield again
    finally:
        timer.cancel()
        timer.join()
        if shown.is_set():
            _write(f"\r{' ' * widest}\r", stream)


def _write(text: str, stream: TextIO) -> None:
    with contextlib.suppress(OSError, ValueError):
        stream.write(text)
        stream.flush()
