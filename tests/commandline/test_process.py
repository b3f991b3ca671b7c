"""The command as a process of its own: quick help, closed pipes, Ctrl-C, encodings."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
from pathlib import Path

import pytest

posix = pytest.mark.skipif(os.name != "posix", reason="pipes and signals as POSIX has them")

#: A process whose examinations are made by hand; ``WAIT`` makes them never end.
PROGRAM = """
import sys, time
from types import ModuleType
from tests.report.samples import healthy, short_pulse
def examine(name, sheets, reserve_us=0, brief=False):
    if name == "WAIT":
        print("waiting", file=sys.stderr, flush=True)
        time.sleep(60)
    return healthy(*[short_pulse(message="lifts 昇降 by ± 5 mm")] * (2000 if name == "LONG" else 1))
module = ModuleType("seqcheck.pipeline")
module.examine = examine
sys.modules["seqcheck.pipeline"] = module
from seqcheck.commandline import main
sys.exit(main(sys.argv[1:]))
"""


def started(checkout: Path, *arguments: str, **environment: str) -> subprocess.Popen[bytes]:
    return subprocess.Popen(
        [sys.executable, "-W", "error", "-c", PROGRAM, *arguments],
        env={**os.environ, "PYTHONPATH": str(checkout), **environment},
        stdin=subprocess.DEVNULL,
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
    )


@pytest.mark.parametrize("arguments", [["--help"], ["--version"], ["check", "--help"]])
def test_help_and_version_load_nothing_heavy(checkout: Path, arguments: list[str]) -> None:
    program = (
        "import sys; from seqcheck.commandline import main; main(sys.argv[1:]);"
        "loaded = {'numpy', 'networkx', 'lark', 'rich', 'yaml'} & set(sys.modules); assert not loaded, loaded"
    )
    done = subprocess.run(
        [sys.executable, "-c", program, *arguments],
        env={**os.environ, "PYTHONPATH": str(checkout)},
        capture_output=True,
        check=False,
    )
    assert done.stderr == b""
    assert done.returncode == 0


def test_the_module_is_the_command(checkout: Path) -> None:
    done = subprocess.run(
        [sys.executable, "-m", "seqcheck", "check"],
        env={**os.environ, "PYTHONPATH": str(checkout)},
        capture_output=True,
        check=False,
    )
    assert done.returncode == 2
    assert b"seqcheck: error: the following arguments are required: FILE" in done.stderr


@posix
@pytest.mark.parametrize("form", ["text", "json"])
def test_a_closed_pipe_ends_quietly(checkout: Path, form: str) -> None:
    process = started(checkout, "check", "LONG", "--format", form)
    assert process.stdout is not None
    assert process.stderr is not None
    assert process.stdout.read(10)
    process.stdout.close()
    assert process.stderr.read() == b""
    process.stderr.close()
    assert process.wait(30) == 1


@posix
def test_a_full_disk_is_told(checkout: Path) -> None:
    full = Path("/dev/full")
    if not full.exists():
        pytest.skip("no /dev/full here")
    with full.open("wb") as nowhere:
        done = subprocess.run(
            [sys.executable, "-c", PROGRAM, "check", "LONG"],
            env={**os.environ, "PYTHONPATH": str(checkout)},
            stdout=nowhere,
            stderr=subprocess.PIPE,
            check=False,
        )
    assert done.stderr == b"seqcheck: error: cannot write the report: No space left on device\n"
    assert done.returncode == 2


@posix
def test_an_interrupt_ends_quietly(checkout: Path) -> None:
    process = started(checkout, "check", "WAIT")
    assert process.stderr is not None
    assert process.stderr.readline() == b"waiting\n"
    process.send_signal(signal.SIGINT)
    out, err = process.communicate(timeout=30)
    assert (process.returncode, out, err) == (130, b"", b"")


@pytest.mark.parametrize(
    ("encoding", "shown"),
    [("utf-8", "lifts 昇降 by ± 5 mm"), ("cp1252", "lifts ?? by ± 5 mm"), ("ascii", "lifts ?? by +- 5 mm")],
)
def test_text_fits_the_encoding_and_json_is_utf_8(checkout: Path, encoding: str, shown: str) -> None:
    out, err = started(checkout, "check", "a.steps", PYTHONIOENCODING=encoding).communicate(timeout=30)
    assert shown in out.decode(encoding)
    assert err == b""
    out, err = started(checkout, "check", "a.steps", "--format", "json", PYTHONIOENCODING=encoding).communicate(
        timeout=30
    )
    assert "lifts 昇降 by ± 5 mm" in out.decode("utf-8")
    assert err == b""


@posix
def test_a_process_without_output_streams_still_gives_its_status(checkout: Path) -> None:
    command = [sys.executable, "-c", PROGRAM, "check", "a.steps"]
    shell = ["sh", "-c", 'exec "$@" >&- 2>&-', "sh", *command]
    environment = {**os.environ, "PYTHONPATH": str(checkout)}
    assert subprocess.run(shell, env=environment, check=False).returncode == 1
