"""Whatever comes in, problems or a machine come out, and soon."""

from __future__ import annotations

import random
import time

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from seqcheck.machine.findings import Problem
from seqcheck.machine.model import Machine
from tests.language.reading import DEVICES, WORK, problems, read

MEGABYTE = 1_000_000
WORDS = [
    *("valve", "coil", "sequence", "step", "together", "choose", "when", "repeat", "jump", "every", "until", "within"),
    *(
        "V1",
        "A",
        "A+",
        "(",
        ")",
        "{",
        "}",
        "and",
        "or",
        "not",
        ".",
        "..",
        "%",
        "±",
        "5",
        "5/2",
        "ms",
        '"',
        "#",
        "\n",
        "on",
    ),
    *(
        "\nflag",
        "\nlimit",
        "\nnever",
        "\noutput",
        "cylinder",
        "sensor",
        "at",
        "0..4 %",
        "5 ms",
        "é",
        "\t",
        "%Q0.1",
        "dwell",
    ),
]


def noise(kind: str) -> str:
    source = random.Random(7)
    match kind:
        case "letters":
            return "".join(source.choices('abcdefgh {}()\n"#%.+-0123456789é', k=MEGABYTE))
        case "words":
            return " ".join(source.choices(WORDS, k=MEGABYTE // 4))
        case "lines":
            return "\n".join(f"{word} {word}" for word in source.choices(WORDS, k=MEGABYTE // 8))
        case _:
            return "".join(map(chr, source.choices([*range(1, 0xD800), *range(0xE000, 0x11000)], k=MEGABYTE // 3)))


@pytest.mark.parametrize("kind", ["letters", "words", "lines", "characters"])
def test_a_megabyte_of_noise_ends_soon(kind: str) -> None:
    text = noise(kind)
    read(WORK + DEVICES)
    begin = time.process_time()
    found = problems(text)
    assert time.process_time() - begin < 2
    assert len(found) <= 200


@pytest.mark.parametrize(
    "text",
    [
        "sequence m { " + "repeat 2 { " * 10_000,
        "sequence m { " + "repeat 2 { " * 10_000 + "}" * 10_001,
        "never " + "(" * 10_000 + "K" + ")" * 10_000 + DEVICES,
        "never " + "not " * 100_000 + "K" + DEVICES,
        "never " + "not (" * 40 + "not not K" + ")" * 40 + DEVICES,
        "never K" + " and (K or K" * 10_000 + DEVICES,
    ],
)
def test_deep_nesting_is_told_not_suffered(text: str) -> None:
    assert problems(text)[0].message == "nested over 50 deep"


def test_fifty_deep_is_read() -> None:
    text = "sequence m {" + "repeat 1 {" * 49 + "A+ A-" + "}" * 50 + "never " + "not " * 49 + "K" + DEVICES
    assert isinstance(read(text), Machine)


def test_what_stands_side_by_side_is_not_nested() -> None:
    text = "never " + "not K or " * 200 + "(A.moving)" + " or (K)" * 200 + "\n"
    steps = "step x%d { until not (a0 or not a1) } "
    sequence = "sequence m { " + "".join(steps % number for number in range(100)) + "}"
    assert isinstance(read(text + sequence + DEVICES), Machine)


def test_long_conditions_are_flat() -> None:
    assert isinstance(read("never " + "K and " * 20_000 + "A.moving\n" + WORK + DEVICES), Machine)


@pytest.mark.parametrize(
    "text",
    [
        "flag " + "a" * 100_000,
        "sequence m { step a { until " + "x" * 100_000 + " } }",
        "never K for " + "9" * 100_000 + " ms",
        "output L { on 0." + "1" * 100_000 + " ms }",
        "valve V " + "5" * 100_000 + "/2 spring { coil Q on 1 ms off 1 ms }",
        "sequence m { repeat " + "9" * 100_000 + " { A+ } }",
        "sequence m { " + "b" * 100_000 + " { c d }",
        '"' * 100_000,
        "#" * 100_000,
        'machine "' + "m" * 100_000,
        "\n" * 100_000 + "x",
    ],
)
def test_long_words(text: str) -> None:
    for problem in problems(text + "\n" + DEVICES):
        assert len(problem.message) < 200
        assert len(problem.advice or "") < 200


@settings(max_examples=300)
@given(st.lists(st.sampled_from(WORDS), max_size=40).map(" ".join))
def test_any_words(text: str) -> None:
    assert_told(text + "\n" + WORK + DEVICES)


@settings(max_examples=300)
@given(st.text(max_size=80))
def test_any_text(text: str) -> None:
    assert_told(text)


@settings(max_examples=200)
@given(st.integers(0, len(DEVICES)), st.integers(0, 12), st.sampled_from(["", "{", "}", " not ", '"', "5", "x", "\n"]))
def test_any_damage(start: int, length: int, instead: str) -> None:
    """A piece cut out of a good text, or something else put in."""
    assert_told(DEVICES[:start] + instead + DEVICES[start + length :] + WORK)


def assert_told(text: str) -> None:
    """A machine, or problems whose places are in the text."""
    found = read(text)
    if isinstance(found, Machine):
        return
    lines = text.split("\n")
    assert found
    for problem in found:
        assert isinstance(problem, Problem)
        assert problem.message
        assert 1 <= problem.place.line <= problem.place.end_line <= len(lines)
        assert 1 <= problem.place.column <= len(lines[problem.place.line - 1]) + 1
        assert problem.source == lines[problem.place.line - 1].rstrip("\r")
