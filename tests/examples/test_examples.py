"""The examples: sound machines come out clean, every faulty one shows the kind that it is named after, and no other."""

from __future__ import annotations

from pathlib import Path

import pytest

from seqcheck.checks.catalogue import CHECKS
from seqcheck.machine.findings import Severity
from seqcheck.pipeline import examine

EXAMPLES = Path(__file__).resolve().parents[2] / "examples"
SOUND = sorted([*EXAMPLES.glob("*.steps"), *(EXAMPLES / "change").glob("*.steps")])
FAULTY = sorted((EXAMPLES / "faulty").glob("*.steps"))

#: Kinds that a faulty example shows besides its own, and why. Empty: none needs an exception.
BESIDES: dict[str, set[str]] = {}

#: Without the option `--assume` a text with missing times cannot be examined.
NEED_AN_OPTION = {"assumed-times"}


def _kind(file: Path) -> str:
    return file.stem.replace("_", "-")


def test_there_is_a_faulty_example_of_every_kind() -> None:
    assert [_kind(file) for file in FAULTY] == sorted({check.kind for check in CHECKS} - NEED_AN_OPTION)


@pytest.mark.parametrize("file", SOUND, ids=lambda file: file.stem)
def test_a_sound_example_is_clean(file: Path) -> None:
    report = examine(str(file))
    assert not report.problems
    assert report.verdict == "clean"
    assert not [one.kind for one in report.counting if one.severity is not Severity.NOTE]
    assert report.cycles


@pytest.mark.parametrize("file", FAULTY, ids=lambda file: file.stem)
def test_a_faulty_example_shows_its_kind_alone(file: Path) -> None:
    kind = _kind(file)
    report = examine(str(file))
    assert not report.problems
    assert {one.kind for one in report.findings} == {kind} | BESIDES.get(kind, set())


def test_one_sound_example_accepts_what_it_is_for() -> None:
    accepted = {file.stem: [one.kind for one in examine(str(file)).findings if one.accepted] for file in SOUND}
    assert {name: sorted(kinds) for name, kinds in accepted.items() if kinds} == {
        "bin_shaker": ["cut-stroke", "early-dwell"]
    }


@pytest.mark.parametrize("file", [*SOUND, *FAULTY], ids=lambda file: file.stem)
def test_an_example_opens_with_what_it_is(file: Path) -> None:
    head = file.read_text(encoding="utf-8").split("machine ")[0]
    assert "nvented" in head
    assert file.parent.name != "faulty" or head.startswith("# What is wrong: ")
