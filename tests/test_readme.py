"""README shows what the program really says: every ``$ seqcheck`` block is run again, from the checkout's folder."""

from __future__ import annotations

import re
import shlex
from pathlib import Path

import pytest

from seqcheck.checks.catalogue import CHECKS
from seqcheck.commandline import main

CHECKOUT = Path(__file__).resolve().parents[1]
README = (CHECKOUT / "README.md").read_text(encoding="utf-8")
BLOCKS = re.findall(r"^```text\n\$ seqcheck ([^\n]*)\n(.*?)^```$", README, re.MULTILINE | re.DOTALL)


def test_readme_shows_a_faulty_and_a_clean_machine() -> None:
    shown = " ".join(output for _, output in BLOCKS)
    assert "error (possible)" in shown and "clean for all times" in shown


@pytest.mark.parametrize(("command", "output"), BLOCKS, ids=[command for command, _ in BLOCKS])
def test_readme_output_is_real(
    command: str, output: str, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(CHECKOUT)
    main(shlex.split(command))
    assert capsys.readouterr().out == output


def test_readme_shows_the_text_that_it_checks() -> None:
    texts = re.findall(r"^```steps\n(.*?)^```$", README, re.MULTILINE | re.DOTALL)
    assert texts[0] == (CHECKOUT / "examples/faulty/short_pulse.steps").read_text(encoding="utf-8")
    examples = [file.read_text(encoding="utf-8") for file in (CHECKOUT / "examples").rglob("*.steps")]
    for part in texts[1:]:
        assert any(part in example for example in examples), part


def test_readme_lists_every_finding_kind_with_its_severity() -> None:
    rows = dict(re.findall(r"^\| `([a-z-]+)` \|[^|]*\| (\w+)", README, re.MULTILINE))
    assert {check.kind: check.severity.value for check in CHECKS}.items() <= rows.items()
