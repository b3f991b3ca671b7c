"""A sign of life while a long examination runs: on a terminal only, after a moment, wiped out at its end."""

from __future__ import annotations

import contextlib
import threading
from collections.abc import Iterator
from typing import TextIO

from seqcheck.report.plain import plain

#: Seconds of silence: most examinations are over by then.
PATIENCE = 0.7
_LONGEST_NAME = 40


@contextlib.contextmanager
def working_on(name: str, stream: TextIO) -> Iterator[None]:
    """While the block runs, say so on ``stream`` when that is a terminal."""
    if not stream.isatty():
        yield
        return
    # Plain ASCII, so that the blanks which wipe it out are as many.
    shown = f"seqcheck: examining {plain(name, 'ascii')[-_LONGEST_NAME:]} ..."
    said = threading.Event()

    def say() -> None:
        said.set()
        _write(f"\r{shown}\r", stream)

    timer = threading.Timer(PATIENCE, say)
    timer.daemon = True
    timer.start()
    try:
        yield
    finally:
        timer.cancel()
        timer.join()
        if said.is_set():
            _write(f"\r{' ' * len(shown)}\r", stream)


def _write(text: str, stream: TextIO) -> None:
    with contextlib.suppress(OSError, ValueError):
        stream.write(text)
        stream.flush()
