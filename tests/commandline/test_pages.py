from __future__ import annotations

import pytest

from seqcheck import __version__
from seqcheck.arguments import SAFETY
from seqcheck.commandline import main
from seqcheck.report.layout import page
from seqcheck.report.tables import margins_lines, times_lines
from tests.commandline.conftest import Asked
from tests.report.samples import healthy, short_pulse

Output = pytest.CaptureFixture[str]


@pytest.mark.parametrize(("command", "lines"), [("times", times_lines), ("margins", margins_lines)])
def test_pages_show_the_report_and_pass_no_verdict(command: str, lines: object, asked: Asked, capsys: Output) -> None:
    assert main([command, "broken.steps", "--times", "a.yaml"]) == 0
    assert asked == [("broken.steps", ("a.yaml",))]
    assert callable(lines)
    assert capsys.readouterr().out == page(lines(healthy(short_pulse())))


@pytest.mark.parametrize("command", ["times", "margins"])
def test_an_unreadable_text_is_status_2(command: str, asked: Asked, capsys: Output) -> None:
    assert main([command, "unreadable.steps"]) == 2
    assert "error: there is no valve V9" in capsys.readouterr().out


def test_version(capsys: Output) -> None:
    assert main(["--version"]) == 0
    assert capsys.readouterr().out == f"seqcheck {__version__}\n"


@pytest.mark.parametrize(
    "arguments",
    [
        ["--help"],
        ["check", "--help"],
        ["times", "--help"],
        ["margins", "--help"],
        ["graph", "--help"],
        ["compare", "--help"],
        ["explain", "--help"],
        ["new", "--help"],
        ["format", "--help"],
        ["completion", "--help"],
    ],
)
def test_help_says_what_the_tool_is_not(arguments: list[str], capsys: Output) -> None:
    assert main(arguments) == 0
    text = capsys.readouterr().out
    assert SAFETY in " ".join(text.split())
    assert text.isascii()
