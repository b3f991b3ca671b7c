"""Sequences of a parse tree as records.

Takes lark's tree of a sequence; gives its record. Exit parts that stand twice are reported.
"""

from __future__ import annotations

from lark import Token, Tree

from seqcheck.language.harvest import Harvest, pair_spelling, tokens, trees
from seqcheck.language.syntax import (
    ChoiceText,
    ChooseText,
    CommandText,
    DwellText,
    EveryText,
    ExitText,
    ItemText,
    JumpText,
    MotionText,
    MoveText,
    RepeatText,
    SequenceText,
    StepText,
    TogetherText,
    UntilText,
    WithinText,
)

_ITEMS = ("every", "step", "motion", "together", "choose", "repeat", "jump")
MOST_REPEATS = 1_000


def sequence_text(harvest: Harvest, node: Tree[Token]) -> SequenceText:
    return SequenceText(
        harvest.name(node),
        harvest.marks(node, None),
        bool(tokens(node, "ONCE")),
        _items(harvest, node),
        harvest.place(node),
    )


def _items(harvest: Harvest, node: Tree[Token]) -> tuple[ItemText, ...]:
    return tuple(_item(harvest, child) for child in trees(node, *_ITEMS))


def _item(harvest: Harvest, node: Tree[Token]) -> ItemText:
    place = harvest.place(node)
    match node.data:
        case "every":
            return EveryText(harvest.duration(node), place)
        case "step":
            return _step(harvest, node)
        case "motion":
            return _motion(harvest, node)
        case "together":
            return TogetherText(tuple(_items(harvest, branch) for branch in trees(node, "branch")), place)
        case "choose":
            choices = tuple(_choice(harvest, choice) for choice in trees(node, "when", "otherwise"))
            return ChooseText(choices, _within(harvest, trees(node, "within")), place)
        case "repeat":
            return RepeatText(_times(harvest, tokens(node, "NUMBER")[0]), _items(harvest, node), place)
        case _:
            return JumpText(harvest.term(trees(node, "step_name")[0]), place)


def _times(harvest: Harvest, number: Token) -> int:
    if not number.isdecimal():
        harvest.problems.report(
            harvest.place(number), f"{number} is no whole number", "write how many times to go round"
        )
        return 1
    if len(number.lstrip("0")) > len(str(MOST_REPEATS)) or int(number) > MOST_REPEATS:
        harvest.problems.report(
            harvest.place(number), f"over {MOST_REPEATS} times round", "let the sequence itself go round"
        )
        return 1
    return int(number)


def _choice(harvest: Harvest, node: Tree[Token]) -> ChoiceText:
    conditions = harvest.conditions(node)
    return ChoiceText(conditions[0] if conditions else None, _items(harvest, node), harvest.place(node))


def _step(harvest: Harvest, node: Tree[Token]) -> StepText:
    commands = tuple(_command(harvest, command) for command in trees(node, "command", "pulse"))
    return StepText(harvest.name(node), harvest.marks(node, None), commands, _exit(harvest, node), harvest.place(node))


def _command(harvest: Harvest, node: Tree[Token]) -> CommandText:
    duration = harvest.duration(node) if node.data == "pulse" else None
    return CommandText(str(node.children[0]), harvest.name(node), duration, harvest.place(node))


def _motion(harvest: Harvest, node: Tree[Token]) -> MotionText:
    nodes = trees(node, "move")
    moves = tuple(MoveText(harvest.name(move), bool(tokens(move, "PLUS")), harvest.place(move)) for move in nodes)
    bracketed = bool(tokens(node, "LPAR"))
    spelled = pair_spelling(nodes)
    return MotionText(
        spelled if bracketed and len(nodes) > 1 else spelled[1:-1], moves, _exit(harvest, node), harvest.place(node)
    )


def _exit(harvest: Harvest, node: Tree[Token]) -> ExitText:
    untils = trees(node, "until")
    dwells = trees(node, "dwell")
    withins = trees(node, "within")
    for word, parts in (("until", untils), ("dwell", dwells), ("within", withins)):
        for extra in parts[1:]:
            advice = "join the two with and" if word == "until" else "leave one of them out"
            harvest.problems.report(harvest.place(extra), f"a second {word} in one step", advice)
    until = _until(harvest, untils[0]) if untils else None
    dwell = DwellText(harvest.duration(dwells[0]), harvest.place(dwells[0])) if dwells else None
    return ExitText(until, dwell, _within(harvest, withins))


def _until(harvest: Harvest, node: Tree[Token]) -> UntilText:
    steady = harvest.duration(node) if tokens(node, "STEADY") else None
    return UntilText(harvest.conditions(node)[0], steady, harvest.place(node))


def _within(harvest: Harvest, nodes: list[Tree[Token]]) -> WithinText | None:
    if not nodes:
        return None
    targets = trees(nodes[0], "step_name")
    target = harvest.term(targets[0]) if targets else None
    return WithinText(harvest.duration(nodes[0]), target, harvest.place(nodes[0]))
