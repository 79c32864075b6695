"""Elbows: edges of the tables, angle and Reynolds factors, monotony."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from budget.physics import elbows


def test_reynolds_factor_ends_with_the_table() -> None:
    np.testing.assert_allclose(elbows.reynolds_factor([0.0, 1e3, 1e4, 1.4e5, 1e7]), [1.4, 1.4, 1.4, 1.0, 1.0])
    assert float(elbows.reynolds_factor(5e4)) == pytest.approx((1.14 + 1.09) / 2.0)


@given(st.floats(0.0, 1e6), st.floats(1.0, 10.0))
def test_reynolds_factor_never_grows(re: float, more: float) -> None:
    assert 1.0 <= float(elbows.reynolds_factor(re * more)) <= float(elbows.reynolds_factor(re)) <= 1.4


def test_no_turn_no_loss_and_a_right_angle_is_the_table() -> None:
    assert float(elbows.round_smooth(1.0, 0.0)) == 0.0
    assert float(elbows.rectangular_smooth(1.0, 1.0, 0.0)) == 0.0
    assert float(elbows.angle_factor(90.0)) == 1.0


@given(st.floats(0.5, 2.5), st.floats(0.0, 180.0), st.floats(0.0, 1.0))
def test_a_wider_or_smaller_turn_loses_less(radius: float, angle: float, share: float) -> None:
    wider = radius + share * (2.5 - radius)
    assert float(elbows.round_smooth(wider, angle)) <= float(elbows.round_smooth(radius, angle)) + 1e-12
    assert float(elbows.round_smooth(radius, angle * share)) <= float(elbows.round_smooth(radius, angle)) + 1e-12


@given(st.floats(0.75, 2.0))
def test_more_pieces_lose_less(radius: float) -> None:
    three, four, five = (float(elbows.round_gored(radius, pieces)) for pieces in (3, 4, 5))
    assert five < four < three
    assert float(elbows.round_smooth(radius)) < five


def test_tight_gored_elbow_is_tabulated_for_three_pieces_alone() -> None:
    assert float(elbows.round_gored(0.5, 3)) == 0.98
    assert float(elbows.round_gored(np.sqrt(0.375), 3)) == pytest.approx(np.sqrt(0.98 * 0.54))
    assert float(elbows.round_gored(0.5, 5)) == 0.46


@given(st.floats(0.25, 8.0), st.floats(20.0, 90.0), st.floats(0.0, 1.0))
def test_a_mitre_loses_more_the_more_it_turns(aspect: float, angle: float, share: float) -> None:
    less = 20.0 + share * (angle - 20.0)
    assert float(elbows.rectangular_mitre(less, aspect)) <= float(elbows.rectangular_mitre(angle, aspect)) + 1e-12


@given(st.floats(0.55, 1.0), st.floats(0.25, 4.0))
def test_a_splitter_helps(radius: float, aspect: float) -> None:
    """Up to H/W 4: in tighter and higher elbows the printed tables have it no better than none."""
    assert float(elbows.rectangular_splitter(radius, aspect)) < float(elbows.rectangular_smooth(radius, aspect))


def test_closed_form_by_angle_has_no_step() -> None:
    angles = np.array([70.0, 90.0, 100.0])
    for delta in (-1e-9, 1e-9):
        np.testing.assert_allclose(
            elbows.rectangular_smooth_closed_form(1.0, 1.0, angles + delta),
            elbows.rectangular_smooth_closed_form(1.0, 1.0, angles),
            rtol=1e-4,
        )


def test_functions_take_arrays() -> None:
    assert elbows.rectangular_smooth([[0.5], [1.0]], [0.5, 1.0, 2.0]).shape == (2, 3)
    assert elbows.rectangular_mitre([45.0, 90.0], 1.0).shape == (2,)
    assert elbows.mitred_offset([0.0, 1.0], 1.0).tolist() == [0.0, 2.63]
