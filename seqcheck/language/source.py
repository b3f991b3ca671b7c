"""Reads the text of a file or of standard input.

Takes a file name (``-`` is standard input); gives its text without a byte order mark; refuses, with a ``Problem``,
what cannot be read or is no text.
"""

from __future__ import annotations

import sys
from dataclasses import field
from pathlib import Path

from seqcheck.machine.findings import Problem
from seqcheck.machine.places import Place
from seqcheck.machine.records import record

#: The name of standard input.
STANDARD = "-"
GREATEST_SIZE = 16 * 1024 * 1024
_MARK = "\ufeff".encode()


@record
class Source:
    """A text and the name it goes by in messages. ``marked``: a byte order mark stood before it."""

    name: str
    text: str
    marked: bool = field(default=False, compare=False)

    @property
    def whole(self) -> str:
        """The text with its byte order mark, where it had one."""
        return f"\ufeff{self.text}" if self.marked else self.text


def read_source(name: str, most: int = GREATEST_SIZE) -> Source | Problem:
    """The text of a file, ``-`` for standard input; a Problem where there is none to be had, or it has over ``most``
    bytes."""
    try:
        data = _read_bytes(name, most)
    except FileNotFoundError:
        return _refuse(name, "there is no such file", "check the name and the folder")
    except IsADirectoryError:
        return _refuse(name, "this is a folder, not a file", "name a file in it")
    except PermissionError:
        return _refuse(name, "the file may not be read", "give yourself the right to read it")
    except (OSError, ValueError) as error:
        reason = error.strerror if isinstance(error, OSError) and error.strerror else str(error)
        return _refuse(name, f"the file cannot be read: {reason}", None)
    return decode(name, data, most)


def decode(name: str, data: bytes, most: int = GREATEST_SIZE) -> Source | Problem:
    """Bytes as a text: UTF-8, with or without a byte order mark, at most so many bytes, without NUL bytes."""
    if len(data) > most:
        advice = "a sequence is a text of some kilobytes: is this the right file?"
        return _refuse(name, f"the file is over {most // 1024**2} MB", advice)
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        before = data[: error.start].decode("utf-8", errors="replace").removeprefix("\ufeff")
        return _refuse(name, "this is no UTF-8 text", "save the file as UTF-8", before)
    if "\0" in text:
        before = text[: text.index("\0")]
        return _refuse(name, "the file holds a NUL byte: it is no text", "is this the right file?", before)
    return Source(name, text, data.startswith(_MARK))


def _read_bytes(name: str, most: int) -> bytes:
    if name == STANDARD:
        return sys.stdin.buffer.read(most + 1)
    with Path(name).open("rb") as file:
        return file.read(most + 1)


def _refuse(name: str, message: str, advice: str | None, before: str = "") -> Problem:
    line = before.count("\n") + 1
    column = len(before) - (before.rfind("\n") + 1) + 1
    return Problem(Place(name, line, column, line, column), message, None, advice)
