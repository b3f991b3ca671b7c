"""Every figure and every word that is said of the examples and of the hand-worked cases, kept as it is.

What the numbers should be is worked out elsewhere, by hand and by a second player; here nothing changes unnoticed.
"""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest

from seqcheck.pipeline import examine
from tests.examples.figures import lines_of

CHECKOUT = Path(__file__).resolve().parents[2]
EXAMPLES = CHECKOUT / "examples"
FILES = sorted(
    [*EXAMPLES.glob("*.steps"), *(EXAMPLES / "faulty").glob("*.steps"), *(CHECKOUT / "tests" / "cases").glob("*.steps")]
)


@pytest.mark.parametrize("file", FILES, ids=lambda file: f"{file.parent.name}-{file.stem}")
def test_nothing_changes_unnoticed(file: Path, golden: Callable[[str, str], None]) -> None:
    report = examine(str(file))
    assert not report.problems
    golden(f"{file.parent.name}/{file.stem}.txt", "\n".join(lines_of(report)) + "\n")
