"""A wait for what never comes, while another sequence goes round and round: it is told, and with what it keeps away."""

from __future__ import annotations

from seqcheck.language.source import Source
from seqcheck.machine.findings import Finding
from seqcheck.pipeline import examine_source

GOES_ROUND = """controller { scan 8..12 ms }
signal s from outside
flag done
sequence main { step a { dwell 100 ms }  step b { dwell 50 ms } }
"""
#: Else the two would be proved apart.
TIED = "never main.a and side.ready for 100 s"


def dead_ends(side: str) -> list[Finding]:
    report = examine_source(
        Source("a.steps", f"{GOES_ROUND}sequence side {{ step ready {{ dwell 30 ms }} {side} }}\n{TIED}")
    )
    assert not report.problems, report.problems
    return [one for one in report.findings if one.kind == "dead-end"]


def test_a_step_that_waits_for_good_while_others_go_round() -> None:
    """``done`` is set behind the very step that waits for it."""
    (found,) = dead_ends("step stuck { until done }  step never { set done  dwell 20 ms }")
    assert found.subject == found.step == "side.stuck"
    assert found.certain
    assert found.message == (
        "side.stuck is never left: it waits for done, and nothing brings that any more (side.never never entered)"
    )


def test_how_many_more_steps_are_never_entered_is_counted() -> None:
    stuck = "step stuck { until done }  step c { set done }  step d { dwell 1 s }"
    (found,) = dead_ends(stuck)
    assert found.message.endswith("(side.c and 1 more never entered)")
    (found,) = dead_ends(f"{stuck}  step e {{ dwell 1 s }}")
    assert found.message.endswith("(side.c and 2 more never entered)")


def test_a_choice_that_waits_for_good() -> None:
    (found,) = dead_ends("choose { when done { step c { set done } } }")
    assert (found.subject, found.step) == ("side.ready", None)
    assert "it waits for done, and nothing brings that any more" in found.message


def test_what_a_signal_from_outside_or_a_watchdog_may_yet_end_is_no_dead_end() -> None:
    assert dead_ends("step stuck { until s }") == []
    assert dead_ends("step stuck { until done  within 5 s else ready }  step c { set done }") == []
