"""Reading and laying out a text cost in proportion to its length; off by default, as all that measures time."""

from __future__ import annotations

import time
from collections.abc import Callable

import pytest

from seqcheck.language.layout import laid_out
from seqcheck.language.problems import Problems
from seqcheck.language.source import Source
from tests.language.reading import DEVICES, read

pytestmark = pytest.mark.bench


def text_of(steps: int) -> str:
    there_and_back = "    step up{0} {{ set Y1   until a1 }}\n    step down{0} {{ reset Y1   until a0 }}\n"
    return (
        DEVICES + "sequence main {\n" + "".join(there_and_back.format(number) for number in range(steps // 2)) + "}\n"
    )


def lay_out(text: str) -> object:
    return laid_out(Source("row.steps", text), Problems())


def least(work: Callable[[str], object], text: str) -> float:
    """Seconds of processor time, the least of several tries."""
    spent = []
    for _ in range(3):
        begin = time.process_time()
        work(text)
        spent.append(time.process_time() - begin)
    return min(spent)


@pytest.mark.parametrize("work", [read, lay_out], ids=["read", "format"])
def test_ten_times_the_steps_cost_ten_times_as_much(work: Callable[[str], object]) -> None:
    work(text_of(100))
    short, long = least(work, text_of(1_000)), least(work, text_of(10_000))
    print(f"\n{long / short:.1f} times the cost; {long / 10_000 * 1e6:.0f} us a step")
    assert long < 13 * short
