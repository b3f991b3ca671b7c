"""The command ``seqcheck``: reads its arguments, runs the command that they name, gives an exit status.

Exit status 0: nothing at or above ``--fail-on``; 1: something; 2: an input or an option could not be read, or the
report not be written. Faults of the input are part of the report. Modules that take long to load are imported once
they are needed.
"""

from __future__ import annotations

import gc
import sys
from collections.abc import Sequence

from seqcheck.commands.registry import command_named, read_arguments
from seqcheck.commands.statuses import UNREADABLE, ended

INTERRUPTED = 130

#: So many more objects than before are there before a process looks for some that it could give back.
_MANY_OBJECTS = 2_000_000


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command with these arguments (those of the process if None: it then is for this command alone) and give
    its exit status."""
    _provide_streams()
    if arguments is None:
        gc.set_threshold(_MANY_OBJECTS)
    try:
        return _run(arguments)
    except KeyboardInterrupt:
        return INTERRUPTED
    except Exception as fault:
        if sys.flags.dev_mode:
            raise
        return ended(UNREADABLE, f"this is a fault of seqcheck, not of your text: {_about(fault)}")
    finally:
        if arguments is None:
            # What there is goes with the process, all at once.
            gc.freeze()


def _run(arguments: Sequence[str] | None) -> int:
    try:
        options = read_arguments(arguments)
    except SystemExit as stop:
        # Help, version and complaints of argparse; what they printed may still wait in the stream.
        _finish()
        return stop.code if isinstance(stop.code, int) else UNREADABLE
    return command_named(options.command).run(options)


def _provide_streams() -> None:
    """A process may be started without standard output or error."""
    if sys.stdout is None or sys.stderr is None:
        from seqcheck.report.delivery import provide_streams

        provide_streams()


def _finish() -> None:
    """Deliver what still waits for standard output; what writes reports is loaded only where that fails."""
    try:
        sys.stdout.flush()
    except OSError:
        from seqcheck.report.delivery import finish

        finish()


def _about(fault: Exception) -> str:
    """What happened and in which line of the program, for a report of the fault."""
    from pathlib import Path

    trace = fault.__traceback__
    while trace is not None and trace.tb_next is not None:
        trace = trace.tb_next
    where = f"{Path(trace.tb_frame.f_code.co_filename).name}:{trace.tb_lineno}" if trace else "?"
    noted = getattr(fault, "__notes__", (where,))[-1]
    return f"{type(fault).__name__}: {fault} ({noted})"
