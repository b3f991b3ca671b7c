from __future__ import annotations

from decimal import Decimal

from hypothesis import given
from hypothesis import strategies as st

from seqcheck.machine.findings import Duration
from seqcheck.report.amounts import counted, decimals_of, milliseconds, spelled_range

times = st.integers(-(10**13), 10**13)


def test_columns_share_the_fewest_decimals_that_keep_them_exact() -> None:
    assert milliseconds([0, 12_000]) == ("0", "12")
    assert milliseconds([-500, 12_000]) == ("-0.5", "12.0")
    assert milliseconds([1, None, 2_000_000]) == ("0.001", "open", "2000.000")
    assert milliseconds([]) == ()


@given(st.lists(times, min_size=1))
def test_milliseconds_are_exact(values: list[int]) -> None:
    texts = milliseconds(values)
    assert [Decimal(text) * 1000 for text in texts] == values
    assert {len(text.partition(".")[2]) for text in texts} == {decimals_of(values)}


def test_ranges_in_words() -> None:
    assert spelled_range(Duration(1_905_000, 2_139_500, 2_374_000)) == "1.905 s to 2.374 s, typically 2.1395 s"
    assert spelled_range(Duration(5_000, 5_000, 5_000)) == "always 5 ms"
    open_range = spelled_range(Duration(5_000, 6_000, None))
    hangs = "hangs on signals from outside, or on how often a way goes back"
    assert open_range == f"at least 5 ms, typically 6 ms, at most open ({hangs})"


def test_counts() -> None:
    assert [counted(count, "error") for count in (0, 1, 2)] == ["0 errors", "1 error", "2 errors"]
