"""What makes ``check`` end with status 1: severities, kinds, a reserve, and not what the text accepts."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from seqcheck.commandline import main
from tests.commandline.conftest import Asked

Output = pytest.CaptureFixture[str]

#: An invented stamp: the pulse of ``press`` holds by 2.5 ms.
THIN = """controller { scan 4..6 ms   input 2..4 ms   output 0.5..1 ms }
valve VS 5/2 bistable { coil YS1 to a   coil YS2 to b   on 12..22 ms }
cylinder stamp on VS { extend 90..130 ms   retract 80..120 ms   sensor BS1 at retracted   sensor BS2 at extended }
sequence main {
    every step within 1 s
    step press { pulse YS1 27 ms   until BS2 }
    step lift { pulse YS2 60 ms   until BS1 }
}
"""
BROKEN = THIN.replace("YS1 27 ms", "YS1 20 ms")


@pytest.mark.parametrize(
    ("fail_on", "status"),
    [
        (["short-pulse"], 1),
        (["overshoot"], 0),
        (["overshoot", "error"], 1),
        (["overshoot", "short-pulse"], 1),
        (["never"], 0),
        (["never", "overshoot"], 0),
        (["never", "short-pulse"], 1),
        (["note", "error"], 1),
    ],
)
def test_kinds_and_severities_add_up(fail_on: list[str], status: int, asked: Asked) -> None:
    options = [word for one in fail_on for word in ("--fail-on", one)]
    assert main(["check", "broken.steps", *options]) == status


def test_a_kind_counts_whatever_its_severity(asked: Asked) -> None:
    assert main(["check", "noted.steps", "--fail-on", "no-watchdog"]) == 1
    assert main(["check", "noted.steps", "--fail-on", "no-watchdog", "--fail-on", "never"]) == 1
    assert main(["check", "noted.steps", "--fail-on", "short-pulse"]) == 0


@pytest.mark.parametrize(
    ("word", "told"),
    [
        ("short-puls", "short-puls is no severity and no kind of finding; did you mean short-pulse?"),
        ("warnings", "warnings is no severity and no kind of finding; did you mean warning?"),
        ("xyz", "xyz is no severity and no kind of finding; there are error, warning, note, never, opposed-coils,"),
    ],
)
def test_an_unknown_word_is_told(word: str, told: str, asked: Asked, capsys: Output) -> None:
    assert main(["check", "broken.steps", "--fail-on", "error", "--fail-on", word]) == 2
    assert asked == []
    assert f"seqcheck: error: --fail-on: {told}" in capsys.readouterr().err


@pytest.mark.parametrize(
    ("reserve", "fail_on", "status"),
    [
        (None, "warning", 0),
        ("2500us", "warning", 0),
        ("2.501 ms", "warning", 1),
        ("5 ms", "error", 0),
        ("5 ms", "short-pulse", 1),
    ],
)
def test_a_reserve(reserve: str | None, fail_on: str, status: int, tmp_path: Path, capsys: Output) -> None:
    file = tmp_path / "stamp.steps"
    file.write_text(THIN, encoding="utf-8")
    asked = ["--reserve", reserve] if reserve else []
    assert main(["check", str(file), *asked, "--fail-on", fail_on]) == status
    assert ("only 2.5 ms left" in capsys.readouterr().out) == (reserve not in (None, "2500us"))


@pytest.mark.parametrize("reserve", ["5", "-5 ms", "much", "0.1 us", "1001 h", "", "5 ms 3"])
def test_no_reserve(reserve: str, asked: Asked, capsys: Output) -> None:
    assert main(["check", "healthy.steps", f"--reserve={reserve}"]) == 2
    told = f"argument --reserve: {reserve!r} is no duration: write a number and us, ms, s or min, as in 5ms"
    assert told in capsys.readouterr().err
    assert asked == []


@pytest.mark.parametrize("fail_on", ["error", "note", "short-pulse"])
def test_what_is_accepted_does_not_count(fail_on: str, tmp_path: Path, capsys: Output) -> None:
    file = tmp_path / "stamp.steps"
    file.write_text(BROKEN, encoding="utf-8")
    assert main(["check", str(file), "--fail-on", fail_on, "--format", "json"]) == 1
    assert _accepted(capsys) == [("findings", None)]
    file.write_text(BROKEN.replace("until BS2 }", "until BS2 } # accept short-pulse: fast spools"), encoding="utf-8")
    assert main(["check", str(file), "--fail-on", fail_on, "--format", "json"]) == 0
    assert _accepted(capsys) == [("clean", "fast spools")]


def test_a_stale_comment_counts_as_a_warning(tmp_path: Path, capsys: Output) -> None:
    file = tmp_path / "stamp.steps"
    file.write_text(THIN.replace("until BS2 }", "until BS2 } # accept short-pulse: fast spools"), encoding="utf-8")
    assert main(["check", str(file)]) == 0
    assert "warning (certain) stale-accept: short-pulse" in capsys.readouterr().out
    assert main(["check", str(file), "--fail-on", "warning"]) == 1
    assert main(["check", str(file), "--fail-on", "stale-accept"]) == 1


def test_a_slip_in_a_comment_is_status_2(tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: Output) -> None:
    monkeypatch.chdir(tmp_path)
    file = Path("stamp.steps")
    file.write_text(BROKEN.replace("until BS2 }", "until BS2 } # accept short-pulse"), encoding="utf-8")
    assert main(["check", str(file), "--fail-on", "never"]) == 2
    shown = " ".join(capsys.readouterr().out.split())
    assert "stamp.steps:6:57: error: accepting short-pulse needs a colon and a reason" in shown


def _accepted(capsys: Output) -> list[tuple[str, str | None]]:
    """For each finding of the JSON report: the verdict of its file, and its reason where it has one."""
    reports = json.loads(capsys.readouterr().out)["reports"]
    return [(report["verdict"], finding.get("accepted")) for report in reports for finding in report["findings"]]
