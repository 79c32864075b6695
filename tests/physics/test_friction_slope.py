"""The slope of the friction law against differences of the law itself."""

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from budget.physics.friction import friction_factor
from budget.physics.friction_slope import factor_by_reynolds

RE = np.array([0.0, 1.0, 500.0, 2299.0, 2301.0, 2800.0, 3500.0, 3999.0, 4001.0, 1e4, 1e6, 1e8])


def test_the_product_is_that_of_the_friction_factor() -> None:
    for rough in (0.0, 1e-5, 0.01, 0.05):
        for constant in (64.0, 56.9, 96.0):
            product, _ = factor_by_reynolds(RE, rough, constant)
            np.testing.assert_allclose(product[1:], (friction_factor(RE, rough, constant) * RE)[1:], rtol=1e-13)
            assert product[0] == constant


@given(st.floats(1.0, 1e8), st.floats(0.0, 0.05), st.floats(50.0, 96.0))
def test_the_slope_is_that_of_a_difference(re: float, rough: float, constant: float) -> None:
    _, slope = factor_by_reynolds(re, rough, constant)
    step = 1e-6
    high = friction_factor(re * (1 + step), rough, constant) * re * (1 + step)
    low = friction_factor(re * (1 - step), rough, constant) * re * (1 - step)
    wanted = (high - low) / (2 * step)
    # Over the ends of the blend the law bends, so that a difference across them is less exact.
    np.testing.assert_allclose(slope, wanted, rtol=2e-5, atol=1e-4 * float(high))


def test_laminar_flow_has_no_slope_beyond_its_own() -> None:
    product, slope = factor_by_reynolds(np.array([0.0, 100.0, 2299.0]), 1e-3)
    assert (product == 64.0).all()
    assert (slope == 0.0).all()
