"""Records: dataclasses that are never changed, made for a program that is started for every text.

Frozen ones of the standard library cost most of a start (five functions compiled for each class) and set each field of
each record past a lock of their own. Here mypy alone says that nobody changes a record.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field, fields
from operator import attrgetter
from typing import Any, TypeVar, dataclass_transform

T = TypeVar("T")


@dataclass_transform(frozen_default=True, field_specifiers=(field,))
def record(described: type[T]) -> type[T]:
    """The class as a dataclass with slots, whose records are equal where all their fields are, and may be keys."""
    described.__doc__ = described.__doc__ or described.__name__  # Else dataclass works out a signature to put there.
    made = dataclass(slots=True, eq=False, repr=False)(described)
    names = [one.name for one in fields(made)]  # type: ignore[arg-type]
    compared = [one.name for one in fields(made) if one.compare]  # type: ignore[arg-type]
    values: Callable[[T], Any] = attrgetter(*compared) if compared else type

    def shown(one: T) -> str:
        return f"{made.__name__}({', '.join(f'{name}={getattr(one, name)!r}' for name in names)})"

    def equal(one: T, other: object) -> Any:
        return values(one) == values(other) if other.__class__ is one.__class__ else NotImplemented

    def hashed(one: T) -> int:
        return hash(values(one))

    made.__repr__ = shown  # type: ignore[assignment, method-assign]
    made.__eq__ = equal  # type: ignore[assignment, method-assign]
    made.__hash__ = hashed  # type: ignore[assignment, method-assign]
    return made
