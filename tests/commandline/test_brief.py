"""A page of ``check`` has no line for the times of steps and the critical path: who reads only that waits for none."""

from __future__ import annotations

import json
from dataclasses import replace
from pathlib import Path

import pytest

from seqcheck import pipeline
from seqcheck.commandline import main
from seqcheck.pipeline import examine
from seqcheck.report.text import text_lines

EXAMPLES = Path(__file__).resolve().parents[2] / "examples"
FILES = sorted(str(file) for file in EXAMPLES.rglob("*.steps"))


@pytest.mark.parametrize("file", FILES, ids=lambda file: Path(file).stem)
def test_a_brief_report_has_all_but_those_and_the_same_page(file: str) -> None:
    whole, brief = examine(file), examine(file, brief=True)
    assert brief == replace(whole, steps=(), critical_path=())
    assert text_lines([brief]) == text_lines([whole])


@pytest.fixture
def traced(monkeypatch: pytest.MonkeyPatch) -> list[int]:
    """Grows by one for each critical path that is worked out."""
    calls: list[int] = []
    trace = pipeline.critical_path
    monkeypatch.setattr(pipeline, "critical_path", lambda study: calls.append(1) or trace(study))
    return calls


@pytest.mark.parametrize(
    ("options", "count"), [([], 0), (["--format", "text"], 0), (["--format", "json"], 1), (["--format", "sarif"], 1)]
)
def test_only_the_page_is_brief(
    options: list[str], count: int, traced: list[int], capsys: pytest.CaptureFixture[str]
) -> None:
    main(["check", *options, FILES[0]])
    assert len(traced) == count
    assert capsys.readouterr().out


def test_a_report_beside_the_page_is_whole(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    out = tmp_path / "report.json"
    main(["check", "--format", "text", "--format", "json", "--output", str(out), FILES[0]])
    (report,) = json.loads(out.read_text(encoding="utf-8"))["reports"]
    assert report["steps"]
    assert capsys.readouterr().out
