from __future__ import annotations

import dataclasses

import pytest
from hypothesis import given
from hypothesis import strategies as st

from seqcheck.report.plain import LONGEST_WORD, plain, plain_report
from tests.report.samples import SHEETS, healthy, place, short_pulse, unknown_valve, unreadable

encodings = st.sampled_from(["utf-8", "ascii", "cp1252", "cp437", "shift_jis", "no-such-encoding"])


@pytest.mark.parametrize(
    ("text", "shown"),
    [
        ("\x1b[31mred\x1b[0m", r"\x1b[31mred\x1b[0m"),
        ("a\x00b\x07c\x9bd", r"a\x00b\x07c\x9bd"),
        ("one\ntwo\tthree\r\u2028four", "one two three  four"),
        ("[bold]lift[/bold]", "[bold]lift[/bold]"),
        ("right\u202eleft", r"right\u202eleft"),
        ("\udcff", r"\udcff"),
        ("Förderband 昇降", "Förderband 昇降"),
        ("warning \u26a0\ufe0f", "warning \u26a0"),
    ],
)
def test_nothing_that_acts_on_a_terminal_gets_through(text: str, shown: str) -> None:
    assert plain(text) == shown


@pytest.mark.parametrize(
    ("encoding", "text", "shown"),
    [
        ("ascii", "Förderband 30 ± 5 ms – „gut“", 'Forderband 30 +- 5 ms - "gut"'),
        ("cp1252", "Förderband ± 昇降", "Förderband ± ??"),
        ("cp437", "Ø 5 µs → ende…", "O 5 us -> ende..."),
        ("ascii", "Ｙ１", "Y1"),
    ],
)
def test_what_an_encoding_lacks_is_spelled_in_ascii(encoding: str, text: str, shown: str) -> None:
    """The micro sign of cp437 is U+00B5, so it stays there."""
    expected = shown.replace("us", "µs") if encoding == "cp437" else shown
    assert plain(text, encoding) == expected


@given(st.text(), encodings)
def test_plain_text_is_printable_and_can_be_written(text: str, encoding: str) -> None:
    shown = plain(text, encoding)
    assert shown.isprintable()
    shown.encode("ascii" if encoding == "no-such-encoding" else encoding)
    assert plain(shown, encoding) == shown


@given(st.text(alphabet=st.characters(min_codepoint=32, max_codepoint=126), max_size=LONGEST_WORD))
def test_ordinary_text_stays_as_it_is(text: str) -> None:
    assert plain(text) == text


def test_a_long_word_is_cut_in_its_middle() -> None:
    shown = plain(f"valve {'V' * 99_999}X is unknown")
    assert shown.startswith("valve VVV")
    assert shown.endswith("VX is unknown")
    assert len(shown) < 2 * LONGEST_WORD


def strings_of(value: object) -> list[str]:
    """Every string in a record, however deep."""
    if isinstance(value, str):
        return [value]
    parts = value if isinstance(value, tuple) else ()
    if dataclasses.is_dataclass(value):
        parts = tuple(getattr(value, field.name) for field in dataclasses.fields(value))
    return [text for part in parts for text in strings_of(part)]


def test_every_string_of_a_report_is_made_plain_but_source_lines() -> None:
    escape = "\x1b[2J"
    report = healthy(short_pulse(message=escape, subject=escape, place=place(1, 1, escape)))
    assert escape in strings_of(report)
    assert strings_of(plain_report(report)) == [plain(text) for text in strings_of(report)]
    assert plain_report(report).findings[0].place.file == r"\x1b[2J"
    assert plain_report(report).sheets == SHEETS
    source = plain_report(unreadable(unknown_valve(f"a\t{escape}"))).problems[0].source
    assert source == f"a\t{escape}"
