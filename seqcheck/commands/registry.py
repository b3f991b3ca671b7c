"""Every command by its name. A new one is a file beside this one and a line here.

Takes the words of a command line; gives them as argparse reads them, and the command that they name. Refuses, with
exit status 2, what is no command and none of its arguments. Only the file of the command that is asked for is loaded.
"""

from __future__ import annotations

import argparse
import importlib
import sys
from collections.abc import Collection, Sequence

from seqcheck import __version__
from seqcheck.arguments import SAFETY, STANDARD, Parser
from seqcheck.commands.statuses import STATUSES

#: What each command is for, in the order of the help; the file of ``check`` is ``commands/check.py``.
COMMANDS = {
    "check": "find what can go wrong",
    "times": "cycle time, each step's times, the critical path",
    "margins": "how far each thing is from breaking, tightest first",
    "graph": "the states that a machine comes to, and how long the runs between them take",
    "chart": "the timing chart, on the terminal, to print or to open in a browser",
    "compare": "what a change did to findings, margins and times",
    "explain": "what a kind of finding means, and how it is mended",
    "new": "write a small sequence and its timing sheet to begin with",
    "format": "lay texts out in one canonical way",
    "completion": "let a shell complete what you write",
}


TYPE_CHECKING = False  # As typing has it: help does without loading that.
if TYPE_CHECKING:
    from typing import Protocol

    class Command(Protocol):
        """What the file of a command holds. ``EPILOG`` closes its help; ``run`` gives the exit status."""

        EPILOG: str

        def add_arguments(self, command: argparse.ArgumentParser) -> None: ...

        def run(self, options: argparse.Namespace) -> int: ...


def command_named(name: str) -> Command:
    command: Command = importlib.import_module(f"seqcheck.commands.{name}")
    return command


def parser(asked: Collection[str]) -> Parser:
    """The arguments of the commands that are ``asked`` for; of the others the names alone."""
    whole = Parser(
        prog="seqcheck",
        description="Proves the timing of solenoid valve sequences for all times within their tolerances.",
        epilog=f"{STATUSES}\n\n{SAFETY}",
    )
    whole.add_argument("--version", action="version", version=f"seqcheck {__version__}")
    commands = whole.add_subparsers(dest="command", metavar="COMMAND", required=True)
    for name, purpose in COMMANDS.items():
        part = commands.add_parser(name, help=purpose)
        if name in asked:
            command = command_named(name)
            part.epilog = command.EPILOG
            command.add_arguments(part)
    return whole


def read_arguments(arguments: Sequence[str] | None) -> argparse.Namespace:
    """As argparse reads them; files may also stand behind options (``check a.steps --times t.yaml b.steps``)."""
    words = sys.argv[1:] if arguments is None else arguments
    # No option before the command takes a value, so this is the command, if it is one.
    whole = parser([word for word in words if not word.startswith("-")][:1])
    options, rest = whole.parse_known_args(words)
    files = [name for name in rest if name == STANDARD or not name.startswith("-")]
    if rest and (not hasattr(options, "files") or files != rest):
        whole.error(f"unrecognized arguments: {' '.join(rest)}")
    if files:
        options.files = [*options.files, *files]
    return options
