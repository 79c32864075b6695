"""Whatever stands in a file is shown as plain text that shifts nothing."""

import unicodedata

import pytest
from hypothesis import given
from hypothesis import strategies as st
from rich.cells import cell_len
from rich.segment import Segment
from textual.color import Color

from budget.report.plain import plain, thinned
from budget.screens.safe import ascii_only, clip, fit, harmless, steady, width_of
from budget.screens.toolkit import AsciiFilter, SafeFilter

PAYLOADS = [
    "\x1b]52;c;aGVsbG8=\x07",
    "\x1b[2J",
    "\x9b31m",
    "a\x00b",
    "a\x7fb",
    "\u202eabc",
    "\u2066abc\u2069",
    "\u200b",
    "\ufeff",
    "line\nbreak\r\ttab",
]


@pytest.mark.parametrize("text", PAYLOADS)
def test_controls_and_direction_marks_never_pass(text: str) -> None:
    for made in (plain(text), steady(text), harmless(text), ascii_only(harmless(text))):
        assert all(c.isprintable() or c == "\xa0" or unicodedata.category(c) == "Zs" for c in made)


def test_marks_piled_upon_a_letter_are_thinned_and_those_of_a_script_stay() -> None:
    storm = "Z" + "\u0301\u0316\u20dd" * 40 + "e"
    for made in (plain(storm), harmless(storm)):
        assert made == "Z\u0301\u0316\u20dd\u0301e"
        assert width_of(made) == width_of(storm) == 2
    told = SafeFilter().apply([Segment(storm)], Color(0, 0, 0))
    assert [segment.text for segment in told] == ["Z\u0301\u0316\u20dd\u0301e"]
    assert thinned("a\U000e0100" + "\U000e0101" * 9) == "a\U000e0100" + "\U000e0101" * 3
    for text in (
        "\u05d1\u05bc\u05b0\u05e8\u05b5\u05d0\u05e9\u05b4\u05c1\u05d9\u05ea",
        "\u0e17\u0e35\u0e48\u0e19\u0e35\u0e48",
        "Vi\u1ec7t",
    ):
        assert plain(text) == harmless(text) == text


def test_letters_of_any_script_stay() -> None:
    assert plain("Zuluft Küche Ø250") == "Zuluft Küche Ø250"
    assert plain("給水 Вентиль") == "給水 Вентиль"
    assert steady("給水 Вентиль") == "給水 Вентиль"


def test_a_decomposed_letter_is_put_together_and_a_mark_that_can_t_be_is_replaced() -> None:
    assert steady("Ku\u0308che") == "Küche"
    assert steady("q\u0308") == "q?"
    assert steady("👩\u200d🔧") == "?\N{REPLACEMENT CHARACTER}?"


@given(st.text())
def test_the_filter_keeps_the_width_that_was_counted(text: str) -> None:
    assert cell_len(harmless(text)) == cell_len(text)
    shown = ascii_only(harmless(text))
    assert shown.isascii()
    assert len(shown) == cell_len(harmless(text))


@given(st.text(), st.integers(0, 40))
def test_a_clipped_text_fits(text: str, width: int) -> None:
    safe = plain(text)
    assert width_of(clip(safe, width)) <= width
    assert width_of(fit(safe, width)) == width


def test_filters_leave_control_segments_of_the_toolkit_alone() -> None:
    black = Color(0, 0, 0)
    told = SafeFilter().apply([Segment("a\x1b[2Jb")], black)
    assert [segment.text for segment in told] == ["a[2Jb"]
    shown = AsciiFilter().apply([Segment("»█░ 12 é")], black)
    assert [segment.text for segment in shown] == [">#- 12 e"]
