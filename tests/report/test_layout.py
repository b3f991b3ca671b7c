from __future__ import annotations

from hypothesis import given
from hypothesis import strategies as st
from rich.cells import cell_len

from seqcheck.report.layout import WIDTH, Column, Line, labelled, page, paragraph, table, wrap
from seqcheck.report.plain import plain

texts = st.text(alphabet=st.sampled_from("ab Ö昇降é\u0301 -"), max_size=400).map(plain)


def narrow(lines: tuple[Line, ...]) -> bool:
    return all(cell_len(line.text) <= WIDTH for line in lines)


@given(texts, st.integers(2, 100))
def test_wrapped_text_keeps_its_letters_and_its_width(text: str, width: int) -> None:
    lines = wrap(text, width)
    assert lines
    assert all(cell_len(line) <= width for line in lines)
    assert _visible("".join(lines)) == _visible(text)


@given(texts, st.integers(0, 10), st.integers(0, 10))
def test_paragraphs_fit_and_keep_their_letters(text: str, indent: int, hanging: int) -> None:
    lines = paragraph(text, indent, hanging)
    assert narrow(lines)
    assert _visible("".join(line.text for line in lines)) == _visible(text)


@given(st.lists(st.tuples(st.sampled_from(["Mend", "Broken by", "Run"]), texts), min_size=1, max_size=4))
def test_labelled_rows_fit(rows: list[tuple[str, str]]) -> None:
    assert narrow(labelled(rows, indent=4))


@given(st.lists(st.tuples(st.integers(-(10**20), 10**20).map(str), texts, texts), max_size=5))
def test_tables_fit_and_keep_their_letters(rows: list[tuple[str, str, str]]) -> None:
    lines = table((Column("margin", right=True), Column("kind"), Column("step")), rows)
    assert narrow(lines)
    shown = _visible(page(lines[1:]))
    assert sorted(shown) == sorted(_visible("".join(text for row in rows for text in row)))


def test_table_columns_line_up_where_letters_are_wide() -> None:
    lines = table((Column("name"), Column("ms", right=True)), [("昇降", "5"), ("lift", "12.5")])
    assert [line.text for line in lines] == ["  name    ms", "  昇降     5", "  lift  12.5"]


def test_a_long_cell_goes_on_below() -> None:
    lines = table((Column("event"), Column("line", right=True)), [("x" * 100, "7")])
    assert [line.text for line in lines[1:]] == [f"  {'x' * 72}     7", f"  {'x' * 28}"]


def _visible(text: str) -> str:
    """What a break may not lose: everything but blanks (and accents that stand alone at a break)."""
    return "".join(character for character in text if cell_len(character) > 0 and not character.isspace())
