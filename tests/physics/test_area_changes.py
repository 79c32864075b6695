"""Enlargements and contractions: limits, continuity to the sudden change, monotony."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from budget.physics import area_changes as change

RATIO = st.floats(0.0, 1.0)
ANGLE = st.floats(0.0, 180.0)


@given(RATIO, ANGLE)
def test_nothing_is_lost_without_a_change_and_never_more_than_abruptly(n: float, angle: float) -> None:
    for gradual, sudden in (
        (change.enlargement, change.sudden_enlargement),
        (change.contraction, change.sudden_contraction),
    ):
        assert float(gradual(1.0, angle)) == 0.0
        assert -1e-12 <= float(gradual(n, angle)) <= float(sudden(n)) + 1e-12
        assert float(gradual(n, 0.0)) == 0.0
        assert float(gradual(n, change.ABRUPT)) == pytest.approx(float(sudden(n)))


@given(RATIO, ANGLE, st.floats(0.0, 1.0))
def test_a_steeper_or_larger_change_never_loses_less(n: float, angle: float, share: float) -> None:
    for loss in (change.enlargement, change.contraction):
        assert float(loss(n, angle * share)) <= float(loss(n, angle)) + 1e-12
        assert float(loss(n + share * (1.0 - n), angle)) <= float(loss(n, angle)) + 1e-12


@given(RATIO, ANGLE, st.sampled_from([43.04, 90.0, 120.0, 180.0]))
def test_coefficients_are_continuous(n: float, angle: float, stress: float) -> None:
    for loss in (change.enlargement, change.contraction, change.duct_convergence, change.pyramid_divergence):
        for at in (angle, stress):
            pair = loss(n, np.clip(at + np.array([-1e-7, 1e-7]), 0.0, 180.0))
            assert abs(pair[1] - pair[0]) < 1e-6


def test_sudden_changes_by_hand() -> None:
    assert float(change.sudden_enlargement(0.5)) == 0.25
    assert float(change.sudden_contraction(0.0)) == 0.5
    assert float(change.rounded_contraction(0.25, 0.0)) == pytest.approx(0.5 * 0.75)
    assert float(change.enlargement(0.5, 20.0)) == pytest.approx(0.25 * 3.2 * np.tan(np.radians(10.0)) ** 1.25)


@given(RATIO, st.floats(10.0, 180.0))
def test_duct_transitions_vanish_with_the_change(n: float, angle: float) -> None:
    for loss in (change.duct_convergence, change.pyramid_divergence):
        assert float(loss(1.0, angle)) == 0.0
        assert 0.0 <= float(loss(n, angle)) <= 0.87


@given(st.floats(0.1, 1.0), st.floats(8.0, 40.0))
def test_a_pyramid_loses_no_less_than_a_cone(n: float, angle: float) -> None:
    assert float(change.pyramid_divergence(n, angle)) >= 0.75 * float(change.enlargement(n, angle))


def test_functions_take_arrays() -> None:
    for loss in (change.enlargement, change.contraction):
        assert loss([[0.2], [0.5]], [10.0, 60.0, 180.0]).shape == (2, 3)
