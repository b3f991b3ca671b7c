"""From a text with comments that accept findings to its report."""

from __future__ import annotations

import re
from dataclasses import replace
from pathlib import Path

import pytest

from seqcheck.language.source import Source
from seqcheck.machine.findings import Finding, Report, Severity
from seqcheck.pipeline import examine_source

#: An invented stamp: the pulse of ``press`` (line 7) is 4.5 ms short, that of ``lift`` (line 8) long enough.
STAMP = """machine "Stamp"
controller { scan 4..6 ms   input 2..4 ms   output 0.5..1 ms }
valve VS 5/2 bistable { coil YS1 to a   coil YS2 to b   on 12..22 ms }
cylinder stamp on VS { extend 90..130 ms   retract 80..120 ms   sensor BS1 at retracted   sensor BS2 at extended }
sequence main {
    every step within 1 s
    step press { pulse YS1 20 ms   until BS2 }
    step lift { pulse YS2 60 ms   until BS1 }
}
"""
PRESS = "until BS2 }"
LIFT = "until BS1 }"


def report_of(text: str) -> Report:
    report = examine_source(Source("stamp.steps", text))
    assert not report.problems, report.problems
    return report


def behind(statement: str, comment: str, text: str = STAMP) -> str:
    """The text with a comment behind the statement; no line moves."""
    return text.replace(statement, f"{statement}   # {comment}")


def test_an_accepted_finding_stays_as_it_was_and_does_not_count() -> None:
    (plain,) = report_of(STAMP).findings
    accepted = report_of(behind(PRESS, "accept short-pulse: all spools measured below 17 ms"))
    (finding,) = accepted.findings
    reason = "all spools measured below 17 ms"
    assert replace(plain, accepted=reason, source=None) == replace(finding, source=None)
    assert (accepted.verdict, accepted.counting) == ("clean", ())
    assert report_of(STAMP).verdict == "findings"


def test_everything_but_the_findings_is_as_without_the_comment() -> None:
    plain, accepted = report_of(STAMP), report_of(behind(PRESS, "accept short-pulse: why"))
    assert accepted.margins == plain.margins
    assert (accepted.cycles, accepted.steps, accepted.handovers) == (plain.cycles, plain.steps, plain.handovers)
    said = "what is accepted happens, or does not, as it does at typical times"
    assert accepted.assumptions == (*plain.assumptions, said)


def test_a_comment_on_the_line_before() -> None:
    text = STAMP.replace("    step press", "    # accept short-pulse: why\n    step press")
    assert [one.accepted for one in report_of(text).findings] == ["why"]


@pytest.mark.parametrize(
    ("statement", "comment", "line"),
    [
        (LIFT, "accept short-pulse: the right kind in another line", 8),
        (PRESS, "accept coil-handover: another kind in the right line", 7),
        ("every step within 1 s", "accept short-pulse: behind a statement it speaks of this line alone", 6),
    ],
)
def test_what_accepts_nothing_is_stale_and_the_finding_counts(statement: str, comment: str, line: int) -> None:
    report = report_of(behind(statement, comment))
    stale, short = report.findings
    assert (short.kind, short.accepted) == ("short-pulse", None)
    kind = comment.split()[1].rstrip(":")
    told = (stale.kind, stale.severity, stale.certain, stale.subject, stale.place.line, stale.accepted)
    assert told == ("stale-accept", Severity.WARNING, True, kind, line, None)
    assert (stale.run, stale.replayed, stale.margin_us) == ((), None, None)


def test_a_comment_left_over_after_the_mend_is_stale() -> None:
    mended = behind(PRESS, "accept short-pulse: why").replace("YS1 20 ms", "YS1 25 ms")
    report = report_of(mended)
    assert [one.kind for one in report.findings] == ["stale-accept"]
    assert report.verdict == "findings"


def test_a_stale_comment_cannot_be_accepted() -> None:
    text = behind(LIFT, "accept stale-accept: why")
    (problem,) = examine_source(Source("stamp.steps", text)).problems
    assert problem.message == "no kind of finding `stale-accept` can be accepted"
    assert problem.source == text.split("\n")[7]


def test_a_slip_in_a_comment_makes_the_text_unreadable() -> None:
    report = examine_source(Source("stamp.steps", behind(PRESS, "accept short-pulse:")))
    assert report.verdict == "unreadable"
    assert [(one.place.line, one.message) for one in report.problems] == [(7, "accepting short-pulse needs a reason")]


def test_a_note_can_be_accepted() -> None:
    bare = STAMP.replace("    every step within 1 s\n", "").replace("YS1 20 ms", "YS1 25 ms")
    assert [one.kind for one in report_of(bare).findings] == ["no-watchdog"]
    report = report_of(behind("sequence main {", "accept no-watchdog: the line has one", bare))
    assert [one.accepted for one in report.findings] == ["the line has one"]


def test_where_the_sequence_gets_stuck_no_comment_is_called_stale() -> None:
    """Nothing behind the dead end was played: the comment may well accept something there."""
    stuck = STAMP.replace("pulse YS1 20 ms   until BS2", "until BS2")
    report = report_of(behind(LIFT, "accept short-pulse: why", stuck))
    assert "dead-end" in {one.kind for one in report.findings}
    assert "stale-accept" not in {one.kind for one in report.findings}


def test_what_counts_comes_first() -> None:
    text = (
        behind(LIFT, "accept short-pulse: why")
        .replace("YS2 60 ms", "YS2 20 ms")
        .replace("    every step within 1 s\n", "")
    )
    found = [(one.kind, one.accepted) for one in report_of(text).findings]
    assert found == [("short-pulse", None), ("no-watchdog", None), ("short-pulse", "why")]


def test_one_comment_accepts_every_finding_of_its_kind_in_the_line() -> None:
    two = STAMP.replace("\n    step lift", " step lift").replace("YS2 60 ms", "YS2 20 ms")
    report = report_of(behind(LIFT, "accept short-pulse: why", two))
    assert _reasons(report.findings) == [("main.lift", "why"), ("main.press", "why")]


def test_the_example_of_the_reference_accepts_all_that_is_found() -> None:
    reference = (Path(__file__).parents[1] / "grammar" / "LANGUAGE.md").read_text(encoding="utf-8")
    (text,) = [one for one in re.findall(r"^```steps\n(.*?)^```", reference, re.M | re.S) if "# accept" in one]
    report = report_of(text)
    assert report.verdict == "clean"
    assert sorted(one.kind for one in report.findings if one.accepted) == ["cut-stroke", "early-dwell"]
    assert report.counting == ()


def _reasons(findings: tuple[Finding, ...]) -> list[tuple[str | None, str | None]]:
    return sorted((one.step, one.accepted) for one in findings)


def test_a_comment_in_a_part_of_its_own_is_held_against_all_findings() -> None:
    """The lamp, first in the text, shares nothing with the stamp; the siren is used by neither."""
    lamp = "output H1\noutput siren  # accept unused: for later\nsequence lamp { step lit { on H1  dwell 1 s } }\n"
    text = behind(PRESS, "accept short-pulse: why").replace("sequence main", f"{lamp}sequence main")
    report = report_of(text)
    assert {(one.kind, one.accepted) for one in report.findings} == {("short-pulse", "why"), ("unused", "for later")}
    assert report.verdict == "clean"
    stale = report_of(behind(LIFT, "accept short-pulse: why").replace("sequence main", f"{lamp}sequence main"))
    assert {one.kind for one in stale.counting} == {"short-pulse", "stale-accept"}
