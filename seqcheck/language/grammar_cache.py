"""Keeps the compiled grammar where the platform keeps caches, as JSON.

Takes what makes up a parser; gives the parser that was kept, or None where there is none, or a broken, foreign or
outdated one. Nothing in it is run when it is read, and it is read only where nobody else can write. Whatever goes
wrong, the grammar is simply compiled again.
"""

from __future__ import annotations

import contextlib
import json
import os
import stat
import sys
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import lark
from lark import Lark
from lark.grammar import Rule
from lark.lexer import TerminalDef

#: Of what is kept; another one wherever the options of the parser change.
_FORM = 2


def kept_parser(grammar: str, options: Mapping[str, Any]) -> Lark | None:
    """``options``: those of lark that are not kept."""
    file = _file()
    try:
        content = None if file is None else _content(file)
        if content is None:
            return None
        kept = json.loads(content)
        if kept["made_of"] != _made_of(grammar):
            return None
        data, memo = _with_numbers(kept["data"]), _numbered(kept["memo"])
        parser: Lark = Lark._load_from_dict(data, memo, **options)  # type: ignore[no-untyped-call]
    except Exception:
        # lark meets what is broken in many ways.
        return None
    return parser


def keep_parser(grammar: str, parser: Lark) -> None:
    """For the next process; where it cannot be written, there is nothing to do."""
    file = _file()
    if file is None:
        return
    with contextlib.suppress(Exception):
        data, memo = parser.memo_serialize([TerminalDef, Rule])
        data["options"].update(postlex=None, _plugins={})
        content = json.dumps({"made_of": _made_of(grammar), "data": data, "memo": memo}, separators=(",", ":"))
        _write(file, content)


def _made_of(grammar: str) -> list[object]:
    return [_FORM, lark.__version__, list(sys.version_info[:2]), grammar]


def _file() -> Path | None:
    """None where nobody knows where it would go."""
    try:
        return _folder() / f"grammar-{_FORM}.json"
    except (RuntimeError, OSError):
        return None


def _folder() -> Path:
    """``seqcheck`` in the folder of caches of this user."""
    if os.name == "nt":
        given = os.environ.get("LOCALAPPDATA")
        base = Path(given) if given else Path.home() / "AppData" / "Local"
    elif sys.platform == "darwin":
        base = Path.home() / "Library" / "Caches"
    else:
        given = os.environ.get("XDG_CACHE_HOME", "")
        # The standard asks that a relative one be passed over.
        base = Path(given) if given.startswith("/") else Path.home() / ".cache"
    return base / "seqcheck"


def _content(file: Path) -> bytes | None:
    """What is in the file; None where somebody else could have written it."""
    if not _is_ours(file.parent.lstat()):
        return None
    descriptor = os.open(file, os.O_RDONLY | getattr(os, "O_NOFOLLOW", 0) | getattr(os, "O_BINARY", 0))
    with os.fdopen(descriptor, "rb") as stream:
        return stream.read() if _is_ours(os.fstat(stream.fileno())) else None


def _is_ours(there: os.stat_result) -> bool:
    """Whether only this user can have written it. On Windows the folder of the user is closed to others."""
    if os.name == "nt":
        return True
    closed = not there.st_mode & (stat.S_IWGRP | stat.S_IWOTH)
    return closed and there.st_uid == os.geteuid() and (stat.S_ISREG(there.st_mode) or stat.S_ISDIR(there.st_mode))


def _write(file: Path, content: str) -> None:
    """In one go, so that another process reads all of it or nothing."""
    file.parent.mkdir(mode=0o700, parents=True, exist_ok=True)
    if not _is_ours(file.parent.lstat()):
        return
    beside = file.with_name(f"{file.name}.{os.getpid()}")
    descriptor = os.open(beside, os.O_WRONLY | os.O_CREAT | os.O_EXCL, 0o600)
    try:
        with os.fdopen(descriptor, "w", encoding="utf-8") as stream:
            stream.write(content)
        os.replace(beside, file)
    except BaseException:
        beside.unlink(missing_ok=True)
        raise


# JSON has no numbers as keys, lark's tables have.


def _numbered(table: Mapping[str, Any]) -> dict[int, Any]:
    return {int(key): value for key, value in table.items()}


def _with_numbers(data: dict[str, Any]) -> dict[str, Any]:
    table = data["parser"]["parser"]
    table["tokens"] = _numbered(table["tokens"])
    table["states"] = {int(state): _numbered(actions) for state, actions in table["states"].items()}
    return data
