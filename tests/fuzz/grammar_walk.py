"""Random texts from the grammar itself: a walk over the rules that parsers are built from.

Takes a source of chance; gives texts that are whole as far as the grammar goes. Names come from small pools by the rule
in which they stand, so that many of them mean something. A new rule or keyword of the grammar is walked without a
change here; a new terminal that is no keyword needs an entry in ``_SPELLINGS``.
"""

from __future__ import annotations

import itertools
import random
import re
from functools import cache

from lark import Lark
from lark.grammar import NonTerminal, Rule, Symbol

from seqcheck.language.grammar import grammar_text

#: A machine of every kind of device, for sequences and rules made at random.
DEVICES = """
controller { scan 4..6 ms  input 1..2 ms  output 0.5..1 ms }
valve V1 5/2 spring { coil Y1  on 10..14 ms  off 12..18 ms }
valve V2 5/3 closed centre { coil Y2 to a  coil Y3 to b  on 10..14 ms  off 12..18 ms  gap 5 ms }
valve V3 5/2 bistable { coil Y4 to a  coil Y5 to b  on 8..12 ms }
cylinder A on V1 { extend 80..110 ms  retract 70..100 ms  sensor a0 at retracted  sensor a1 at extended }
cylinder B on V2 {
    extend 80..110 ms  retract 70..100 ms  sensor b0 at 0..4 %  sensor b2 at 40..60 %  sensor b1 at extended
}
cylinder C on V3 { extend 80..110 ms  retract 70..100 ms  sensor c0 at retracted  sensor c1 at extended }
output K { on 3..5 ms  off 2..4 ms }
signal go from outside after 0..50 ms
"""

_SWITCHED = ("Y1", "Y2", "Y3", "Y4", "Y5", "K", "Y1", "Y4")
_SEEN = ("a0", "a1", "b0", "b1", "b2", "c0", "c1", "go", "Y1", "K", "s1")
_NAMES = {
    "move": ("A", "B", "C"),
    "command": _SWITCHED,
    "pulse": _SWITCHED,
    "term": _SEEN,
    "step": tuple(f"s{number}" for number in range(1, 30)),
    "on_valve": ("V1", "V2", "V3"),
    "cycle_limit": ("main",),
}
_ANY_NAME = ("A", "B", "V1", "Y1", "a1", "K", "go", "main", "s1", "s2", "é", "x" * 40, "_")
_SPELLINGS = {
    "STRING": ('""', '"why"', '"a.yaml"', '"/"', '"%{}\'"', '"é\u202e\t"'),
    "ADDRESS": ("%Q0.1", "%QX1.2", "%I0.3", "%IX0.0", "%M5.0", "%Z9"),
    "PORTS": ("5/2", "5/3", "2/2", "3/2", "4/3", "9/9"),
    "UNIT": ("ms", "ms", "ms", "s", "us", "min"),
    "NTH": ("+2", "-2", "+1"),
    "RPAR_NTH": (")2", ")1"),
    "CENTRE": ("centre", "center"),
    "PLUS_MINUS": ("±", "+-"),
    "__ANON_0": ("..",),
}
#: What makes most texts mean nothing, and is therefore taken now and then only.
_SELDOM = frozenset({"every", "jump", "DOT", "NTH", "RPAR_NTH", "_motion_end", "ADDRESS", "STRING", "ELSE"})
#: Rules that mean nothing without their last part, a unit or an item.
_FULL = frozenset({"duration", "item_duration", "quantity", "branch", "repeat", "when", "otherwise"})
_KEYWORD = re.compile(r"([a-z]+)\(\?!\\w\)")


@cache
def grammar() -> Lark:
    """The grammar as lark has it, built here: the program may keep its parser without the rules."""
    starts = ["text", "sheet_value"]
    return Lark(grammar_text(), parser="lalr", lexer="contextual", start=starts, maybe_placeholders=False)


def spellings(name: str) -> tuple[str, ...]:
    """How a terminal but for names and numbers may be written."""
    if name in _SPELLINGS:
        return _SPELLINGS[name]
    pattern = grammar().get_terminal(name).pattern
    if pattern.type == "str":
        return (pattern.value,)
    keyword = _KEYWORD.fullmatch(pattern.value)
    if keyword is None:
        raise LookupError(f"the walk cannot spell {name}: give it an entry in _SPELLINGS")
    return (keyword.group(1),)


@cache
def _rules() -> dict[str, list[Rule]]:
    found: dict[str, list[Rule]] = {}
    for rule in grammar().rules:
        found.setdefault(rule.origin.name, []).append(rule)
    return found


@cache
def _depths() -> dict[str, int]:
    """How deep the shallowest sensible tree of each rule is."""
    depths: dict[str, int] = {}
    while len(depths) < len(_rules()):
        for name in _rules():
            ways = [
                1 + max((depths[part.name] for part in rule.expansion if isinstance(part, NonTerminal)), default=0)
                for rule in _sensible(name)
                if all(part.name in depths for part in rule.expansion if isinstance(part, NonTerminal))
            ]
            if ways and min(ways) < depths.get(name, 1 << 30):
                depths[name] = min(ways)
    return depths


def walk(draw: random.Random, start: str, most: int = 120, sense: float = 0.0) -> str:
    """A text of the rule ``start``; after about ``most`` words it is brought to its end the shortest way.
    ``sense``: how often what means nothing is left out."""
    words: list[str] = []
    waiting: list[tuple[Symbol, str]] = [(NonTerminal(start), start)]
    while waiting:
        part, within = waiting.pop()
        if not isinstance(part, NonTerminal):
            words.append(_word(draw, part.name, within))
            continue
        name = part.name
        rules = _rules()[name]
        if draw.random() < sense:
            rules = _sensible(name)
        rule = min(rules, key=_depth_of) if len(words) > most else draw.choice(rules)
        inside = within if name.startswith("_") else name
        waiting += [(one, inside) for one in reversed(rule.expansion)]
    return " ".join(words)


@cache
def _sensible(name: str) -> list[Rule]:
    rules = _rules()[name]
    if name in _FULL:
        longest = max(len(rule.expansion) for rule in rules)
        return [rule for rule in rules if len(rule.expansion) == longest]
    if name == "marks":
        return [min(rules, key=lambda rule: len(rule.expansion))]
    sensible = [rule for rule in rules if not any(part.name in _SELDOM for part in rule.expansion)]
    return sensible or rules


def _depth_of(rule: Rule) -> int:
    return max((_depths()[part.name] for part in rule.expansion if isinstance(part, NonTerminal)), default=0)


def _word(draw: random.Random, terminal: str, within: str) -> str:
    if terminal == "NAME":
        pool = _NAMES.get(within)
        return draw.choice(pool if pool and draw.random() < 0.95 else _ANY_NAME)
    if terminal == "NUMBER":
        if within == "repeat":
            return draw.choice("123" if draw.random() < 0.9 else ("0", "10", "20", "50"))
        return draw.choice(("0", "1", "2", "3", "10", "20", "50", "100", "0.5", "250", str(draw.randrange(10**6))))
    return draw.choice(spellings(terminal))


def sequence_text(draw: random.Random) -> str:
    """The devices, and a sequence of a few items; sometimes with more sequences and rules."""
    items = "\n    ".join(walk(draw, "_item", draw.choice((6, 15, 40)), 0.98) for _ in range(draw.randint(1, 5)))
    numbers = itertools.count(1)
    items = re.sub(r"step s\d+", lambda _: f"step s{next(numbers)}", items)
    once = "once " if draw.random() < 0.2 else ""
    more = [walk(draw, draw.choice(("sequence", "never", "cycle_limit", "path_limit")), 30, 0.98)] * (
        draw.random() < 0.2
    )
    return "\n".join([DEVICES, f"sequence main {once}{{\n    {items}\n}}", *more])
