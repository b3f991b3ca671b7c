"""The import contract: layers import to the left only, and each library stays in its layer."""

from __future__ import annotations

import ast
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

import seqcheck

#: From the left to the right; a file may import from its own layer and from those before it. Layers of one rank do
#: not import each other.
RANKS = (
    ("seqcheck.machine",),
    ("seqcheck.language",),
    ("seqcheck.engine",),
    ("seqcheck.checks",),
    ("seqcheck.pipeline",),
    ("seqcheck.workers",),
    ("seqcheck.compare",),
    ("seqcheck.report",),
    ("seqcheck.chart",),
    ("seqcheck.arguments",),
    ("seqcheck.commands",),
    ("seqcheck.commandline",),
    ("seqcheck.__main__",),
)
#: Which layers may import which library; any layer may import the standard library.
LIBRARIES = {
    "lark": ("seqcheck.language",),
    "yaml": ("seqcheck.language",),
    "networkx": ("seqcheck.engine",),
    "numpy": ("seqcheck.engine",),
    "rich": ("seqcheck.report", "seqcheck.commandline"),
}
LONGEST_FILE = 400
LONGEST_FUNCTION = 60

PACKAGE = Path(__file__).resolve().parent.parent / "seqcheck"
FILES = sorted(PACKAGE.rglob("*.py"))


def module_of(file: Path) -> str:
    parts = file.relative_to(PACKAGE.parent).with_suffix("").parts
    return ".".join(parts[:-1] if parts[-1] == "__init__" else parts)


def layer_of(module: str) -> tuple[int, str] | None:
    """Rank and name of the layer that the module belongs to; None for the package itself and for a stranger."""
    for rank, layers in enumerate(RANKS):
        for layer in layers:
            if module == layer or module.startswith(f"{layer}."):
                return rank, layer
    return None


def imports_of(tree: ast.AST) -> Iterator[tuple[str, int]]:
    """Every module imported anywhere in a file, with the line; relative imports are refused elsewhere (ruff)."""
    for node in ast.walk(tree):
        if isinstance(node, ast.Import):
            yield from ((alias.name, node.lineno) for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            module = node.module or ""
            if module == "seqcheck":
                yield from ((f"seqcheck.{alias.name}", node.lineno) for alias in node.names)
            else:
                yield module, node.lineno


def faults_of(module: str, source: str) -> list[str]:
    """What breaks the contract in one file, as ``line: words``."""
    here = layer_of(module)
    faults = []
    for imported, line in imports_of(ast.parse(source)):
        library = imported.partition(".")[0]
        if library == "seqcheck":
            there = layer_of(imported)
            if there and here and there[1] != here[1] and there[0] >= here[0]:
                faults.append(f"{line}: {here[1]} imports {imported}")
        elif library not in sys.stdlib_module_names:
            allowed = LIBRARIES.get(library, ())
            if here is None or here[1] not in allowed:
                faults.append(f"{line}: {module} imports {imported}")
    return faults


@pytest.mark.parametrize("file", FILES, ids=module_of)
def test_imports_run_to_the_left_only(file: Path) -> None:
    assert faults_of(module_of(file), file.read_text("utf-8")) == []


@pytest.mark.parametrize("file", FILES, ids=module_of)
def test_every_file_belongs_to_a_layer_and_keeps_its_size(file: Path) -> None:
    source = file.read_text("utf-8")
    tree = ast.parse(source)
    assert module_of(file) == "seqcheck" or layer_of(module_of(file))
    assert file.stem != "utils"
    assert ast.get_docstring(tree) or not source.strip()
    assert len(source.splitlines()) <= LONGEST_FILE
    for node in ast.walk(tree):
        if isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef):
            length = (node.end_lineno or node.lineno) - node.lineno + 1
            assert length <= LONGEST_FUNCTION, f"{node.name} in line {node.lineno} has {length} lines"


@pytest.mark.parametrize(
    ("module", "source", "faults"),
    [
        ("seqcheck.machine.time", "from seqcheck.language import read", 1),
        ("seqcheck.engine.play", "def f():\n    import seqcheck.checks.pulse", 1),
        ("seqcheck.engine.play", "from seqcheck.machine.time import Span\nimport networkx as nx, numpy", 0),
        ("seqcheck.report.text", "from seqcheck.chart import page", 1),
        ("seqcheck.report.text", "from seqcheck import __version__\nfrom seqcheck.language.durations import x", 0),
        ("seqcheck.report.text", "from seqcheck import commandline", 1),
        ("seqcheck.checks.pulse", "import lark.lexer", 1),
        ("seqcheck.checks.pulse", "from rich.text import Text", 1),
        ("seqcheck.engine.play", "import yaml", 1),
        ("seqcheck.pipeline", "import requests", 1),
        ("seqcheck.commandline", "from rich import print\nimport os.path", 0),
    ],
)
def test_the_contract_catches_what_breaks_it(module: str, source: str, faults: int) -> None:
    assert len(faults_of(module, source)) == faults


def test_the_contract_looks_at_the_package_that_is_run() -> None:
    assert Path(seqcheck.__file__).parent == PACKAGE
    assert len(FILES) > len(RANKS)
