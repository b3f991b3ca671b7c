"""How many devices and steps are named where ordinary times stand in, and how many only counted."""

from __future__ import annotations

from seqcheck.language.source import Source
from seqcheck.machine.places import Place
from seqcheck.pipeline import examine_source

CONTROLLER = "controller { scan 8..12 ms  input 2..4 ms  output 0.5..1 ms }\n"


def note_on(text: str) -> str:
    report = examine_source(Source("a.steps", CONTROLLER + text), ["assume:air"])
    assert not report.problems, report.problems
    (note,) = [one.message for one in report.findings if one.kind == "assumed-times"]
    return note


def valves(count: int) -> str:
    """Valves of which nobody says how long they take to energize; each has its step, and one step has none."""
    devices = "".join(f"valve V{n} 5/2 spring {{ coil Y{n}  off 25..40 ms }}\n" for n in range(1, count + 1))
    steps = "".join(f" step s{n} {{ on Y{n}  dwell 1 s }}" for n in range(1, count + 1))
    return f"{devices}sequence main {{{steps} step rest {{ dwell 1 s }} }}"


def test_six_are_named() -> None:
    assert note_on(valves(6)) == (
        "nobody gives on of V1; on of V2; on of V3; on of V4; on of V5; on of V6: times ordinary for air stand in"
        " (common practice, no source), and the cycle times rest on them, and the figures of main.s1, main.s2, main.s3,"
        " main.s4, main.s5, main.s6"
    )


def test_of_eight_six_are_named_and_two_counted() -> None:
    assert note_on(valves(8)) == (
        "nobody gives on of V1; on of V2; on of V3; on of V4; on of V5; on of V6; and 2 more: times ordinary for air"
        " stand in (common practice, no source), and the cycle times rest on them, and the figures of main.s1, main.s2,"
        " main.s3, main.s4, main.s5, main.s6, and 2 more"
    )


def test_where_every_step_rests_on_them_all_figures_do() -> None:
    text = valves(2).replace(" step rest { dwell 1 s }", "")
    assert note_on(text).endswith("and every figure rests on them")


def test_a_valve_that_no_step_switches() -> None:
    text = "valve V1 5/2 spring { coil Y1  off 25..40 ms }\nsequence main { step rest { dwell 1 s } }"
    assert note_on(text).endswith("and no step switches these")


def test_steps_that_wait_for_a_cylinder_whose_valve_is_assumed_rest_on_it() -> None:
    """Both the step that switches and the one that only waits; the lamp has nothing to do with it."""
    text = (
        "valve V1 5/2 spring { coil Y1  off 25..40 ms }\n"
        "cylinder clamp on V1 { extend 400 ms  retract 300 ms  sensor B1 at retracted  sensor B2 at extended }\n"
        "output K1\nsequence main { every step within 9 s  step go { set Y1 } step lamp { on K1 }"
        " step there { until B2 }"
        " step back { reset Y1  until B1 } }"
    )
    assert note_on(text).endswith("the figures of main.go, main.there, main.back")


def test_where_only_the_controller_is_missing_the_note_stands_at_the_head_of_the_text() -> None:
    """Nothing in the text is the place of what the text does not have."""
    text = "output K1\nsequence main { step a { on K1  dwell 1 s }  step b { dwell 1 s } }"
    report = examine_source(Source("a.steps", text), ["assume:air"])
    (note,) = [one for one in report.findings if one.kind == "assumed-times"]
    assert (note.subject, note.step) == ("controller", None)
    assert note.place == Place("a.steps", 1, 1, 1, 1)
    assert "of the controller: times ordinary for air stand in" in note.message
    assert note.message.endswith("and every figure rests on them")
