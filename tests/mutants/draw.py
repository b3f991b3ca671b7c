"""The changes that are tried: one operator, one number, one word of the engine or of a check at a time.

Takes the checkout; gives every mutant that the operators of cosmic-ray make of ``seqcheck/engine`` and
``seqcheck/checks``, and a sample of them drawn by a seed. Leaves out what can change nothing by its making: type
annotations, which are never evaluated here, ``==`` for ``is`` where a thing is compared with None or with a member
of an enumeration, and how a record is made (``slots``, ``frozen``, ``kw_only``), which only mypy has to do with.
"""

from __future__ import annotations

import ast
import random
import re
from dataclasses import dataclass
from pathlib import Path

from cosmic_ray.ast import ast_nodes, get_ast
from cosmic_ray.mutating import mutate_code
from cosmic_ray.plugins import get_operator, operator_names

FOLDERS = ("seqcheck/engine", "seqcheck/checks")

#: ``is None`` and ``is Kind.MEMBER``, which are the same with ``==``.
_ONE_OF_A_KIND = re.compile(r"is (?:not )?(?:None|[A-Za-z_.]*[A-Z][A-Za-z]*\.[A-Z][A-Z_]*)\b")
_SAME = ("ReplaceComparisonOperator_Is_Eq", "ReplaceComparisonOperator_IsNot_NotEq")


@dataclass(frozen=True, slots=True, order=True)
class Mutant:
    """One change: the ``occurrence``-th place in the file where the operator can act. ``statement``: the first and the
    last line of the statement around it."""

    file: str
    line: int
    column: int
    operator: str
    occurrence: int
    statement: tuple[int, int]

    def text(self, checkout: Path) -> str | None:
        """The file with the change; None where it is no Python any more."""
        source = (checkout / self.file).read_text(encoding="utf-8")
        changed = mutate_code(source, get_operator(self.operator)(), self.occurrence)
        if changed is None:
            return None
        try:
            ast.parse(changed)
        except SyntaxError:
            return None
        return str(changed)


def mutants_of(checkout: Path) -> list[Mutant]:
    """Every mutant of the two folders, in the order of files and places."""
    files = sorted(file for folder in FOLDERS for file in (checkout / folder).glob("*.py"))
    return [mutant for file in files for mutant in _mutants_of_file(checkout, file)]


def _mutants_of_file(checkout: Path, file: Path) -> list[Mutant]:
    source = file.read_text(encoding="utf-8")
    name = file.relative_to(checkout).as_posix()
    lines = source.splitlines()
    unused = [_extent(node) for node in (*_annotations(source), *_ways_of_making(source))]
    statements = [
        (node.lineno, node.end_lineno or 0) for node in ast.walk(ast.parse(source)) if isinstance(node, ast.stmt)
    ]
    nodes = list(ast_nodes(get_ast(source)))
    found = []
    for operator in operator_names():
        maker = get_operator(operator)
        if maker.arguments():
            continue
        places = [start for node in nodes for start, _ in maker().mutation_positions(node)]
        for occurrence, (line, column) in enumerate(places):
            same = operator.endswith(_SAME) and _ONE_OF_A_KIND.match(lines[line - 1], column)
            if not same and not any(begin <= (line, column) < end for begin, end in unused):
                found.append(Mutant(name, line, column, operator, occurrence, _around(statements, line)))
    return sorted(found)


def _around(statements: list[tuple[int, int]], line: int) -> tuple[int, int]:
    around = [one for one in statements if one[0] <= line <= one[1]]
    return min(around, key=lambda one: one[1] - one[0], default=(line, line))


def _annotations(source: str) -> list[ast.expr]:
    notes: list[ast.expr | None] = []
    for node in ast.walk(ast.parse(source)):
        if isinstance(node, (ast.arg, ast.AnnAssign)):
            notes.append(node.annotation)
        elif isinstance(node, (ast.FunctionDef, ast.AsyncFunctionDef)):
            notes.append(node.returns)
    return [note for note in notes if note is not None]


def _ways_of_making(source: str) -> list[ast.expr]:
    return [
        word.value
        for node in ast.walk(ast.parse(source))
        if isinstance(node, ast.ClassDef)
        for decorator in node.decorator_list
        if isinstance(decorator, ast.Call)
        for word in decorator.keywords
        if word.arg in ("slots", "frozen", "kw_only")
    ]


def _extent(node: ast.expr) -> tuple[tuple[int, int], tuple[int, int]]:
    return (node.lineno, node.col_offset), (node.end_lineno or 0, node.end_col_offset or 0)


def sample(mutants: list[Mutant], number: int, seed: int, checkout: Path) -> list[Mutant]:
    """``number`` mutants drawn without choice: every one that still is Python is as likely as any other."""
    order = list(mutants)
    random.Random(seed).shuffle(order)
    drawn: list[Mutant] = []
    for mutant in order:
        if len(drawn) == number:
            break
        if mutant.text(checkout) is not None:
            drawn.append(mutant)
    return sorted(drawn)
