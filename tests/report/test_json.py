from __future__ import annotations

import json
from dataclasses import replace

import pytest
from hypothesis import given
from hypothesis import strategies as st

from seqcheck.machine.findings import ChoiceTime, Duration, Problem
from seqcheck.report.json import render_json
from tests.report.samples import ASSUMPTIONS, SHEETS, healthy, place, short_pulse, unknown_valve, unreadable


def test_the_whole_object_key_by_key() -> None:
    report = json.loads(render_json([healthy(short_pulse())]))
    assert report == {
        "format": "seqcheck-report",
        "version": 1,
        "reports": [
            {
                "file": "stapler.steps",
                "machine": "Crate stapler",
                "verdict": "findings",
                "findings": [
                    {
                        "kind": "short-pulse",
                        "severity": "error",
                        "certain": False,
                        "subject": "V3",
                        "step": "main.tap",
                        "line": 25,
                        "column": 20,
                        "message": "Y4 can go off before V3 has reached a, so that V3 stays at b",
                        "margin_us": -3000,
                        "replayed": True,
                        "witness": [
                            {"t_us": 0, "event": "step main.tap entered"},
                            {"t_us": 12500, "event": "Y4 energized"},
                            {"t_us": 80000, "event": "Y4 off while V3 is still shifting"},
                        ],
                    }
                ],
                "errors": [],
                "proved_under": {"times": list(SHEETS), "assumptions": list(ASSUMPTIONS)},
                "cycles": {"main": {"min_us": 1905000, "typical_us": 2139500, "max_us": 2374000}},
                "steps": {
                    "main.clamp+": {"min_us": 408500, "typical_us": 457750, "max_us": 507000},
                    "main.ready": {"min_us": 0, "typical_us": 0, "max_us": None},
                },
                "handovers": [
                    {
                        "valve": "V2",
                        "from": "Y2",
                        "to": "Y3",
                        "line": 19,
                        "least_gap_us": -500,
                        "greatest_overlap_us": 500,
                    },
                    {
                        "valve": "V3",
                        "from": "Y4",
                        "to": "Y5",
                        "line": 25,
                        "least_gap_us": 40000,
                        "greatest_overlap_us": 0,
                    },
                ],
                "margins": [
                    {
                        "kind": "tight-watchdog",
                        "subject": "main.raise",
                        "step": "main.raise",
                        "line": 20,
                        "margin_us": 1241000,
                    },
                    {"kind": "short-pulse", "subject": "V3", "step": "main.tap", "line": 25, "margin_us": 32000},
                    {
                        "kind": "tight-watchdog",
                        "subject": "main.ready",
                        "step": "main.ready",
                        "line": 18,
                        "margin_us": None,
                    },
                ],
                "choices": [],
            }
        ],
    }


def test_keys_stand_in_the_order_of_the_description() -> None:
    report = json.loads(render_json([healthy(short_pulse())]))["reports"][0]
    assert " ".join(report) == (
        "file machine verdict findings errors proved_under cycles steps handovers margins choices"
    )
    assert " ".join(report["findings"][0]) == (
        "kind severity certain subject step line column message margin_us replayed witness"
    )


def test_a_cycle_by_choice_has_its_branch_and_no_typical_time() -> None:
    choices = (
        ChoiceTime("main", place(27, 9), "when in line 27", Duration(1_905_000, 1_905_000, 2_374_000)),
        ChoiceTime("main", place(28, 9), "otherwise in line 28", Duration(2_000_000, 2_000_000, None)),
    )
    report = json.loads(render_json([replace(healthy(), choices=choices)]))["reports"][0]
    assert list(report)[-1] == "choices"
    assert report["choices"] == [
        {"sequence": "main", "line": 27, "way": "when in line 27", "min_us": 1905000, "max_us": 2374000},
        {"sequence": "main", "line": 28, "way": "otherwise in line 28", "min_us": 2000000, "max_us": None},
    ]


def test_an_unreadable_text_has_its_errors_and_no_machine() -> None:
    report = json.loads(render_json([replace(unreadable(), machine="half read")]))["reports"][0]
    assert report["machine"] is None
    assert report["verdict"] == "unreadable"
    assert report["errors"] == [{"line": 3, "column": 18, "message": "there is no valve V9; did you mean V1?"}]
    assert report["findings"] == report["margins"] == report["handovers"] == report["choices"] == []
    assert report["cycles"] == report["steps"] == {}
    assert report["proved_under"] == {"times": [], "assumptions": []}


def test_an_error_in_a_timing_sheet_names_the_sheet() -> None:
    problem = Problem(place(2, 1, "a.times.yaml"), "no such unit")
    errors = json.loads(render_json([unreadable(problem)]))["reports"][0]["errors"]
    assert errors == [{"line": 2, "column": 1, "message": "a.times.yaml: no such unit"}]


def test_margin_and_replay_may_be_unknown_and_a_run_missing() -> None:
    finding = short_pulse(margin_us=None, replayed=None, run=(), step=None)
    shown = json.loads(render_json([healthy(finding)]))["reports"][0]["findings"][0]
    assert (shown["margin_us"], shown["replayed"], shown["witness"], shown["step"]) == (None, None, [], None)


def test_the_same_reports_give_the_same_bytes() -> None:
    reports = [healthy(short_pulse()), unreadable(unknown_valve("\x00"))]
    assert render_json(reports) == render_json(reports)
    assert render_json(reports).endswith("\n}\n")
    assert render_json([]) == '{\n  "format": "seqcheck-report",\n  "version": 1,\n  "reports": []\n}\n'


@pytest.mark.parametrize("name", ["昇降.steps", "Förderband"])
def test_letters_of_any_script_stand_as_they_are(name: str) -> None:
    assert f'"file": "{name}"' in render_json([replace(healthy(), file=name)])


@given(st.text(st.characters(codec=None), max_size=50))
def test_any_text_is_written_as_utf_8(text: str) -> None:
    shown = render_json([replace(healthy(), file=text, machine=text)]).encode("utf-8")
    read = json.loads(shown)["reports"][0]["machine"]
    assert [a for a, b in zip(read, text, strict=True) if a != b and not 0xD800 <= ord(b) < 0xE000] == []
