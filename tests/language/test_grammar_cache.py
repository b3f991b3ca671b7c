"""The compiled grammar that is kept: it parses as a new one does, and what is wrong with it never shows."""

from __future__ import annotations

import json
import os
import sys
from collections.abc import Callable
from pathlib import Path

import pytest
from lark import Lark, Tree, UnexpectedInput

from seqcheck.language import grammar, grammar_cache
from seqcheck.language.harvest import end_of, start_of
from tests.language.test_layout import TEXTS
from tests.language.test_newcomers import NEWCOMERS

posix = pytest.mark.skipif(os.name != "posix", reason="owners and rights as POSIX has them")
BROKEN = [text.replace("¦", "") for advice in NEWCOMERS.values() for texts in advice.values() for text in texts]

#: Gives the parser as a new process would.
Begin = Callable[[], Lark]


@pytest.fixture
def kept(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """The file, in a folder of caches of its own."""
    monkeypatch.setattr(grammar_cache, "_folder", lambda: tmp_path / "caches" / "seqcheck")
    return tmp_path / "caches" / "seqcheck" / f"grammar-{grammar_cache._FORM}.json"


@pytest.fixture
def compiled(monkeypatch: pytest.MonkeyPatch) -> list[int]:
    """Grows by one each time the grammar is compiled."""
    times: list[int] = []

    class Counted(Lark):
        def __init__(self, *arguments: object, **options: object) -> None:
            times.append(1)
            super().__init__(*arguments, **options)  # type: ignore[arg-type]

    monkeypatch.setattr(grammar, "Lark", Counted)
    return times


def begin() -> Lark:
    return grammar.parser.__wrapped__()


def outcome(parser: Lark, text: str) -> object:
    """The tree with its places, or what was expected where it stopped."""
    try:
        tree = parser.parse(text, start="text")
    except UnexpectedInput as error:
        state = getattr(error, "interactive_parser", None)
        return type(error).__name__, error.pos_in_stream, state and frozenset(state.accepts())
    assert isinstance(tree, Tree)
    return tree, [(part.data, start_of(part), end_of(part)) for part in tree.iter_subtrees()]


def test_the_second_process_compiles_nothing_and_parses_the_same(kept: Path, compiled: list[int]) -> None:
    made, loaded = begin(), begin()
    assert len(compiled) == 1
    assert json.loads(kept.read_bytes())["data"]["options"]["postlex"] is None
    for text in [*TEXTS, *BROKEN, "never " + "(" * 60]:
        assert outcome(loaded, text) == outcome(made, text)
    assert loaded.parse("on 5 ms off 2 ms", start="sheet_value") == made.parse("on 5 ms off 2 ms", start="sheet_value")


def cut(content: bytes) -> bytes:
    return content[: len(content) // 2]


def without_rules(content: bytes) -> bytes:
    broken = json.loads(content)
    broken["memo"] = {}
    return json.dumps(broken).encode()


def outdated(content: bytes) -> bytes:
    broken = json.loads(content)
    broken["made_of"][1] = "0.0.1"
    return json.dumps(broken).encode()


@pytest.mark.parametrize(
    "change",
    [cut, without_rules, outdated, lambda _: b"", lambda _: b"[1]", lambda _: b"\x80\x04N.", lambda _: b"[" * 99_999],
)
def test_what_is_broken_or_outdated_is_compiled_again_and_mended(
    change: Callable[[bytes], bytes], kept: Path, compiled: list[int]
) -> None:
    begin()
    sound = kept.read_bytes()
    kept.write_bytes(change(sound))
    assert begin().parse("flag a", start="text")
    assert len(compiled) == 2
    assert json.loads(kept.read_bytes())["made_of"] == json.loads(sound)["made_of"]
    begin()
    assert len(compiled) == 2


@posix
@pytest.mark.parametrize(("what", "rights"), [("file", 0o622), ("file", 0o660), ("folder", 0o777), ("folder", 0o720)])
def test_where_others_can_write_nothing_is_read(what: str, rights: int, kept: Path, compiled: list[int]) -> None:
    begin()
    (kept if what == "file" else kept.parent).chmod(rights)
    begin()
    assert len(compiled) == 2


@posix
def test_a_file_of_another_user_is_not_read(kept: Path, compiled: list[int], monkeypatch: pytest.MonkeyPatch) -> None:
    begin()
    monkeypatch.setattr(os, "geteuid", lambda: 4711)
    begin()
    assert len(compiled) == 2


@posix
def test_a_link_is_not_followed(kept: Path, compiled: list[int]) -> None:
    begin()
    elsewhere = kept.rename(kept.with_name("elsewhere.json"))
    kept.symlink_to(elsewhere)
    begin()
    assert len(compiled) == 2


def test_where_nothing_can_be_kept_it_works_all_the_same(kept: Path, compiled: list[int]) -> None:
    kept.parent.parent.write_text("no folder")
    assert begin().parse("flag a", start="text")
    assert begin().parse("flag a", start="text")
    assert len(compiled) == 2


@posix
@pytest.mark.skipif(sys.platform == "darwin", reason="the folder of caches is another there")
@pytest.mark.parametrize(("given", "base"), [("/x/caches", "/x/caches"), ("relative", "~/.cache"), ("", "~/.cache")])
def test_the_folder_is_that_of_the_platform(given: str, base: str, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("XDG_CACHE_HOME", given)
    assert grammar_cache._folder() == Path(base).expanduser() / "seqcheck"
