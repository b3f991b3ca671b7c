"""Explanations are files laid out all alike; one that is not is a fault of the program, which is not passed over."""

from __future__ import annotations

from pathlib import Path

import pytest

from seqcheck.checks import explain
from seqcheck.checks.explain import explained_kinds, explanation

GOOD = (Path(explain._FOLDER) / "early-dwell.md").read_text(encoding="utf-8")


def written(folder: Path, text: str, monkeypatch: pytest.MonkeyPatch) -> None:
    (folder / "early-dwell.md").write_text(text, encoding="utf-8")
    monkeypatch.setattr(explain, "_FOLDER", str(folder))


def test_a_file_laid_out_well_is_read(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    written(tmp_path, GOOD, monkeypatch)
    assert explained_kinds() == ("early-dwell",)
    found = explanation("early-dwell")
    assert found is not None and found.kind == "early-dwell"
    assert explanation("late-dwell") is None


@pytest.mark.parametrize(
    ("old", "new"),
    [("# early-dwell", "# stale-signal"), ("# early-dwell", "# a-kind-before"), ("## Mended", "## Better")],
)
def test_a_file_of_another_kind_or_laid_out_otherwise_is_refused(
    old: str, new: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    written(tmp_path, GOOD.replace(old, new, 1), monkeypatch)
    with pytest.raises(ValueError, match="early-dwell is not laid out"):
        explanation("early-dwell")
