"""Writing a report into a file so that nothing of the user's is ever half written.

Takes a path and a text. A file of that name is replaced in one go, keeping its permissions; a device or a pipe is
written as it is. Lets ``OSError`` through when that fails, and leaves what was there as it was.
"""

from __future__ import annotations

import contextlib
import os
import secrets
import stat
from pathlib import Path

_FOR_A_NEW_FILE = 0o666


def write_file(name: str, text: str) -> None:
    """``text`` as UTF-8 in the file ``name``; a link is followed."""
    content = text.encode("utf-8")
    try:
        there = os.stat(name)
    except FileNotFoundError:
        _replace(Path(os.path.realpath(name)), content, None)
        return
    if stat.S_ISREG(there.st_mode):
        _replace(Path(os.path.realpath(name)), content, there)
    else:
        # A directory refuses this with the right words; a device or a pipe must not be replaced.
        with open(name, "wb") as stream:
            stream.write(content)


def _replace(target: Path, content: bytes, there: os.stat_result | None) -> None:
    if there is not None and not os.access(target, os.W_OK):
        raise PermissionError(13, os.strerror(13), str(target))
    beside = target.with_name(f".seqcheck-{secrets.token_hex(8)}.part")
    flags = os.O_WRONLY | os.O_CREAT | os.O_EXCL | getattr(os, "O_BINARY", 0)
    descriptor = os.open(beside, flags, _FOR_A_NEW_FILE)
    try:
        with os.fdopen(descriptor, "wb") as stream:
            stream.write(content)
        if there is not None:
            _keep_permissions(beside, there)
        os.replace(beside, target)
    except BaseException:
        with contextlib.suppress(OSError):
            beside.unlink()
        raise


def _keep_permissions(beside: Path, there: os.stat_result) -> None:
    if hasattr(os, "chown"):
        with contextlib.suppress(OSError):
            os.chown(beside, there.st_uid, there.st_gid)
    beside.chmod(stat.S_IMODE(there.st_mode))
