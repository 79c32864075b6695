"""Forms of loss coefficients and the algebra of Kv."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from budget.physics.fittings import (
    coefficient_at,
    crane,
    equivalent_length,
    fitting_drop,
    k_of_equivalent_length,
    k_of_kv,
    kv_of_drop,
    kv_of_k,
    three_k,
    two_k,
    valve_drop,
)

POSITIVE = st.floats(1e-3, 1e3)


def test_forms_by_hand() -> None:
    np.testing.assert_allclose(two_k(800, 0.4, 0.0508), (0.6, 800.0))
    np.testing.assert_allclose(three_k(800, 0.14, 4.0, 0.0254), (0.7, 800.0))
    np.testing.assert_allclose(crane(30, 0.019), (0.57, 0.0))


def test_forms_take_arrays() -> None:
    constant, per_reynolds = two_k([800, 1000], [0.4, 0.7], [0.02, 0.04])
    assert constant.shape == per_reynolds.shape == (2,)
    assert three_k(800, 0.14, 4.0, np.array([0.02, 0.04]))[1].shape == (2,)


@given(POSITIVE, POSITIVE, st.floats(1.0, 1e6))
def test_coefficient_falls_with_reynolds_to_its_constant(constant: float, per_reynolds: float, re: float) -> None:
    k = float(coefficient_at(constant, per_reynolds, re))
    assert k == pytest.approx(constant + per_reynolds / re)
    assert constant <= float(coefficient_at(constant, per_reynolds, re * 2)) <= k


def test_coefficient_at_standstill_is_finite() -> None:
    with np.errstate(all="raise"):
        k = coefficient_at(0.5, 800.0, [0.0, 800.0])
    np.testing.assert_allclose(k, [0.5, 1.5])
    assert float(fitting_drop(k[0], 1000.0, 0.0)) == 0.0


@given(st.floats(1e-6, 1.0), POSITIVE, st.floats(0.5, 2000.0))
def test_kv_and_drop_undo_each_other(flow: float, kv: float, density: float) -> None:
    drop = float(valve_drop(flow, kv, density))
    assert float(kv_of_drop(flow, drop, density)) == pytest.approx(kv)
    assert float(valve_drop(-flow, kv, density)) == -drop
    assert float(valve_drop(2 * flow, kv, density)) == pytest.approx(4 * drop)


@given(POSITIVE, st.floats(1e-5, 1.0), st.floats(1e-6, 1.0), st.floats(0.5, 2000.0))
def test_a_valve_as_k_drops_the_same(kv: float, area: float, flow: float, density: float) -> None:
    k = float(k_of_kv(kv, area))
    assert float(fitting_drop(k, density, flow / area)) == pytest.approx(float(valve_drop(flow, kv, density)))
    assert float(kv_of_k(k, area)) == pytest.approx(kv)


def test_definition_of_kv() -> None:
    """Kv 1 passes 1 m3/h of 1000 kg/m3 at 1 bar."""
    assert float(valve_drop(1 / 3600, 1.0, 1000.0)) == pytest.approx(1e5)


@given(POSITIVE, st.floats(0.01, 0.1), st.floats(0.01, 1.0))
def test_equivalent_length_and_coefficient_undo_each_other(k: float, f: float, d: float) -> None:
    assert float(k_of_equivalent_length(equivalent_length(k, f, d), f, d)) == pytest.approx(k)
