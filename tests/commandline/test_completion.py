"""The script for bash, asked as bash asks it."""

from __future__ import annotations

import shutil
import subprocess

import pytest

from seqcheck.commandline import main
from seqcheck.commands.registry import COMMANDS

Output = pytest.CaptureFixture[str]
ASK = """
COMP_WORDS=({words}); COMP_CWORD={last}
_seqcheck
printf '%s\\n' "${{COMPREPLY[@]}}"
"""


@pytest.mark.skipif(shutil.which("bash") is None, reason="no bash here")
@pytest.mark.parametrize(
    ("words", "offered"),
    [
        ("seqcheck che", {"check"}),
        ("seqcheck ''", {*COMMANDS, "--help", "--version"}),
        ("seqcheck check --format ''", {"text", "json", "sarif", "junit"}),
        ("seqcheck check a.steps --ass", {"--assume"}),
        ("seqcheck times a.steps --assume ''", {"air", "oil"}),
        ("seqcheck check --times ''", {""}),
        ("seqcheck check ''", {""}),
        ("seqcheck explain short", {"short-pulse"}),
        ("seqcheck completion ''", {"bash"}),
        ("seqcheck margins --format ''", {""}),
    ],
)
def test_bash_offers(words: str, offered: set[str], capsys: Output) -> None:
    assert main(["completion", "bash"]) == 0
    script = capsys.readouterr().out + ASK.format(words=words, last=len(words.split()) - 1)
    done = subprocess.run(["bash", "-u", "-c", script], capture_output=True, text=True, check=False)
    assert (done.returncode, done.stderr) == (0, "")
    assert set(done.stdout.rstrip("\n").split("\n")) == offered


def test_another_shell_is_refused(capsys: Output) -> None:
    assert main(["completion", "korn"]) == 2
    assert "invalid choice: 'korn'" in capsys.readouterr().err
