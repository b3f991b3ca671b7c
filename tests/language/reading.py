"""What the tests of the language share: a small machine, and texts read with or without a sheet."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

from seqcheck.language.read import read_machine
from seqcheck.language.source import Source
from seqcheck.machine.findings import Problem
from seqcheck.machine.model import Machine

DEVICES = """
valve V1 5/2 spring { coil Y1 on 18..28 ms off 25..40 ms }
valve V2 5/3 closed centre { coil Y2 to a coil Y3 to b on 20..30 ms off 30..45 ms }
valve V3 5/2 bistable { coil Y4 to a coil Y5 to b on 15..25 ms }
cylinder A on V1 { extend 380..450 ms retract 300..360 ms sensor a0 at retracted sensor a1 at extended }
cylinder B on V2 { extend 600..700 ms retract 500..620 ms
    sensor b0 at 0..4 % sensor b5 at 45..50 % sensor b1 at 96..100 % }
cylinder C on V3 { extend 200..250 ms retract 180..220 ms sensor c0 at retracted sensor c1 at extended }
cylinder C2 on V3 { extend 200..250 ms retract 180..220 ms }
output K
signal start from outside
signal pressed follows A.extended on 80..150 ms
flag second
"""

WORK = "sequence main { A+ A- }"


def read(text: str, *sheets: str, name: str = "press.steps") -> Machine | tuple[Problem, ...]:
    return read_machine(Source(name, text), sheets)


def machine(text: str, *sheets: str, name: str = "press.steps") -> Machine:
    """The machine of a text that must be readable."""
    result = read(text, *sheets, name=name)
    assert isinstance(result, Machine), told(result)
    return result


def problems(text: str, *sheets: str, name: str = "press.steps") -> tuple[Problem, ...]:
    """The problems of a text that must not be readable."""
    result = read(text, *sheets, name=name)
    assert isinstance(result, tuple), "the text was read without a problem"
    assert result
    return result


def told(found: Sequence[Problem]) -> list[str]:
    """Problems as a list that reads well in a failed test."""
    return [f"{problem.place.line}:{problem.place.column} {problem.message} | {problem.advice}" for problem in found]


def with_sheet(folder: Path, text: str, sheet: str) -> Machine | tuple[Problem, ...]:
    """A text read with one sheet."""
    file = folder / "measured.yaml"
    file.write_text(sheet, encoding="utf-8")
    return read(text, str(file))
