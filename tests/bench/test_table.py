"""The table of ``python -m tests.bench`` as a test: every ratio of which something is asked keeps its limit.

Run with ``python -m pytest -m bench -s tests/bench/test_table.py``; takes some minutes.
"""

from __future__ import annotations

import pytest

from tests.bench.__main__ import told
from tests.bench.table import GROUPS

pytestmark = pytest.mark.bench


@pytest.mark.parametrize("group", GROUPS)
def test_ratios_keep_their_limits(group: str) -> None:
    rows = list(GROUPS[group]())
    print("", *map(told, rows), sep="\n")
    assert rows
    assert [told(row) for row in rows if row.met is False] == []
