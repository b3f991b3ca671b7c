"""``cut-stroke``: a cylinder is stopped or turned before its stroke is done, and not by a sensor of its own."""

from __future__ import annotations

from collections.abc import Iterator
from functools import partial

from seqcheck.checks.check import Check, Obligation, Wording
from seqcheck.checks.study import Study
from seqcheck.checks.wording import in_time
from seqcheck.engine.regions import may_have_centred
from seqcheck.engine.trace import Stroke
from seqcheck.machine.devices import Position
from seqcheck.machine.findings import Severity


def _obligations(study: Study) -> Iterator[Obligation]:
    for stroke in study.trace.strokes:
        if stroke.away is not None and not study.stopped_by_own_sensor(stroke):
            origin, before = stroke.away.by.origin, stroke.away.previous
            ends = [stroke.away.reached]
            if before is not None and may_have_centred(study.trace, stroke.away):
                ends.append(before.reached)
            for end in ends:
                yield Obligation(stroke.cylinder, origin.step, origin.place, stroke.end, end, partial(_wording, stroke))


def _wording(stroke: Stroke) -> Wording:
    assert stroke.away is not None
    done = "extended" if stroke.out else "retracted"
    how = "stopped" if stroke.away.to is Position.CENTRE else "turned back"
    return Wording(
        f"{stroke.cylinder} can be {how} {{by}} before it is fully {done}",
        lambda by: f"wait for its end sensor first, or at least {in_time(by)} longer",
    )


CHECK = Check("cut-stroke", Severity.ERROR, "a cylinder is stopped or turned in mid-stroke", _obligations)
