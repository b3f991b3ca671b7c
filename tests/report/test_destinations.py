from __future__ import annotations

from pathlib import Path

import pytest

from seqcheck.report.destinations import destinations


def choices(words: str) -> list[tuple[str, str]]:
    """``f:json o:a.json`` as the options are given."""
    names = {"f": "--format", "o": "--output"}
    return [(names[word[0]], word[2:]) for word in words.split()]


@pytest.mark.parametrize(
    ("given", "pairs"),
    [
        ("", [("text", None)]),
        ("f:json", [("json", None)]),
        ("o:a", [("text", "a")]),
        ("f:json o:a", [("json", "a")]),
        ("o:a f:json", [("json", "a")]),
        ("f:json o:-", [("json", None)]),
        ("f:sarif o:a f:junit o:b", [("sarif", "a"), ("junit", "b")]),
        ("f:text f:sarif o:a", [("text", None), ("sarif", "a")]),
        ("f:sarif o:a f:text", [("sarif", "a"), ("text", None)]),
        ("f:sarif o:a f:sarif o:b f:text", [("sarif", "a"), ("sarif", "b"), ("text", None)]),
    ],
)
def test_pairs(given: str, pairs: list[tuple[str, str | None]]) -> None:
    found = destinations(choices(given))
    assert not isinstance(found, str)
    assert [(one.form, one.output) for one in found] == pairs


@pytest.mark.parametrize(
    ("given", "words"),
    [
        ("f:json f:text", "only one report can go to standard output"),
        ("f:json o:- f:text", "only one report can go to standard output"),
        ("o:a o:b", "--output b has no --format of its own"),
        ("f:json o:a o:b", "--output b has no --format of its own"),
        ("f:json o:a f:sarif o:a", "two reports cannot go to one --output"),
        ("f:json o:a f:sarif o:./a", "two reports cannot go to one --output"),
        ("o:", "--output needs the name of a file"),
        ("f:json o:a f:sarif o:", "--output needs the name of a file"),
    ],
)
def test_what_is_no_clear_pair_is_refused(given: str, words: str) -> None:
    refusal = destinations(choices(given))
    assert isinstance(refusal, str)
    assert refusal.startswith(words)


def test_two_names_of_one_file_are_one_file(tmp_path: Path) -> None:
    link = tmp_path / "link"
    link.symlink_to(tmp_path / "report")
    refusal = destinations(choices(f"f:json o:{tmp_path}/report f:sarif o:{link}"))
    assert isinstance(refusal, str)
