"""Writing to a stream: a terminal, a pipe or a file that the shell opened.

Takes lines of a page or a whole text. Colour goes to a terminal alone, and not where the user has set ``NO_COLOR``.
Lets ``OSError`` through when the stream cannot be written.
"""

from __future__ import annotations

import os
from collections.abc import Sequence

TYPE_CHECKING = False  # As typing has it: help does without loading that.
if TYPE_CHECKING:
    from typing import TextIO

    # With them comes rich, which help and version do without.
    from seqcheck.report.layout import Line


def encoding_of(stream: TextIO) -> str:
    """The encoding in which the stream is written; UTF-8 where it has none of its own."""
    return getattr(stream, "encoding", None) or "utf-8"


def write_lines(lines: Sequence[Line], stream: TextIO) -> None:
    """A page whose characters the stream's encoding carries."""
    if _takes_colour(stream):
        _write_coloured(lines, stream)
    else:
        stream.writelines(f"{line.text}\n" for line in lines)
    stream.flush()


def write_text(text: str, stream: TextIO) -> None:
    """A text for programs: UTF-8 and its newlines as they are, whatever the stream's own encoding is."""
    bare = getattr(stream, "buffer", None)
    if bare is None:
        stream.write(text)
    else:
        stream.flush()
        bare.write(text.encode("utf-8"))
    stream.flush()


def _takes_colour(stream: TextIO) -> bool:
    return stream.isatty() and not os.environ.get("NO_COLOR") and os.environ.get("TERM") != "dumb"


def _write_coloured(lines: Sequence[Line], stream: TextIO) -> None:
    from rich.console import Console
    from rich.text import Text

    from seqcheck.report.layout import Tone

    styles = {
        Tone.PLAIN: "",
        Tone.TITLE: "bold",
        Tone.ERROR: "bold red",
        Tone.WARNING: "yellow",
        Tone.NOTE: "cyan",
        Tone.GOOD: "green",
    }
    console = Console(file=stream, force_terminal=True, highlight=False, markup=False, emoji=False)
    for line in lines:
        console.print(Text(line.text, style=styles[line.tone]), soft_wrap=True)
