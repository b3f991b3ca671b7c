"""How a controller answers an input, against what hardware manuals and teaching pages publish."""

from __future__ import annotations

import random

import pytest
import simpy

from seqcheck.language.source import Source
from seqcheck.machine.findings import Report
from seqcheck.pipeline import examine_source


def station(controller: str, sensor: str = "at extended", steps: str = "") -> Report:
    """A cylinder whose sensor, once seen, starts a second one; everything else takes known times."""
    text = f"""
        {controller}
        valve V1 5/2 spring {{ coil Y1  on 20 ms  off 20 ms }}
        valve V2 5/2 spring {{ coil Y2  on 20 ms  off 20 ms }}
        cylinder one on V1 {{ extend 1 s  retract 1 s  sensor B1 at retracted  sensor B2 {sensor} }}
        cylinder two on V2 {{ extend 1 s  retract 1 s  sensor B3 at retracted  sensor B4 at extended }}
        sequence main {{ {steps or "step a { set Y1 until B2 }  step b { set Y2 until B4 }"}
                         step c {{ reset Y1 reset Y2  until B1 and B3 }}  step d {{ dwell 100 ms }} }}
    """
    report = examine_source(Source("station.steps", text))
    assert not report.problems, report.problems
    return report


def response_ms(controller: str) -> tuple[float, float]:
    """From the sensor to the coil that it starts. Step b runs from the read that has seen B2 to the one that has seen
    B4, step a from a read to the read that has seen B2: what a takes over its stroke is one answer to an input."""
    step = dict(station(controller).steps)["main.a"]
    assert step.greatest is not None
    known = 20_000 + 1_000_000
    return (step.least - known) / 1000, (step.greatest - known) / 1000


def test_published_least_and_greatest_response_time() -> None:
    """A PLC hardware manual's section on I/O response (published): input 1.5, scan 20, refresh 0.23, overhead 3 and
    output 15 ms give at least 1.5 + 20 + 0.23 + 3 + 15 = 39.73 and at most 1.5 + 2 * 20 + 3 + 15 = 59.5 ms."""
    least, _ = response_ms("controller { scan 20 ms  input 1.5 ms  output 18.23 ms }")
    _, greatest = response_ms("controller { scan 20 ms  input 1.5 ms  output 18 ms }")
    assert (least, greatest) == (39.73, 59.5)


def test_answer_takes_one_to_two_rounds_as_a_simulation_of_scans_has_it() -> None:
    """A scan of fixed time that reads at its start and writes at its end, simulated with simpy at 1000 phases: the
    answer takes from one round to just under two (10.0 to 20.0 ms for 10 ms)."""
    period, found = 10_000, []
    for phase in random.Random(7).sample(range(period), 1000):
        env = simpy.Environment()
        changed, answered = 5 * period + phase, []

        def scan(env: simpy.Environment = env, changed: int = changed, answered: list[int] = answered):  # type: ignore[no-untyped-def]
            while not answered:
                seen = env.now >= changed
                yield env.timeout(period)
                if seen:
                    answered.append(env.now - changed)

        env.process(scan())
        env.run(until=20 * period)
        found += answered
    least, greatest = response_ms("controller { scan 10 ms }")
    assert (least, greatest) == (10, 20)
    assert least * 1000 <= min(found) and max(found) <= greatest * 1000
    assert max(found) - min(found) > 9_900


@pytest.mark.parametrize(("percent", "margin_us"), [("50..51", -4_000), ("50..51.4", 0), ("50..52", 6_000)])
def test_an_input_must_last_one_filter_and_one_scan(percent: str, margin_us: int) -> None:
    """Published teaching text (home.isr.uc.pt/~lino, PLC tutorial, "what means"): to be seen for sure, an input must
    stay on for at least one input delay and one scan. Here up to 4 and 10 ms, of a stroke of 1 s: 1.4 %."""
    report = station("controller { scan 10 ms  input 0..4 ms }", f"at {percent} %")
    margins = {(one.kind, one.subject): one.margin_us for one in report.margins}
    assert margins["missed-signal", "B2"] == margin_us
