"""Every explanation is real: its faulty sequence shows that kind and no other, the mended one shows none."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest

from seqcheck.checks.catalogue import CHECKS
from seqcheck.checks.explain import Explanation, explained_kinds, explanation, explanations
from seqcheck.commandline import main
from seqcheck.language.source import Source
from seqcheck.machine.findings import Severity
from seqcheck.pipeline import examine_source

Output = pytest.CaptureFixture[str]
EVERY = explanations()


def name_of(one: Explanation) -> str:
    return one.kind


def test_every_kind_is_explained_with_its_severity_and_title() -> None:
    told = {one.kind: (one.severity, one.title) for one in EVERY}
    assert told == {check.kind: (check.severity, check.title) for check in CHECKS}


@pytest.mark.parametrize("one", EVERY, ids=name_of)
def test_the_faulty_sequence_shows_the_kind_alone_and_in_these_words(one: Explanation) -> None:
    sheets = ["assume:air"] if one.kind == "assumed-times" else []
    report = examine_source(Source(f"{one.kind}.steps", one.faulty), sheets)
    assert not report.problems
    assert {finding.kind for finding in report.findings} == {one.kind}
    assert report.findings[0].message == one.says


@pytest.mark.parametrize("one", EVERY, ids=name_of)
def test_the_mended_sequence_is_clean(one: Explanation) -> None:
    report = examine_source(Source(f"{one.kind}.steps", one.mended))
    assert report.verdict == "clean"
    assert one.kind not in {finding.kind for finding in report.findings}
    assert all(finding.severity is Severity.NOTE for finding in report.findings)


@pytest.mark.parametrize("one", EVERY, ids=name_of)
def test_the_page_has_it_all_in_plain_narrow_text(one: Explanation, capsys: Output) -> None:
    assert main(["explain", one.kind]) == 0
    page = capsys.readouterr().out
    assert page.startswith(f"{one.kind} ({one.severity.value}): {one.title}\n\n")
    assert page.isascii()
    assert all(len(line) <= 80 for line in page.splitlines())
    for text in (one.faulty, one.mended):
        assert "".join(f"    {line}\n" for line in text.splitlines()) in page
    words = " ".join(page.split())
    for prose in (one.meaning, one.how, f"seqcheck says: {one.says}"):
        assert " ".join(prose.split()) in words


def test_the_list_names_all_kinds_errors_first(capsys: Output) -> None:
    assert main(["explain"]) == 0
    page = capsys.readouterr().out
    rows = [line.split(maxsplit=2) for line in page.splitlines()[: len(EVERY)]]
    assert sorted(rows) == sorted([check.kind, check.severity.value, check.title] for check in CHECKS)
    severities = [row[1] for row in rows]
    assert severities == sorted(severities, key=[severity.value for severity in Severity].index)
    assert page.isascii() and all(len(line) <= 80 for line in page.splitlines())


@pytest.mark.parametrize(
    ("kind", "advice"),
    [
        ("short-puls", "did you mean short-pulse?"),
        ("xyzzy", "seqcheck explain lists all"),
        ("../short-pulse", "short-pulse?"),
        ("", "lists all"),
    ],
)
def test_an_unknown_kind_is_status_2(kind: str, advice: str, capsys: Output) -> None:
    assert main(["explain", kind]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert err.startswith("seqcheck: error: there is no kind of finding ") and advice in err


@pytest.mark.parametrize("arguments", [["explain"], ["explain", "short-pulse"], ["--help"], ["--version"]])
def test_help_loads_nothing_that_examines_or_draws(arguments: list[str], checkout: Path) -> None:
    program = (
        "import sys, argparse; anyway = set(sys.modules);"
        "from seqcheck.commandline import main; main(sys.argv[1:]);"
        "loaded = {name.partition('.')[0] for name in {*sys.modules} - anyway};"
        "print(*sorted(loaded & {'numpy', 'networkx', 'lark', 'rich', 'yaml', 'typing', 'dataclasses', 'shutil'}),"
        " file=sys.stderr)"
    )
    done = subprocess.run(
        [sys.executable, "-c", program, *arguments], cwd=checkout, capture_output=True, text=True, check=True
    )
    assert done.stdout and done.stderr.strip() == ""


def test_an_explanation_that_is_not_laid_out_as_the_others_is_a_fault(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    (tmp_path / "odd.md").write_text("# odd\n", encoding="utf-8")
    monkeypatch.setattr("seqcheck.checks.explain._FOLDER", tmp_path)
    assert explained_kinds() == ("odd",)
    with pytest.raises(ValueError, match="odd"):
        explanation("odd")
