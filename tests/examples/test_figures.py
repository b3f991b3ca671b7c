"""Every figure and every word that is said of the examples and of the hand-worked cases, kept as it is.

What the numbers should be is worked out elsewhere, by hand and by a second player; here nothing changes unnoticed. In
``drawn`` stand a few machines that ``oracle`` has drawn and whose reports the second player bears out: each of them
shows some small change of the engine or of a check that no other text shows (see ``mutants``).
"""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest

from seqcheck.pipeline import examine
from tests.examples.figures import lines_of

CHECKOUT = Path(__file__).resolve().parents[2]
EXAMPLES = CHECKOUT / "examples"
FOLDERS = (EXAMPLES, EXAMPLES / "faulty", CHECKOUT / "tests/cases", Path(__file__).parent / "drawn")
FILES = sorted(file for folder in FOLDERS for file in folder.glob("*.steps"))


@pytest.mark.parametrize("file", FILES, ids=lambda file: f"{file.parent.name}-{file.stem}")
def test_nothing_changes_unnoticed(file: Path, golden: Callable[[str, str], None]) -> None:
    report = examine(str(file))
    assert not report.problems
    golden(f"{file.parent.name}/{file.stem}.txt", "\n".join(lines_of(report)) + "\n")
