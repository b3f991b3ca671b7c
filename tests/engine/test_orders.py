"""Orders that are open are found state by state: by when the second of the two came, however early the first did."""

from __future__ import annotations

import pytest

from seqcheck.engine.orders import Orders
from seqcheck.engine.trace import Trace
from seqcheck.language.read import read_machine
from seqcheck.language.source import Source
from seqcheck.machine.model import Machine
from tests.engine.test_player import played

#: The pulse is told off 300..312 after go began, its step ends 290..302 after that: at 306 and 296 in the typical run.
PULSE = """controller { scan 8..12 ms }
valve V1 5/2 spring { coil Y1  on 18..28 ms  off 25..40 ms }
output K
sequence main {
    step go { pulse Y1 300 ms  on K  dwell 290 ms }
    step hold { on Y1  dwell 20 ms }
    step rest { dwell 500 ms }
}
"""


def found(trace: Trace, begin: int, end: int) -> list[tuple[int, int]]:
    machine = read_machine(Source("a.steps", PULSE))
    assert isinstance(machine, Machine), machine
    orders = Orders(machine).open(trace, 0, begin, end)
    return [(trace.times[one.first], trace.times[one.second]) for one in orders]


@pytest.fixture
def trace() -> Trace:
    return played(PULSE, 1)


def test_the_end_of_a_pulse_against_what_else_is_commanded(trace: Trace) -> None:
    """``hold`` begins its own command at 296, and the pulse ends at 306; hold itself ends 20..32 later, at 322."""
    assert found(trace, 0, 1_000_000) == [(296_000, 306_000), (306_000, 322_000)]


def test_only_what_comes_from_the_one_time_to_before_the_other(trace: Trace) -> None:
    first, second = (296_000, 306_000), (306_000, 322_000)
    assert found(trace, 306_000, 306_001) == [first]
    assert found(trace, 306_001, 322_001) == [second]
    assert found(trace, 0, 306_000) == []
    assert found(trace, 306_001, 322_000) == []
    assert found(trace, 322_001, 1_000_000) == []
