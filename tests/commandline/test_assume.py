"""``--assume``: ordinary times stand in for what nobody gives, and everything that rests on them says so."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from seqcheck.commandline import main
from seqcheck.language.ordinary import MEDIA

Output = pytest.CaptureFixture[str]

#: An invented feeder. Nobody gives the times of the clamp's valve and of the clamp; the lift has all of its own.
TEXT = """controller { scan 8..12 ms   input 2..4 ms   output 0.5..1 ms }
valve V1 5/2 spring { coil Y1   off 25..40 ms }
valve V2 5/2 bistable { coil Y2 to a   coil Y3 to b   on 20..30 ms }
cylinder clamp on V1 { retract 300..360 ms   sensor B1 at retracted   sensor B2 at extended }
cylinder lift on V2 { extend 600..700 ms   retract 500..620 ms   sensor B3 at retracted   sensor B4 at extended }
sequence main {
    every step within 9 s
    clamp+
    lift+
    lift-
    clamp-
}
"""


@pytest.fixture
def file(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> str:
    monkeypatch.chdir(tmp_path)
    Path("feeder.steps").write_text(TEXT, encoding="utf-8")
    return "feeder.steps"


def report(capsys: Output, *arguments: str) -> dict[str, object]:
    assert main(["check", *arguments, "--format", "json"]) == 0
    (found,) = json.loads(capsys.readouterr().out)["reports"]
    assert isinstance(found, dict)
    return found


def test_without_it_each_missing_time_is_an_error(file: str, capsys: Output) -> None:
    assert main(["check", file]) == 2
    out = " ".join(capsys.readouterr().out.split())
    assert out.count("nobody gives the time") == 2
    assert out.count("--assume air or --assume oil") == 1


def test_one_note_and_proved_under_say_what_rests_on_them(file: str, capsys: Output) -> None:
    found = report(capsys, file, "--assume", "air")
    devices = "on of V1; extend of clamp"
    rests = "the cycle times rest on them, and the figures of main.clamp+, main.clamp-"
    (note,) = found["findings"]  # type: ignore[misc]
    assert (note["kind"], note["severity"], note["line"], note["subject"]) == ("assumed-times", "note", 2, "V1")
    assert note["message"] == (
        f"nobody gives {devices}: times ordinary for air stand in (common practice, no source), and {rests}"
    )
    proved = found["proved_under"]
    assert isinstance(proved, dict)
    assert proved["times"] == ["assume:air"]
    assert f"ordinary times assumed ({devices}), so {rests}" in proved["assumptions"]
    assert found["verdict"] == "clean"


def test_the_times_are_those_of_the_shipped_sheet(file: str, capsys: Output) -> None:
    """main.clamp+: round 8..12, output 0.5..1, valve 15..45 and stroke 250..600 assumed, filter 2..4, wait 0..12 ms."""
    steps = report(capsys, file, "--assume", "air")["steps"]
    assert isinstance(steps, dict)
    assert (steps["main.clamp+"]["min_us"], steps["main.clamp+"]["max_us"]) == (275_500, 674_000)


@pytest.mark.parametrize("order", [["--assume", "oil", "--times", "m.yaml"], ["--times", "m.yaml", "--assume", "oil"]])
def test_a_given_time_wins_wherever_the_option_stands(order: list[str], file: str, capsys: Output) -> None:
    Path("m.yaml").write_text("valves: {V1: {on: 18..28 ms}}\ncylinders: {clamp: {extend: 1 s}}\n", encoding="utf-8")
    found = report(capsys, file, *order)
    assert found["findings"] == []
    assert found["proved_under"]["times"] == ["m.yaml"]  # type: ignore[index]


def test_without_a_controller_everything_rests_on_an_ordinary_one(file: str, capsys: Output) -> None:
    Path(file).write_text(TEXT.partition("\n")[2], encoding="utf-8")
    (note,) = report(capsys, file, "--assume", "oil")["findings"]  # type: ignore[misc]
    assert "scan, input, output of the controller" in note["message"]
    assert note["message"].endswith("and every figure rests on them")


@pytest.mark.parametrize("medium", MEDIA)
def test_every_kind_of_device_has_ordinary_times(medium: str, tmp_path: Path, capsys: Output) -> None:
    file = tmp_path / "kinds.steps"
    file.write_text(
        "controller { input 2 ms }\nio bus { }\nvalve V1 5/2 spring { coil Y1 via bus }\n"
        "valve V2 5/2 bistable { coil Y2 to a coil Y3 to b }\nvalve V3 5/3 float centre { coil Y4 to a coil Y5 to b }\n"
        "valve V4 5/2 motor { coil Y6 to a coil Y7 to b }\ncylinder A on V1 { sensor a1 at extended }\n"
        "sequence main { step up { set Y1 until a1 } }\n",
        encoding="utf-8",
    )
    main(["check", str(file), "--assume", medium])
    assert "nobody gives the time" not in " ".join(capsys.readouterr().out.split())


@pytest.mark.parametrize("command", ["times", "margins"])
def test_pages_take_it_too(command: str, file: str, capsys: Output) -> None:
    assert main([command, file, "--assume", "air"]) == 0
    assert "ordinary times assumed" in " ".join(capsys.readouterr().out.split())


def test_compare_takes_it_for_both_sides(file: str, capsys: Output) -> None:
    Path("slower.steps").write_text(TEXT.replace("600..700", "600..750"), encoding="utf-8")
    assert main(["compare", file, "slower.steps", "--assume", "air"]) == 1
    assert "main.lift+ 50 ms slower at most" in " ".join(capsys.readouterr().out.split())


def test_what_is_complete_is_reported_as_without_it(file: str, capsys: Output) -> None:
    whole = TEXT.replace("off 25", "on 18..28 ms off 25").replace("retract 300", "extend 380..450 ms retract 300")
    Path(file).write_text(whole, encoding="utf-8")
    assert report(capsys, file) == report(capsys, file, "--assume", "air")


def test_another_medium_is_refused(file: str, capsys: Output) -> None:
    assert main(["check", file, "--assume", "steam"]) == 2
    assert "invalid choice: 'steam'" in capsys.readouterr().err
