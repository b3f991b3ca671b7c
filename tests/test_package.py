"""The wheel: built, installed into a fresh environment, and run from another folder."""

from __future__ import annotations

import os
import subprocess
import sys
import sysconfig
import venv
import zipfile
from pathlib import Path

import pytest

from seqcheck import __version__
from seqcheck.checks.catalogue import CHECKS
from seqcheck.language.ordinary import MEDIA

pytestmark = pytest.mark.slow


def run(*command: str, cwd: Path) -> str:
    environment = {name: value for name, value in os.environ.items() if name != "PYTHONPATH"}
    done = subprocess.run(command, cwd=cwd, env=environment, capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stdout + done.stderr
    return done.stdout


@pytest.fixture(scope="module")
def wheel(tmp_path_factory: pytest.TempPathFactory) -> Path:
    checkout = Path(__file__).resolve().parent.parent
    folder = tmp_path_factory.mktemp("wheel of seqcheck")
    run(sys.executable, "-m", "hatchling", "build", "-t", "wheel", "-d", str(folder), cwd=checkout)
    (built,) = folder.glob("*.whl")
    return built


@pytest.fixture(scope="module")
def scripts(wheel: Path, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The folder of commands of a fresh environment that has the wheel, and the libraries of the running one."""
    folder = tmp_path_factory.mktemp("fresh environment")
    builder = venv.EnvBuilder(with_pip=False, symlinks=os.name == "posix")
    builder.create(folder)
    places = sysconfig.get_paths("venv", vars={"base": str(folder), "platbase": str(folder)})
    run(sys.executable, "-m", "pip", "--python", str(folder), "install", "--no-deps", str(wheel), cwd=folder)
    Path(places["purelib"], "libraries_of_the_tests.pth").write_text(f"{sysconfig.get_path('purelib')}\n", "utf-8")
    return Path(places["scripts"])


def test_the_wheel_holds_the_package_and_the_grammar_alone(wheel: Path) -> None:
    names = zipfile.ZipFile(wheel).namelist()
    assert "seqcheck/grammar/steps.lark" in names
    assert "seqcheck/commandline.py" in names
    assert "seqcheck/chart/page.css" in names
    assert {f"seqcheck/checks/explanations/{check.kind}.md" for check in CHECKS} <= set(names)
    assert {f"seqcheck/language/ordinary/{medium}.yaml" for medium in MEDIA} <= set(names)
    assert {f"seqcheck/commands/starter/{name}" for name in ("machine.steps", "machine.times.yaml")} <= set(names)
    assert {name.partition("/")[0] for name in names} == {"seqcheck", f"seqcheck-{__version__}.dist-info"}


def test_the_command_runs_from_another_folder(scripts: Path, tmp_path: Path) -> None:
    assert run(str(scripts / "seqcheck"), "--version", cwd=tmp_path) == f"seqcheck {__version__}\n"


def test_the_installed_command_explains(scripts: Path, tmp_path: Path) -> None:
    assert run(str(scripts / "seqcheck"), "explain", "short-pulse", cwd=tmp_path).startswith("short-pulse (error): ")
    assert len(run(str(scripts / "seqcheck"), "explain", cwd=tmp_path).splitlines()) == len(CHECKS) + 2


def test_the_installed_command_writes_a_sequence_that_it_checks(scripts: Path, tmp_path: Path) -> None:
    run(str(scripts / "seqcheck"), "new", "press.steps", cwd=tmp_path)
    assert "clean for all times" in run(str(scripts / "seqcheck"), "check", "press.steps", cwd=tmp_path)
    (tmp_path / "press.times.yaml").write_text("controller: {scan: 8..12 ms}\n", encoding="utf-8")
    assert "assumed-times" in run(str(scripts / "seqcheck"), "check", "press.steps", "--assume", "air", cwd=tmp_path)


def test_the_installed_package_finds_its_grammar(scripts: Path, tmp_path: Path) -> None:
    program = (
        "import pathlib, seqcheck; package = pathlib.Path(seqcheck.__file__).parent;"
        "print((package / 'grammar' / 'steps.lark').is_file(), package)"
    )
    found, package = run(str(scripts / "python"), "-c", program, cwd=tmp_path).split(maxsplit=1)
    assert found == "True"
    assert Path(package.strip()).is_relative_to(scripts.parent)
