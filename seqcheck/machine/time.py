"""Time as whole microseconds.

Takes and gives plain ``int`` microseconds and the spans made of them; refuses nothing: what a user may
write is judged where it is read.
"""

from __future__ import annotations

from seqcheck.machine.records import record

#: A share of a stroke is a whole count of millionths, so that percentages stay exact.
WHOLE_SHARE = 1_000_000


@record
class Span:
    """A tolerance: a time that is drawn anew, anywhere from ``least`` to ``greatest``, each time it occurs."""

    least: int
    typical: int
    greatest: int

    @staticmethod
    def exactly(time_us: int) -> Span:
        return Span(time_us, time_us, time_us)

    @staticmethod
    def between(least: int, greatest: int) -> Span:
        """A span whose typical time is its middle, rounded down."""
        return Span(least, (least + greatest) // 2, greatest)


NO_TIME = Span(0, 0, 0)
