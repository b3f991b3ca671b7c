"""Whatever comes in: an exit status of 0, 1 or 2, soon, in bounded memory, and never a fault of the program.

A few thousand inputs here; ``python -m tests.fuzz --inputs 200000`` has as many as you have time for. With ``CI`` set
the inputs are the same each time, so that a change is judged by what it does.
"""

from __future__ import annotations

import contextlib
import os
import random
import time
from collections.abc import Iterator
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from hypothesis.extra.lark import from_lark

from seqcheck.language.grammar import parser
from seqcheck.language.read import read_machine
from seqcheck.language.source import Source
from seqcheck.machine.model import Machine
from tests.fuzz import outcomes
from tests.fuzz.grammar_walk import grammar, sequence_text, spellings, walk
from tests.fuzz.inputs import Input, input_of, originals
from tests.fuzz.outcomes import MOST_SECONDS, outcome_of, with_sheets
from tests.fuzz.running import Request, run, run_here, smallest_of
from tests.fuzz.smallest import smallest

INPUTS = int(os.environ.get("FUZZ_INPUTS", "3000"))
SEED = 1 if os.environ.get("CI") else random.randrange(1 << 32)
LONG_FROM_NOW = 10**6

pytestmark = pytest.mark.slow


def told(request: Request, faults: dict[str, int], texts: dict[str, Input]) -> str:
    return "\n\n".join(
        f"seed {request.seed}: {fault}, {count} times:\n{texts[fault].text.decode('utf-8', 'backslashreplace')}"
        for fault, count in faults.items()
    )


@pytest.mark.parametrize("whole", [False, True], ids=["read", "checked"])
def test_no_input_brings_the_program_down(whole: bool) -> None:
    request = Request(SEED, range(INPUTS), time.monotonic() + LONG_FROM_NOW, whole)
    tally = run([request])
    assert not tally.faults, told(
        request, dict(tally.faults), {fault: smallest_of(tally, request, fault) for fault in tally.faults}
    )
    assert tally.done == INPUTS
    assert {status for _, status in tally.statuses} <= {"0", "1", "2"}
    assert tally.statuses["numbers", "0"] and tally.statuses["noise", "2"], "the inputs reach only one side"


def spaced(terminal: str) -> st.SearchStrategy[str]:
    """A word with a blank behind it, so that two of them stay two."""
    own = {"NAME": ("A", "V1", "main", "s1", "é"), "NUMBER": ("0", "7", "250"), "SPACE": ("",), "COMMENT": ("# so\n",)}
    return st.sampled_from([f"{word} " for word in own.get(terminal) or spellings(terminal)])


@settings(max_examples=150, suppress_health_check=list(HealthCheck))
@given(from_lark(grammar(), start="text", explicit={one.name: spaced(one.name) for one in grammar().terminals}))
def test_texts_that_hypothesis_makes_of_the_grammar(text: str) -> None:
    """Another walk over the same rules. Each text is whole, so what is said about it is about its meaning."""
    parser().parse(text, start="text")
    found = read_machine(Source("lark.steps", text))
    if not isinstance(found, Machine):
        assert all(problem.message and problem.place.line >= 1 for problem in found)


@given(st.integers(0, 2**32))
def test_every_walk_is_whole_as_far_as_the_grammar_goes(seed: int) -> None:
    parser().parse(walk(random.Random(seed), "text", 40), start="text")
    parser().parse(sequence_text(random.Random(seed)), start="text")


# The harness itself: it sees what it is there to see


def faulty(text: str) -> Input:
    return Input("noise", "faulty.steps", text.encode())


def test_a_fault_of_the_program_is_seen_and_made_small(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def read(source: Source, *_: object) -> tuple[()]:
        if "bad" in source.text:
            raise ZeroDivisionError
        return ()

    monkeypatch.setattr(outcomes, "read_machine", read)
    assert outcome_of(faulty("good"), tmp_path, whole=False).fault is None
    one = faulty("a good line\nand a bad one here\n" * 5)
    fault = outcome_of(one, tmp_path, whole=False).fault
    assert fault is not None and fault.startswith("ZeroDivisionError")
    less = smallest(one, lambda other: outcome_of(other, tmp_path, whole=False).fault is not None)
    assert less.text.strip() == b"bad"


def test_a_fault_that_the_command_reports_itself_is_seen(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def examine(*_: object, **__: object) -> None:
        raise ZeroDivisionError("of all things")

    monkeypatch.setattr("seqcheck.pipeline.examine", examine)
    fault = outcome_of(faulty("sequence main { }"), tmp_path).fault
    assert fault is not None and "of all things" in fault


def test_a_hang_is_seen(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def never_ends(*_: object) -> None:
        while True:
            pass

    monkeypatch.setattr(outcomes, "read_machine", never_ends)
    outcome = outcome_of(faulty(""), tmp_path, whole=False, most_seconds=0.1)
    assert outcome.fault == "hang: over 0.1 s" and outcome.seconds < 1


def test_an_input_is_no_hang_that_is_slow_but_once(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    tries = 0

    def is_slow_at_first(*_: object) -> tuple[()]:
        nonlocal tries
        tries += 1
        while tries == 1:
            pass
        return ()

    monkeypatch.setattr(outcomes, "read_machine", is_slow_at_first)
    assert outcome_of(faulty(""), tmp_path, whole=False, most_seconds=0.1).fault is None
    assert tries == 2


def test_the_steps_of_a_round_are_counted_where_times_come_from_a_sheet(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A thousand times two steps may take four times as long as any input."""
    allowed: list[float] = []

    @contextlib.contextmanager
    def noted(most_seconds: float) -> Iterator[None]:
        allowed.append(most_seconds)
        yield

    monkeypatch.setattr(outcomes, "_watched", noted)
    name, text = next(one for one in originals() if one[0] == "crate_stapler.steps")
    once = 'step drive "drive a staple" { pulse Y4 60 ms  until B6 }  step back { pulse Y5 60 ms  until B5 }'
    text = f"{text[: text.index('sequence main')]}sequence main {{ repeat 1000 {{ {once} }} }}\n"
    assert outcome_of(Input("numbers", name, text.encode()), with_sheets(tmp_path)).status in (0, 1)
    assert allowed == [4 * MOST_SECONDS]


def test_memory_without_bounds_is_seen(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(outcomes, "MOST_MEBIBYTES", 50)

    def takes_much(*_: object) -> tuple[()]:
        assert b"x" * (300 << 20)
        return ()

    monkeypatch.setattr(outcomes, "read_machine", takes_much)
    fault = outcome_of(faulty(""), tmp_path, whole=False).fault
    assert fault == "memory: over 50 MiB more"


def test_a_process_that_ends_by_itself_is_seen_and_the_others_go_on(monkeypatch: pytest.MonkeyPatch) -> None:
    read = outcomes.read_machine

    def ends(source: Source, sheets: tuple[str, ...]) -> object:
        if source.name.endswith("sheet.steps"):
            os._exit(9)
        return read(source, sheets)

    monkeypatch.setattr(outcomes, "read_machine", ends)
    numbers = range(40)
    sheets = sum(input_of(5, number).kind == "sheet" for number in numbers)
    tally = run([Request(5, numbers, time.monotonic() + LONG_FROM_NOW, whole=False)])
    assert tally.done == 40 and sheets > 0
    assert tally.faults == {"the process ended with 9": sheets}


def test_the_same_seed_has_the_same_inputs_and_outcomes(tmp_path: Path) -> None:
    request = Request(3, range(60), time.monotonic() + LONG_FROM_NOW, whole=True)
    one, other = run_here(request, with_sheets(tmp_path)), run_here(request, tmp_path)
    assert one.statuses == other.statuses and one.done == 60
