"""What stands between a change and the machine: hooks in a real git repository, and the job for a build server."""

from __future__ import annotations

import os
import re
import shlex
import shutil
import stat
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest
import yaml

from seqcheck.commandline import main

CHECKOUT = Path(__file__).resolve().parents[1]
README = (CHECKOUT / "README.md").read_text(encoding="utf-8")
SCRIPTS = re.findall(r"^```sh\n(.*?)^```$", README, re.MULTILINE | re.DOTALL)
FAULTY = (CHECKOUT / "examples/faulty/short_pulse.steps").read_text(encoding="utf-8")
MENDED = FAULTY.replace("pulse YS1 20 ms", "pulse YS1 25 ms")

needs_git = pytest.mark.skipif(
    shutil.which("git") is None or os.name != "posix", reason="needs git, and a shell as POSIX has it"
)


def script_with(words: str) -> str:
    (script,) = (script for script in SCRIPTS if words in script)
    return script


def hook() -> dict[str, Any]:
    (one,) = yaml.safe_load((CHECKOUT / ".pre-commit-hooks.yaml").read_text(encoding="utf-8"))
    assert isinstance(one, dict)
    return one


class Repository:
    """A repository of sequences in ``folder``, with one hook."""

    def __init__(self, folder: Path, script: str) -> None:
        self.folder = folder / "sequences"
        self.folder.mkdir()
        commands = folder / "commands"
        commands.mkdir()
        self._executable(commands / "seqcheck", f'#!/bin/sh\nexec "{sys.executable}" -m seqcheck "$@"\n')
        aside = {name: value for name, value in os.environ.items() if not name.startswith("GIT_")}
        self.environment = aside | {
            "PATH": f"{commands}{os.pathsep}{os.environ['PATH']}",
            "PYTHONPATH": str(CHECKOUT),
            "HOME": str(folder),
            "GIT_CONFIG_NOSYSTEM": "1",
            **{
                f"GIT_{who}_{what}": "tester@localhost" for who in ("AUTHOR", "COMMITTER") for what in ("NAME", "EMAIL")
            },
        }
        self.git("init", "--quiet", "--template=")
        hooks = self.folder / ".git" / "hooks"
        hooks.mkdir()
        self._executable(hooks / "pre-commit", script)

    def git(self, *arguments: str) -> subprocess.CompletedProcess[str]:
        command = ["git", *arguments]
        return subprocess.run(
            command, cwd=self.folder, env=self.environment, capture_output=True, text=True, check=False
        )

    def write(self, name: str, text: str) -> None:
        (self.folder / name).parent.mkdir(parents=True, exist_ok=True)
        (self.folder / name).write_text(text, encoding="utf-8")

    def commit(self, *names: str) -> subprocess.CompletedProcess[str]:
        assert self.git("add", *names).returncode == 0
        return self.git("commit", "--quiet", "--message", "a change")

    def commits(self) -> int:
        return len(self.git("log", "--format=%h", "--all").stdout.split())

    @staticmethod
    def _executable(file: Path, script: str) -> None:
        file.write_text(script, encoding="utf-8")
        file.chmod(file.stat().st_mode | stat.S_IXUSR)


@needs_git
def test_the_hook_of_the_readme_refuses_a_faulty_commit_and_lets_the_mended_one_pass(tmp_path: Path) -> None:
    repository = Repository(tmp_path, script_with("git checkout-index"))
    repository.write("machines/stamp.steps", FAULTY)
    refused = repository.commit("machines")
    assert refused.returncode == 1
    assert "machines/stamp.steps:9:18: error (possible) short-pulse" in refused.stdout + refused.stderr
    assert repository.commits() == 0
    repository.write("machines/stamp.steps", MENDED)
    assert repository.commit("machines").returncode == 0
    assert repository.commits() == 1


@needs_git
def test_the_hook_of_the_readme_looks_at_what_the_commit_holds(tmp_path: Path) -> None:
    repository = Repository(tmp_path, script_with("git checkout-index"))
    repository.write("stamp.steps", FAULTY)
    assert repository.git("add", "stamp.steps").returncode == 0
    repository.write("stamp.steps", MENDED)
    assert repository.git("commit", "--quiet", "--message", "not staged").returncode == 1
    repository.write("draft.steps", FAULTY)
    assert repository.commit("stamp.steps").returncode == 0


@needs_git
def test_the_hook_for_other_repositories_refuses_and_lets_pass(tmp_path: Path) -> None:
    """As the tool that reads ``.pre-commit-hooks.yaml`` runs it: ``entry`` with ``args``, without names of files, where
    a name that the commit changes matches ``files``."""
    one = hook()
    assert (one["id"], one["language"], one["pass_filenames"]) == ("seqcheck", "python", False)
    line = shlex.join([*shlex.split(one["entry"]), *one["args"]])
    files = shlex.quote(one["files"])
    changed = f"git diff --cached --name-only | grep --quiet --extended-regexp {files}"
    repository = Repository(tmp_path, f"#!/bin/sh\nif {changed}; then exec {line}; fi\n")
    repository.write("notes.txt", "nothing for the hook")
    assert repository.commit("notes.txt").returncode == 0
    repository.write("stamp.steps", FAULTY.replace('machine "Date stamp"', 'machine "Date stamp"\ntiming "stamp.yaml"'))
    repository.write("stamp.yaml", "valves:\n  VS:\n    on: 12..17 ms\n")
    done = repository.commit("stamp.steps", "stamp.yaml")
    assert done.returncode == 0, done.stdout + done.stderr
    repository.write("stamp.yaml", "valves:\n  VS:\n    on: 12..22 ms\n")
    refused = repository.commit("stamp.yaml")
    assert refused.returncode == 1
    assert "short-pulse" in refused.stdout + refused.stderr
    assert repository.commits() == 2


def test_the_hook_runs_a_command_that_the_package_installs() -> None:
    import tomllib

    project = tomllib.loads((CHECKOUT / "pyproject.toml").read_text(encoding="utf-8"))["project"]
    assert hook()["entry"].split()[0] in project["scripts"]
    assert re.search(hook()["files"], "machines/a.steps")
    assert not re.search(hook()["files"], "machines/a.steps.orig")


def test_the_job_of_the_readme_writes_its_reports(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    job = script_with('"$SEQCHECK"').replace("\\\n", " ")
    (command,) = (line for line in job.splitlines() if line.startswith(".venv/bin/seqcheck "))
    (tmp_path / "machines").mkdir()
    (tmp_path / "machines" / "stamp.steps").write_text(FAULTY, encoding="utf-8")
    monkeypatch.chdir(tmp_path)
    assert main(shlex.split(command)[1:]) == 1
    assert "short-pulse" in capsys.readouterr().out
    assert sorted(file.name for file in tmp_path.iterdir() if file.is_file()) == [
        "seqcheck.json",
        "seqcheck.sarif",
        "seqcheck.xml",
    ]
    assert all("short-pulse" in file.read_text("utf-8") for file in tmp_path.glob("seqcheck.*"))
