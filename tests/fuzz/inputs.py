"""Inputs for the fuzzing run: texts from the grammar, spoilt examples, noise, and timing sheets of the same kinds.

Takes a seed and the number of an input; gives always the same one for the same two.
"""

from __future__ import annotations

import random
import re
from dataclasses import dataclass
from functools import cache
from pathlib import Path

from tests.fuzz.grammar_walk import DEVICES, sequence_text, walk

CHECKOUT = Path(__file__).resolve().parents[2]
#: What the spoilt texts are spoilt from.
FOLDERS = ("examples", "examples/faulty", "examples/change", "tests/cases", "tests/cases/order")

_SHEET = """
controller: {scan: 4..6 ms, input: on 1..2 ms off 1 ms}
valves:
  V1: {on: 18..28 ms, off: 30 ± 5 ms}
  V2: {gap: 20 ms, decay: 1..2 ms}
coils: {Y2: {decay: 5..15 ms}}
outputs: {K: {on: 3 ms}}
cylinders:
  A: {extend: 380..450 ms from coil, uneven: 10 %}
sensors: {b1: {delay: 1..2 ms}}
signals: {go: {after: 1..20 ms}}
"""
_SHEET_TEXT = DEVICES + "sequence main { A+ B+ step one { until go } A- B- }\n"
_WORDS = (
    *("valve", "coil", "cylinder", "sensor", "signal", "flag", "output", "sequence", "once", "step", "together", "and"),
    *("choose", "when", "otherwise", "repeat", "jump", "every", "within", "else", "until", "dwell", "steady", "set"),
    *("reset", "pulse", "on", "off", "not", "or", "never", "limit", "cycle", "from", "to", "for", "{", "}", "(", ")"),
    *("+", "-", "..", "±", "%", ".", '"', "#", "ms", "s", "us", "0", "1", "1000", "999999999", "5/2", "B1", "Y1", "\n"),
)
_LETTERS = "abcXYZ019 _.%+-{}()\"'#=;,/\\\n\r\t\0é±µ½٣漢\u202e\u200b\ufeff"
_NUMBER = re.compile(r"\d+(?:\.\d+)?")


@dataclass(frozen=True, slots=True)
class Input:
    """``name``: the file name of the text. ``sheet`` comes on the command line."""

    kind: str
    name: str
    text: bytes
    sheet: bytes | None = None


@cache
def originals() -> tuple[tuple[str, str], ...]:
    """Name and text of everything that can be spoilt, in a fixed order."""
    files = [file for folder in FOLDERS for file in sorted((CHECKOUT / folder).glob("*.steps"))]
    return tuple((file.name, file.read_text("utf-8")) for file in files)


def input_of(seed: int, number: int) -> Input:
    draw = random.Random(f"{seed}/{number}")
    make = draw.choices(list(_KINDS), list(_KINDS.values()))[0]
    return make(draw)


def _from_grammar(draw: random.Random) -> Input:
    return Input("grammar", "walk.steps", walk(draw, "text", draw.choice((10, 60, 200))).encode())


def _sequence(draw: random.Random) -> Input:
    return Input("sequence", "walk.steps", sequence_text(draw).encode())


def _spoilt(draw: random.Random) -> Input:
    name, text = draw.choice(originals())
    for _ in range(draw.choice((1, 1, 2, 4))):
        text = draw.choice(_SPOILERS)(draw, text)
    return Input("spoilt", name, text.encode("utf-8", "surrogatepass"))


def _other_numbers(draw: random.Random) -> Input:
    """Whole but for its numbers: this comes through to the engine most of the time."""
    name, text = draw.choice(originals())
    for _ in range(draw.randint(1, 6)):
        text = _other_number(draw, text)
    return Input("numbers", name, text.encode())


def _noise(draw: random.Random) -> Input:
    length = draw.choice((0, 1, 5, 50, 500, 5000))
    match draw.randrange(4):
        case 0:
            data = draw.randbytes(length)
        case 1:
            data = "".join(draw.choices(_LETTERS, k=length)).encode()
        case 2:
            data = " ".join(draw.choices(_WORDS, k=length // 4)).encode()
        case _:
            text = draw.choice(originals())[1].encode()
            at = draw.randrange(len(text))
            data = text[:at] + draw.randbytes(draw.randint(1, 8)) + text[at + draw.randint(0, 8) :]
    return Input("noise", "noise.steps", data)


def _sheet(draw: random.Random) -> Input:
    match draw.randrange(4):
        case 0:
            sheet = draw.randbytes(draw.choice((0, 3, 40)))
        case 1:
            sheet = _tree(draw, 0).encode()
        case 2:
            lines = draw.choices(_SHEET.splitlines(), k=draw.randint(1, 12))
            sheet = "\n".join(lines).encode()
        case _:
            text = _SHEET
            for _ in range(draw.randint(1, 3)):
                text = draw.choice(_SPOILERS)(draw, text)
            sheet = text.encode("utf-8", "surrogatepass")
    return Input("sheet", "sheet.steps", _SHEET_TEXT.encode(), sheet)


def _tree(draw: random.Random, depth: int) -> str:
    """Random YAML in flow style."""
    keys = ("controller", "valves", "V1", "on", "coils", "Y2", "cylinders", "A", "extend", "? ", "1", "~", "<<", "&a k")
    leaves = ("1 ms", "1..2 ms", "2..1 ms", "~", "true", "1e3", "0x10", "[]", "{}", "'", '"', "*a", "&a 1", "!!int x")
    if depth > 4 or draw.random() < 0.3:
        return draw.choice((*leaves, "2001-01-01", "!!python/none x", "|", "- a", "\t", "\x07", "é", "1:2:3", "=", "@"))
    if draw.random() < 0.2:
        return f"[{', '.join(_tree(draw, depth + 1) for _ in range(draw.randint(0, 3)))}]"
    pairs = (f"{draw.choice(keys)}: {_tree(draw, depth + 1)}" for _ in range(draw.randint(0, 4)))
    return f"{{{', '.join(pairs)}}}"


# How texts are spoilt


def _cut(draw: random.Random, text: str) -> str:
    at = draw.randrange(len(text) + 1)
    return text[:at] + text[at + draw.choice((1, 2, 10, 100, len(text))) :]


def _put_in(draw: random.Random, text: str) -> str:
    at = draw.randrange(len(text) + 1)
    word = draw.choice((f" {draw.choice(_WORDS)} ", draw.choice(_LETTERS)))
    return text[:at] + word * draw.choice((1, 1, 1, 2, 60)) + text[at:]


def _double(draw: random.Random, text: str) -> str:
    lines = text.split("\n")
    begin = draw.randrange(len(lines))
    some = lines[begin : begin + draw.randint(1, 8)]
    at = draw.randrange(len(lines) + 1)
    return "\n".join(lines[:at] + some + lines[at:])


def _swap(draw: random.Random, text: str) -> str:
    words = re.split(r"(\s+)", text)
    one, other = draw.randrange(len(words)), draw.randrange(len(words))
    words[one], words[other] = words[other], words[one]
    return "".join(words)


def _splice(draw: random.Random, text: str) -> str:
    other = draw.choice(originals())[1].split("\n")
    lines = text.split("\n")
    return "\n".join(lines[: draw.randrange(len(lines))] + other[draw.randrange(len(other)) :])


def _other_number(draw: random.Random, text: str) -> str:
    numbers = list(_NUMBER.finditer(text))
    if not numbers:
        return text
    one = draw.choice(numbers)
    value = float(one.group())
    other = draw.choice(("0", "1", "2", "1000", f"{value * draw.random():.2f}", f"{value * 2:g}", f"{value + 1:g}"))
    return text[: one.start()] + other + text[one.end() :]


_SPOILERS = (_cut, _put_in, _double, _swap, _splice, _other_number)
_KINDS = {_from_grammar: 15, _sequence: 20, _spoilt: 25, _other_numbers: 15, _noise: 15, _sheet: 10}
