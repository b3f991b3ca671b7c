"""Rules with their names looked up.

Takes a rule as it is written; gives the model's rule, or None where it is broken (which is reported).
"""

from __future__ import annotations

from seqcheck.language.conditions import Conditions, View
from seqcheck.language.problems import short
from seqcheck.language.registry import Registry
from seqcheck.language.syntax import CycleLimitText, NeverText, PathLimitText
from seqcheck.machine.rules import CycleLimit, Never, PathLimit, Rule


def resolve_rule(registry: Registry, text: NeverText | CycleLimitText | PathLimitText) -> Rule | None:
    conditions = Conditions(registry, View.MACHINE)
    match text:
        case NeverText():
            condition = conditions.resolve(text.condition)
            if condition is None:
                return None
            return Never(condition, text.tolerated, text.why, text.text, text.place)
        case PathLimitText():
            start, end = conditions.resolve(text.start), conditions.resolve(text.end)
            if start is None or end is None:
                return None
            return PathLimit(start, end, text.least, text.greatest, text.text, text.place)
        case CycleLimitText():
            name = _sequence(registry, text)
            return None if name is None else CycleLimit(name, text.greatest, text.text, text.place)


def _sequence(registry: Registry, text: CycleLimitText) -> str | None:
    """The sequence that is meant: named, or the only one that goes round."""
    going_round = [name for name, sequence in registry.sequences.items() if not sequence.once]
    if text.sequence is not None:
        name = text.sequence.text
        if name not in registry.sequences:
            registry.unknown(text.sequence, ("sequence",), registry.sequences)
            return None
        if name not in going_round:
            message = f"the sequence {short(name)} runs once and has no cycle"
            registry.problems.report(text.sequence.place, message, "limit the time between two of its steps instead")
            return None
        return name
    if len(going_round) == 1:
        return going_round[0]
    if registry.whole:
        message = "nobody says which sequence this limits" if going_round else "no sequence goes round"
        advice = f"write `limit cycle {short(going_round[0])} ..`" if going_round else "leave the limit out"
        registry.problems.report(text.place, message, advice)
    return None
