"""Records are equal by their values, may be keys, and mypy alone keeps anybody from changing one."""

from __future__ import annotations

import subprocess
import sys
from dataclasses import field, replace
from pathlib import Path

import pytest

from seqcheck.machine.records import record


@record
class Port:
    name: str
    size: int
    remark: str = field(default="", compare=False)


@record
class Vent:
    name: str
    size: int


@record
class Plug:
    pass


def test_records_are_equal_where_all_that_is_compared_is() -> None:
    assert Port("P", 8) == Port("P", 8, "renewed")
    assert Port("P", 8) != Port("P", 10)
    assert Port("P", 8) != Vent("P", 8)
    assert Plug() == Plug()


def test_records_are_keys_by_their_values() -> None:
    assert {Port("P", 8): 1}[Port("P", 8, "renewed")] == 1
    assert {Plug(), Plug()} == {Plug()}


def test_records_show_their_values_and_can_be_replaced() -> None:
    assert repr(replace(Port("P", 8), size=10)) == "Port(name='P', size=10, remark='')"


@record
class Row:
    port: Port
    spares: list[str] = field(default_factory=list)


def test_records_are_made_by_place_or_by_name_with_what_is_left_out() -> None:
    """The first one of its class, too, with which its ``__init__`` is compiled."""
    first, second = Row(port=Port("P", 8)), Row(Port("A", 6), ["x"])
    assert (first.port.name, first.spares, second.spares) == ("P", [], ["x"])
    first.spares.append("y")
    assert Row(first.port).spares == []
    for wrong in ({}, {"port": first.port, "vent": 1}):
        with pytest.raises(TypeError, match="__init__"):
            Row(**wrong)


def test_mypy_does_not_let_a_record_be_changed(tmp_path: Path) -> None:
    text = tmp_path / "change.py"
    text.write_text("from seqcheck.machine.time import Span\ndef change(span: Span) -> None:\n    span.least = 3\n")
    checkout = Path(__file__).resolve().parents[1]
    done = subprocess.run(
        [sys.executable, "-m", "mypy", "--config-file=", str(text)], cwd=checkout, capture_output=True, text=True
    )
    assert 'Property "least" defined in "Span" is read-only' in done.stdout
