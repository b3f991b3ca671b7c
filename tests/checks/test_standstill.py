"""A wait for what never comes, while another sequence goes round and round: it is told, and with what it keeps away."""

from __future__ import annotations

from pathlib import Path

from seqcheck.language.source import Source
from seqcheck.machine.findings import Finding
from seqcheck.pipeline import examine_source

CASES = Path(__file__).parents[1] / "cases"

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


def endless_loop(text: str) -> Finding:
    report = examine_source(Source("a.steps", text))
    (found,) = [one for one in report.findings if one.kind == "endless-loop"]
    return found


def test_steps_that_chase_each_other_are_named() -> None:
    """In an ideal controller no read takes time; nothing stands in the way of having played that."""
    found = endless_loop("sequence main { step a { } }")
    assert found.message == "steps follow one another without time passing, main.a among them"
    assert (found.subject, found.step, found.replayed) == ("main.a", "main.a", True)


def test_a_sequence_that_enters_no_step_is_named() -> None:
    found = endless_loop("flag f\nsequence main { choose { when f { step a { dwell 1 s } } otherwise { } } }")
    assert found.message == "sequence main goes round and round at one read and enters no step"


def test_a_round_in_no_time_is_shown_from_its_beginning_to_its_end() -> None:
    found = endless_loop((CASES / "chase_by_choices.steps").read_text(encoding="utf-8"))
    assert found.run[0].time_us == found.run[-1].time_us
    assert [one.event for one in found.run].count("step main.left entered") >= 2
