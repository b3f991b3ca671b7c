"""Limits over several runs of the state graph: their ways are worked out once, and what they rest on is said."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path

import pytest

from seqcheck.checks import over_limit
from seqcheck.language.source import Source
from seqcheck.pipeline import examine, examine_source

CASES = Path(__file__).parents[1] / "cases"


def test_the_ways_of_limits_are_worked_out_once(monkeypatch: pytest.MonkeyPatch) -> None:
    asked, really = [], over_limit.crossings

    def counted(*given: object, **named: object) -> Mapping[str, object]:
        asked.append(given)
        return really(*given, **named)  # type: ignore[arg-type]

    monkeypatch.setattr(over_limit, "crossings", counted)
    assert examine(str(CASES / "choose_twice_over_limit.steps")).findings
    assert len(asked) == 1


def test_the_shortest_way_is_played_in_one() -> None:
    (finding,) = examine(str(CASES / "choose_twice_undercut.steps")).findings
    assert finding.replayed
    entered = [moment.event for moment in finding.run if moment.event.endswith("entered")]
    assert "step main.drop entered" in entered and "step main.narrow entered" in entered
    assert finding.message.endswith("can be undercut by 1 us")


def test_what_was_added_up_and_may_be_wide_is_told_so() -> None:
    """In truth no cycle takes longer than 1500 (see the case): 1600 is safe, and said to be added up."""
    case = (CASES / "choose_while_something_is_under_way.steps").read_text(encoding="utf-8")
    for limit, over in (("1600 ms", None), ("1599 ms", "1 ms")):
        found = examine_source(Source("case.steps", f"{case}\nlimit cycle {limit}\n")).findings
        told = [one.message for one in found if one.kind == "over-limit"]
        assert told == (
            [
                f"a cycle of main can take {over} longer than 1.599 s, or less or not at all: "
                "it is added up over states with something under way"
            ]
            if over
            else []
        )


def test_what_no_play_undercuts_is_added_up() -> None:
    """The least of all three choices, none of which is taken that way in the typical run: 100 + 20 + 30 + 40."""
    branches = [(200, 20), (300, 30), (400, 40)]
    signals = "\n".join(f"signal s{number} from outside" for number in range(3))
    choices = "\n".join(
        f"choose {{ when s{number} {{ step long{number} {{ dwell {long} ms }} }} "
        f"otherwise {{ step short{number} {{ dwell {short} ms }} }} }}"
        for number, (long, short) in enumerate(branches)
    )
    text = f"{signals}\nsequence main {{ step weigh {{ dwell 100 ms }} {choices} step rest {{ dwell 1 s }} }}"
    for least, margins in (("190.001", [-1]), ("190", [])):
        report = examine_source(Source("a.steps", f"{text}\nlimit from main.weigh to main.rest {least}..2000 ms\n"))
        assert not report.problems
        assert [one.margin_us for one in report.findings] == margins
