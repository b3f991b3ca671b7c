"""``seqcheck new``: a small sequence with its timing sheet to begin with.

Takes the name of a text; writes it and the sheet beside it, both or none. Refuses to write over anything.
"""

from __future__ import annotations

import argparse
import contextlib
from collections.abc import Iterator, Mapping
from pathlib import Path

from seqcheck.arguments import SAFETY
from seqcheck.commands.statuses import FINE, UNREADABLE, ended

EPILOG = f"Exit status: 0 both files were written; 2 neither was.\n\n{SAFETY}"

ENDING = ".steps"
SHEET_ENDING = ".times.yaml"
_STARTER = Path(__file__).resolve().parent / "starter"


def add_arguments(command: argparse.ArgumentParser) -> None:
    command.add_argument(
        "file",
        metavar="FILE",
        help=f"the text to write, NAME{ENDING}; its timing sheet NAME{SHEET_ENDING} comes beside it",
    )


def run(options: argparse.Namespace) -> int:
    text = Path(options.file)
    sheet = text.with_name(f"{text.stem}{SHEET_ENDING}") if text.name else text
    trouble = _no_name(text) or _write_both({text: "machine.steps", sheet: "machine.times.yaml"}, text, sheet)
    if trouble:
        return ended(UNREADABLE, trouble)
    from seqcheck.report.delivery import send
    from seqcheck.report.plain import plain

    return ended(FINE, send(f"wrote {plain(str(text))} and {plain(str(sheet))}\n"))


def _no_name(text: Path) -> str | None:
    """What is wrong with the name of a text; it stands in quotes in the text itself."""
    if not text.name.endswith(ENDING) or text.stem.startswith("."):
        return f"{text} is no name of a sequence text: write NAME{ENDING}"
    if '"' in text.name or not text.name.isprintable():
        return f"{text.name} cannot stand in quotes in a text: leave quotes and control characters out of the name"
    return None


def _write_both(files: Mapping[Path, str], text: Path, sheet: Path) -> str | None:
    try:
        with _both_or_none() as written:
            for file, starter in files.items():
                content = (_STARTER / starter).read_text(encoding="utf-8")
                for mark, name in (("@name@", text.stem), ("@file@", text.name), ("@sheet@", sheet.name)):
                    content = content.replace(mark, name)
                with file.open("x", encoding="utf-8", newline="\n") as stream:
                    written.append(file)
                    stream.write(content)
    except FileExistsError as fault:
        return f"{fault.filename} is there already: nothing was written"
    except (OSError, ValueError) as fault:
        return f"cannot write {text} and {sheet.name}: {getattr(fault, 'strerror', None) or fault}"
    return None


@contextlib.contextmanager
def _both_or_none() -> Iterator[list[Path]]:
    """Takes away what was written when not all could be."""
    written: list[Path] = []
    try:
        yield written
    except BaseException:
        for file in written:
            with contextlib.suppress(OSError):
                file.unlink()
        raise
