"""Which sequences are proved together: what ties them, and what does not."""

from __future__ import annotations

import pytest

from seqcheck.engine.parts import parts_of
from seqcheck.language.read import read_machine
from seqcheck.language.source import Source
from seqcheck.machine.model import Machine

#: Two stations with a cylinder, an output and a flag each, and what both might come to share.
DEVICES = """
controller { scan 8..12 ms  input 2..4 ms  output 0.5..1 ms }
io island { update 2..4 ms  input 1 ms  output 1 ms }
valve VA 5/2 spring { coil YA via island  on 18..28 ms  off 25..40 ms }
valve VB 5/2 spring { coil YB via island  on 18..28 ms  off 25..40 ms }
valve VC 5/3 closed centre { coil YC to a  coil YD to b  on 18..28 ms  off 25..40 ms }
cylinder A on VA { extend 380 ms  retract 300 ms  sensor A0 at retracted via island  sensor A1 at extended }
cylinder B on VB { extend 380 ms  retract 300 ms  sensor B0 at retracted via island  sensor B1 at extended }
output KA
output KB
flag FA
flag FB
signal start from outside
"""
ONE, OTHER = "until A1", "until B1"


def machine_of(text: str) -> Machine:
    machine = read_machine(Source("a.steps", text))
    assert isinstance(machine, Machine), machine
    return machine


def parts(one: str, other: str, more: str = "") -> tuple[Machine, ...]:
    sequences = f"sequence main {{ step go {{ {one} }} }}\nsequence side {{ step go {{ {other} }} }}\n"
    return parts_of(machine_of(f"{DEVICES}{more}\n{sequences}"))


def test_sequences_that_share_nothing_are_parts_with_their_own_devices() -> None:
    main, side = parts("set YA  on KA  set FA  until A1", "set YB  on KB  set FB  until B1")
    assert [one.name for one in main.sequences] == ["main"] and [one.name for one in side.sequences] == ["side"]
    assert set(side.valves) == {"VB"} and set(side.coils) == {"YB"} and set(side.cylinders) == {"B"}
    assert set(side.sensors) == {"B0", "B1"} and set(side.outputs) == {"KB"} and set(side.flags) == {"FB"}
    assert set(main.sensors) == {"A0", "A1"} and set(main.outputs) == {"KA"} and set(main.flags) == {"FA"}
    assert main.controller == side.controller and main.islands == side.islands


def test_what_nobody_has_to_do_with_is_in_the_first_part() -> None:
    main, side = parts(ONE, OTHER, "never VC.a\nnever KA")
    assert "VC" in main.valves and "start" in main.signals and "KA" in main.outputs
    assert [rule.text for rule in main.rules] == ["never VC.a", "never KA"] and side.rules == ()


@pytest.mark.parametrize(
    ("one", "other", "more"),
    [
        ("on KA  dwell 1 s", "on KA  dwell 1 s", ""),
        ("set FA  until A1", "until FA", ""),
        ("on KA  until A1", "until not KA", ""),
        ("set YA  until A1", "until YA", ""),
        ("set YA  dwell 1 s", "until A0", ""),
        ("until A0", "until A1", ""),
        ("on YC  dwell 1 s", "on YD  dwell 1 s", ""),
        (ONE, "until main.go", ""),
        ("until start", "until start", ""),
        ("until start", "until not start", ""),
        (ONE, "until press", "signal press follows A.extended"),
        (ONE, OTHER, "signal both follows A.extended and B.extended"),
        (ONE, OTHER, "never A.moving and B.moving"),
        (ONE, OTHER, "never main.go and B.moving"),
        (ONE, OTHER, "limit from VA.a to B1 1 s"),
        (ONE, OTHER, "never A.moving and KA\nnever KA and B.moving"),
        (
            "set YA  dwell 1 s",
            "set YB  dwell 1 s",
            "cylinder C out when VA.a and VB.a in when VA.b { extend 1 s  retract 1 s }",
        ),
    ],
)
def test_what_ties_two_sequences(one: str, other: str, more: str) -> None:
    (whole,) = parts(one, other, more)
    assert [sequence.name for sequence in whole.sequences] == ["main", "side"]


@pytest.mark.parametrize("more", ["never main.go and A.moving", "limit cycle side 1 s", "limit from B0 to side.go 1 s"])
def test_a_rule_over_one_goes_with_it(more: str) -> None:
    for part in parts(ONE, OTHER, more):
        assert [rule.text for rule in part.rules] == ([more] if (part.sequences[0].name in more) else [])


def test_a_choice_asks_as_a_step_does() -> None:
    asked = "choose { when B1 { step a { dwell 1 s } } otherwise { step b { dwell 1 s } } }"
    tied = machine_of(f"{DEVICES}sequence main {{ {asked} }}\nsequence side {{ step go {{ {OTHER} }} }}\n")
    assert parts_of(tied) == (tied,)


def test_a_device_and_a_sequence_of_one_name_are_no_tie() -> None:
    main, side = parts("on side  dwell 1 s", OTHER, "output side")
    assert "side" in main.outputs and side.outputs == {}


def test_a_chain_ties_the_first_and_the_third_and_leaves_the_second() -> None:
    text = "".join(
        f"sequence {name} {{ step go {{ {exit}  dwell 1 s }} }}\n"
        for name, exit in (("one", "set FA"), ("two", "on KB"), ("three", "until FB"), ("four", "reset FB until FA"))
    )
    first, second = parts_of(machine_of(DEVICES + text))
    assert [one.name for one in first.sequences] == ["one", "three", "four"]
    assert [one.name for one in second.sequences] == ["two"]


def test_one_sequence_is_the_machine_itself() -> None:
    only = machine_of(f"{DEVICES}sequence main {{ step go {{ until A1 }} }}")
    (part,) = parts_of(only)
    assert part is only
