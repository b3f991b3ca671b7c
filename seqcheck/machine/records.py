"""Records: dataclasses that are never changed, made for a program that is started for every text.

Frozen ones of the standard library cost most of a start (five functions compiled for each class) and set each field of
each record past a lock of their own. Here mypy alone says that nobody changes a record, and what makes a record is
compiled with the first one: of most classes a check makes none.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import MISSING, dataclass, field, fields
from operator import attrgetter
from typing import Any, TypeVar, dataclass_transform

T = TypeVar("T")


@dataclass_transform(frozen_default=True, field_specifiers=(field,))
def record(described: type[T]) -> type[T]:
    """The class as a dataclass with slots, whose records are equal where all their fields are, and may be keys."""
    described.__doc__ = described.__doc__ or described.__name__  # Else dataclass works out a signature to put there.
    made = dataclass(slots=True, eq=False, repr=False, init=False)(described)
    names = [one.name for one in fields(made)]  # type: ignore[arg-type]
    compared = [one.name for one in fields(made) if one.compare]  # type: ignore[arg-type]
    values: Callable[[T], Any] = attrgetter(*compared) if compared else type

    def shown(one: T) -> str:
        return f"{made.__name__}({', '.join(f'{name}={getattr(one, name)!r}' for name in names)})"

    def equal(one: T, other: object) -> Any:
        return values(one) == values(other) if other.__class__ is one.__class__ else NotImplemented

    def hashed(one: T) -> int:
        return hash(values(one))

    def first_made(one: T, *values: Any, **named: Any) -> None:
        making = _making(made)
        made.__init__ = making  # type: ignore[method-assign]
        making(one, *values, **named)

    made.__init__ = first_made  # type: ignore[assignment, method-assign]
    made.__repr__ = shown  # type: ignore[assignment, method-assign]
    made.__eq__ = equal  # type: ignore[assignment, method-assign]
    made.__hash__ = hashed  # type: ignore[assignment, method-assign]
    return made


def _making(made: type[Any]) -> Callable[..., None]:
    """The ``__init__`` of a record: a parameter for each field, in their order."""
    known: dict[str, Any] = {"MISSING": MISSING}
    parameters, lines = ["self"], []
    for one in fields(made):
        name, value = one.name, one.name
        if one.default_factory is not MISSING:
            known[f"make_{name}"] = one.default_factory
            parameters.append(f"{name}=MISSING")
            value = f"make_{name}() if {name} is MISSING else {name}"
        elif one.default is not MISSING:
            known[f"default_{name}"] = one.default
            parameters.append(f"{name}=default_{name}")
        else:
            parameters.append(name)
        lines.append(f" self.{name} = {value}")
    exec(f"def __init__({', '.join(parameters)}):\n" + "\n".join(lines or [" pass"]), known)
    making: Callable[..., None] = known["__init__"]
    return making
