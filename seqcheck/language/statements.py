"""Statements of a parse tree as records: devices and rules here, sequences in ``steps``.

Takes lark's tree of one whole statement; gives its record. What stands twice is reported.
"""

from __future__ import annotations

from collections.abc import Callable

from lark import Token, Tree

from seqcheck.language.harvest import Harvest, tokens, trees
from seqcheck.language.spelling import spelled, spelling_of
from seqcheck.language.steps import sequence_text
from seqcheck.language.syntax import (
    CoilText,
    ConditionsText,
    ControllerText,
    CycleLimitText,
    CylinderText,
    FlagText,
    IslandText,
    MachineText,
    NeverText,
    OutputText,
    PathLimitText,
    SensorText,
    SignalText,
    StatementText,
    TimingText,
    ValveText,
    Word,
)
from seqcheck.machine.devices import ValveReturn
from seqcheck.machine.time import WHOLE_SHARE


def statement_text(harvest: Harvest, node: Tree[Token]) -> StatementText:
    """The record of a statement."""
    return _STATEMENTS[str(node.data)](harvest, node)


def _machine(harvest: Harvest, node: Tree[Token]) -> MachineText:
    return MachineText(harvest.word(tokens(node, "STRING")[0]).text, harvest.place(node))


def _timing(harvest: Harvest, node: Tree[Token]) -> TimingText:
    file = harvest.word(tokens(node, "STRING")[0])
    return TimingText(file.text, file.place)


def _controller(harvest: Harvest, node: Tree[Token]) -> ControllerText:
    settings = harvest.settings(trees(node, "round_time", "transfer"))
    return ControllerText(settings, harvest.place(node))


def _io(harvest: Harvest, node: Tree[Token]) -> IslandText:
    settings = harvest.settings(trees(node, "update", "transfer"))
    return IslandText(harvest.name(node), harvest.marks(node, None), settings, harvest.place(node))


def _valve(harvest: Harvest, node: Tree[Token]) -> ValveText:
    size = tokens(node, "PORTS")[0]
    ports, positions = (int(digits[:6]) for digits in spelling_of(size).split("/"))
    kind = " ".join(str(word) for word in trees(node, "return")[0].children)
    kind = {"detent": "bistable"}.get(kind, kind.replace("center", "centre"))
    words = [word for word in trees(node, "valve_word") if word.children[0] == "starts"]
    normally = [word for word in trees(node, "valve_word") if word.children[0] == "normally"]
    return ValveText(
        harvest.name(node),
        harvest.marks(node, None),
        ports,
        positions,
        harvest.place(size),
        ValveReturn(kind),
        _only(harvest, words, "A", "B"),
        _only(harvest, normally, "OPEN", "CLOSED"),
        tuple(_coil(harvest, coil) for coil in trees(node, "coil")),
        harvest.settings(trees(node, "valve_time")),
        harvest.place(node),
    )


def _only(harvest: Harvest, nodes: list[Tree[Token]], *kinds: str) -> Word | None:
    """The word in the only one of these parts; a second part is reported."""
    for extra in nodes[1:]:
        harvest.problems.report(harvest.place(extra), f"{extra.children[0]} stands here twice", "leave one out")
    return harvest.word(tokens(nodes[0], *kinds)[0]) if nodes else None


def _coil(harvest: Harvest, node: Tree[Token]) -> CoilText:
    return CoilText(
        harvest.name(node),
        harvest.marks(node, "Q"),
        _only(harvest, trees(node, "to"), "A", "B"),
        _only(harvest, trees(node, "via"), "NAME"),
        harvest.settings(trees(node, "valve_time")),
        harvest.place(node),
    )


def _output(harvest: Harvest, node: Tree[Token]) -> OutputText:
    return OutputText(
        harvest.name(node),
        harvest.marks(node, "Q"),
        _only(harvest, trees(node, "via"), "NAME"),
        harvest.settings(trees(node, "edge")),
        harvest.place(node),
    )


def _cylinder(harvest: Harvest, node: Tree[Token]) -> CylinderText:
    drive: Word | ConditionsText
    words = trees(node, "cylinder_word")
    if on_valve := trees(node, "on_valve"):
        drive = harvest.name(on_valve[0])
        words += trees(on_valve[0], "cylinder_word")
    else:
        drive = ConditionsText(*harvest.conditions(trees(node, "on_conditions")[0]))
    return CylinderText(
        harvest.name(node),
        harvest.marks(node, None),
        drive,
        _only(harvest, [word for word in words if word.children[0] == "reversed"], "REVERSED"),
        _only(harvest, [word for word in words if word.children[0] == "starts"], "EXTENDED", "RETRACTED"),
        harvest.settings(trees(node, "stroke", "cylinder_time", "uneven")),
        tuple(_sensor(harvest, sensor) for sensor in trees(node, "sensor")),
        harvest.place(node),
    )


def _sensor(harvest: Harvest, node: Tree[Token]) -> SensorText:
    if ranges := trees(node, "range"):
        low, high = (harvest.share(number) for number in trees(ranges[0], "number"))
        place = harvest.place(ranges[0])
    else:
        word = tokens(node, "RETRACTED", "EXTENDED")[0]
        low = high = 0 if word.type == "RETRACTED" else WHOLE_SHARE
        place = harvest.place(word)
    return SensorText(
        harvest.name(node),
        harvest.marks(node, "I"),
        low,
        high,
        place,
        _only(harvest, trees(node, "via"), "NAME"),
        harvest.settings(trees(node, "delay")),
        harvest.place(node),
    )


def _signal(harvest: Harvest, node: Tree[Token]) -> SignalText:
    inner = trees(node, "outside", "follows")[0]
    follows = harvest.conditions(inner)[0] if inner.data == "follows" else None
    settings = harvest.settings(trees(inner, "edge", "after"))
    return SignalText(harvest.name(node), harvest.marks(node, "I"), follows, settings, harvest.place(node))


def _flag(harvest: Harvest, node: Tree[Token]) -> FlagText:
    return FlagText(harvest.name(node), harvest.marks(node, None), harvest.place(node))


def _never(harvest: Harvest, node: Tree[Token]) -> NeverText:
    why = tokens(node, "STRING")
    tolerated = harvest.duration(node) if trees(node, "duration") else 0
    end = why[0].start_pos if why else None
    return NeverText(
        harvest.conditions(node)[0],
        tolerated,
        harvest.word(why[0]).text if why else None,
        _written(harvest, node, end),
        harvest.place(node),
    )


def _cycle_limit(harvest: Harvest, node: Tree[Token]) -> CycleLimitText:
    text = _written(harvest, node)
    return CycleLimitText(harvest.first_word(node), harvest.duration(node), text, harvest.place(node))


def _path_limit(harvest: Harvest, node: Tree[Token]) -> PathLimitText:
    start, end = harvest.conditions(node)
    limit = trees(node, "span")[0]
    span = harvest.span(limit)
    least = span.least if len(trees(limit, "quantity")) > 1 else None
    text = _written(harvest, node)
    return PathLimitText(start, end, least, span.greatest, text, harvest.place(node))


def _written(harvest: Harvest, node: Tree[Token], end: int | None = None) -> str:
    """A rule as it was written, on one line, without comments, whatever its blanks were."""
    return spelled(harvest.written(node, end))


_STATEMENTS: dict[str, Callable[[Harvest, Tree[Token]], StatementText]] = {
    "machine": _machine,
    "timing": _timing,
    "controller": _controller,
    "io": _io,
    "valve": _valve,
    "output": _output,
    "cylinder": _cylinder,
    "signal": _signal,
    "flag": _flag,
    "sequence": sequence_text,
    "never": _never,
    "cycle_limit": _cycle_limit,
    "path_limit": _path_limit,
}
