"""What a rule forbids, over several runs of the state graph: no play has all of it in one."""

from __future__ import annotations

from seqcheck.language.source import Source
from seqcheck.pipeline import examine_source

#: The lamp is on while three choices go by, whose long branches take 300, 200 and 100 ms: 100 + 600, four reads late by
#: up to 12 each, and by 4 + 0.5 more written and switched at the end than at the beginning: 752.5.
LAMP = """controller { scan 8..12 ms  input 2..4 ms  output 0.5..1 ms }
output lamp
signal good from outside
signal big from outside
signal red from outside
sequence main {
    step weigh { set lamp  dwell 100 ms }
    choose {
        when good { step keep { dwell 50 ms } }
        otherwise { step drop { dwell 300 ms } }
    }
    choose {
        when big { step wide { dwell 20 ms } }
        otherwise { step narrow { dwell 200 ms } }
    }
    choose {
        when red { step stamp { dwell 30 ms } }
        otherwise { step print { dwell 100 ms } }
    }
    step rest { reset lamp  dwell 10 ms }
}
"""


def told(rule: str) -> list[tuple[str, int | None, bool | None]]:
    report = examine_source(Source("a.steps", f"{LAMP}{rule}\n"))
    assert not report.problems, report.problems
    return [(one.message, one.margin_us, one.replayed) for one in report.findings]


def test_what_is_tolerated_for_just_as_long_is_kept() -> None:
    assert told("never lamp for 752500 us") == []


def test_how_much_too_long_it_can_be_is_added_up() -> None:
    """Of the longest way no play shows all; of some that are too long for 600 ms one does, and is replayed."""
    by = "for up to 1 us longer than the 752.499 ms tolerated"
    assert told("never lamp for 752499 us") == [(f"`never lamp for 752499 us` can be broken, {by}", -1, None)]
    by = "for up to 152.5 ms longer than the 600 ms tolerated"
    assert told("never lamp for 600 ms") == [(f"`never lamp for 600 ms` can be broken, {by}", -152_500, True)]
