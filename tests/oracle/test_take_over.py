"""A return to centre that the other coil may or may not take over: the piston stands where either leaves it.

After the stop on B9 the lift coasts until the valve has centred or, taken over, until it has reached the other side;
which of the two is a matter of time. No run of the second player leaves the bounds of the step that drives it back.
"""

from __future__ import annotations

import pytest

from seqcheck.language.read import read_machine
from seqcheck.language.source import Source
from seqcheck.machine.model import Machine
from seqcheck.pipeline import examine_source
from tests.oracle.draws import at_corners, at_random
from tests.oracle.player import play

EDGES = "  ".join(f"sensor C{low} at {low}..{low + 1} %" for low in range(46, 72, 2))


def lift(dwell_ms: int) -> str:
    return f"""
        controller {{ scan 8..12 ms  input 2..4 ms  output 0.5..1 ms }}
        valve V2 5/3 closed centre {{ coil Y2 to a  coil Y3 to b  on 60..70 ms  off 30..45 ms }}
        cylinder lift on V2 {{
            extend 600..700 ms  retract 500..620 ms  sensor B3 at retracted  sensor B9 at 40..45 %  {EDGES}
        }}
        sequence main {{
            step half {{ on Y2  until B9 }}
            step hold {{ dwell {dwell_ms} ms }}
            step down {{ on Y3  until B3 }}
        }}
    """


@pytest.mark.parametrize("dwell_ms", [20, 30, 35, 45])
def test_no_run_leaves_the_bounds(dwell_ms: int) -> None:
    source = Source("lift.steps", lift(dwell_ms))
    machine = read_machine(source)
    assert isinstance(machine, Machine)
    bounds = dict(examine_source(source).steps)["main.down"]
    assert bounds.greatest is not None
    for seed in range(120):
        run = play(machine, at_corners(seed) if seed % 2 else at_random(seed), 3, 10**9)
        assert not run.incidents
        for visit in run.visits:
            if visit.step == "main.down" and visit.left is not None and visit.cycle > 0:
                assert bounds.least <= visit.left - visit.entered <= bounds.greatest
