"""Every example of the reference is read."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

from tests.language.reading import machine

REFERENCE = Path(__file__).parents[2] / "grammar" / "LANGUAGE.md"


def examples(kind: str) -> list[str]:
    return re.findall(rf"^```{kind}\n(.*?)^```", REFERENCE.read_text(encoding="utf-8"), re.MULTILINE | re.DOTALL)


def test_there_are_examples() -> None:
    assert len(examples("steps")) >= 5
    assert len(examples("yaml")) >= 1


@pytest.mark.parametrize("text", examples("steps"))
def test_text(text: str) -> None:
    assert machine(text).sequences


@pytest.mark.parametrize("sheet", examples("yaml"))
def test_sheet(sheet: str, tmp_path: Path) -> None:
    """The sheets of the reference are for its first machine."""
    file = tmp_path / "times.yaml"
    file.write_text(sheet, encoding="utf-8")
    first = examples("steps")[0]
    assert machine(first, str(file)) != machine(first)
