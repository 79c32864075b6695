"""Columns leave whole, by priority, and a figure is never cut."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from budget.screens.columns import MARK, fit_figure, fit_size, place_columns


def test_all_columns_of_figures_stand_at_80() -> None:
    keys = [placed.column.key for placed in place_columns(80)]
    assert keys == [
        "id", "size", "length", "flow", "velocity", "gradient", "drop", "sum", "differential", "margin"
    ]  # fmt: skip


def test_the_least_needed_leave_first() -> None:
    assert {"id", "drop", "margin", "size"} <= {placed.column.key for placed in place_columns(40)}
    assert [placed.column.key for placed in place_columns(200)][-3:] == ["balance", "fittings", "title"]


def test_columns_follow_each_other_and_stay_on_the_line() -> None:
    for width in range(1, 260):
        x = MARK
        for placed in place_columns(width):
            assert placed.x == x
            x = placed.end
        assert x <= max(width, MARK), width


def test_the_word_of_an_oval_gives_way_before_its_figures() -> None:
    assert fit_size("oval 800x250", 10) == "o 800x250"
    assert fit_size("oval 800x250", 12) == "oval 800x250"
    assert fit_size("600x300", 10) == "600x300"


@given(st.floats(-1e12, 1e12), st.integers(0, 4), st.integers(5, 9))
def test_a_figure_that_is_too_long_loses_decimals_not_digits(value: float, decimals: int, room: int) -> None:
    text = f"{value:.{decimals}f}"
    shown = fit_figure(text, room)
    assert len(shown) <= max(room, 0)
    if "#" not in shown:
        assert float(shown) == pytest.approx(float(text), rel=0.5, abs=1.0)


def test_examples_of_figures() -> None:
    assert fit_figure("12345.67", 6) == "12346"
    assert fit_figure("1234567.8", 6) == "1.23e6"
    assert fit_figure("-", 6) == "-"
