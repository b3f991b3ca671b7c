"""How much is left between what one choice brings and what another one does, whichever ways are played first."""

from __future__ import annotations

from pathlib import Path

import pytest

from seqcheck.engine import explore
from seqcheck.language.source import Source
from seqcheck.machine.findings import Report
from seqcheck.pipeline import examine, examine_source

CASES = sorted((Path(__file__).parents[1] / "cases").glob("*.steps"))
DEVICES = """
controller { scan 8..12 ms  input 2..4 ms  output 0.5..1 ms }
output K1 { on 5 ms  off 3..6 ms }
output K2 { on 5 ms  off 3..6 ms }
never K1 and K2
"""
RULE = "never K1 and K2"
#: K1 goes off 8..12 + 0.5..1 + 3..6 after the read that leaves its step, K2 comes on 8..12 + 0.5..1 + 5 after the one
#: that enters its own: 13.5 - 19 = -5.5 from read to read.
LEFT = -5_500
BRANCHES = [(0, 0), (0, 1), (1, 0), (1, 1)]


def machine(first: int, between: list[tuple[int, int]], second: int) -> str:
    """K1 in the branch ``first`` of a choice, K2 in the branch ``second`` of another, choices of dwells ``between``."""

    def beside(name: str, branch: int) -> tuple[str, str]:
        branches = f"step {name} {{ on {name}  dwell 50 ms }}", f"step no_{name} {{ dwell 50 ms }}"
        return branches if branch == 0 else branches[::-1]

    ways = [beside("K1", first)]
    ways += [(f"step a{one} {{ dwell {one} ms }}", f"step b{other} {{ dwell {other} ms }}") for one, other in between]
    ways += [beside("K2", second)]
    signals = "".join(f"signal s{number} from outside\n" for number in range(len(ways)))
    choices = "".join(
        f"    choose {{ when s{number} {{ {one} }} otherwise {{ {other} }} }}\n"
        for number, (one, other) in enumerate(ways)
    )
    return f"{DEVICES}{signals}sequence main {{\n{choices}    step rest {{ dwell 1 s }}\n}}\n"


def examined(text: str, reserve_us: int = 0) -> Report:
    report = examine_source(Source("a.steps", text), reserve_us=reserve_us)
    assert not report.problems, report.problems
    return report


def margins(report: Report) -> list[int | None]:
    return [one.margin_us for one in report.margins if one.subject == RULE]


@pytest.mark.parametrize(("first", "second"), BRANCHES)
def test_one_choice_behind_another(first: int, second: int) -> None:
    text = machine(first, [], second).replace(
        "    choose { when s1", "    step apart { dwell 30 ms }\n    choose { when s1"
    )
    assert margins(examined(text)) == [30_000 + LEFT]
    thin = [one.margin_us for one in examined(text, 25_000).findings if one.subject == RULE]
    assert thin == [30_000 + LEFT]


@pytest.mark.parametrize(("first", "second"), BRANCHES)
def test_brief_choices_lie_between(first: int, second: int) -> None:
    assert margins(examined(machine(first, [(50, 20), (25, 60)], second))) == [45_000 + LEFT]


@pytest.mark.parametrize(("first", "second"), BRANCHES)
def test_what_lies_further_apart_is_looked_for_when_that_is_asked(first: int, second: int) -> None:
    text = machine(first, [(150, 90), (85, 160)], second)
    assert margins(examined(text, 200_000)) == [175_000 + LEFT]
    assert [one.margin_us for one in examined(text, 200_000).findings if one.subject == RULE] == [175_000 + LEFT]


def test_where_not_every_way_was_played_behind_every_other_the_report_says_so(monkeypatch: pytest.MonkeyPatch) -> None:
    text = machine(1, [(50, 20)], 1)
    told = "margins across choices may be smaller: not every way was played behind every other"
    assert told not in examined(text).assumptions
    most = [1, 1_000_000]
    monkeypatch.setattr(explore, "most_work", lambda machine: most.pop())
    assert told in examined(text).assumptions


@pytest.mark.parametrize("file", CASES, ids=lambda file: file.stem)
def test_a_margin_says_what_a_finding_does(file: Path) -> None:
    """Also where only several plays show it, or it is broken for good."""
    report = examine(str(file))
    listed = {(one.kind, one.subject, one.step, one.place): one.margin_us for one in report.margins}
    for one in report.findings:
        key = (one.kind, one.subject, one.step, one.place)
        assert listed.get(key, one.margin_us) == one.margin_us
