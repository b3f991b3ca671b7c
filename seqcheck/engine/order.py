"""An order of two events that decides what follows."""

from __future__ import annotations

from seqcheck.machine.records import record

#: What the text says of an order: where, and what the two events are.
OrderKey = tuple[object, ...]


@record
class Order:
    """``strict``: at the same instant it is the other way round already. ``keeping``: pairs of events that have to stay
    in their order for it to matter."""

    key: OrderKey
    first: int
    second: int
    strict: bool = False
    keeping: tuple[tuple[int, int], ...] = ()
