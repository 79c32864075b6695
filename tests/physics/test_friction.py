"""Friction of straight legs: continuity, monotony, limits and standstill."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from budget.physics.friction import (
    REGIMES,
    colebrook,
    friction_factor,
    laminar_factor,
    mean_to_centre_ratio,
    pressure_gradient,
    regime,
    reynolds,
    wall_shear_stress,
)

ROUGHNESS = st.floats(0.0, 0.05)
CONSTANT = st.floats(56.0, 96.0)


@given(ROUGHNESS, CONSTANT, st.sampled_from([2300.0, 4000.0]))
def test_factor_and_its_slope_are_continuous_where_regimes_meet(e: float, constant: float, limit: float) -> None:
    step = 1e-3
    re = limit + step * np.array([-2.0, -1.0, 0.0, 1.0, 2.0])
    f = friction_factor(re, e, constant)
    below, above = f[1] - f[0], f[4] - f[3]
    assert np.ptp(f) < 1e-4 * f[2]
    assert above == pytest.approx(below, abs=1e-9)


@given(ROUGHNESS, CONSTANT)
def test_factor_follows_each_law_outside_the_transition(e: float, constant: float) -> None:
    low, high = np.array([1.0, 800.0, 2299.999]), np.array([4000.001, 3e4, 1e7])
    np.testing.assert_array_equal(friction_factor(low, e, constant), laminar_factor(low, constant))
    np.testing.assert_array_equal(friction_factor(high, e, constant), colebrook(high, e))


@given(ROUGHNESS, CONSTANT, st.floats(2300.0, 4000.0))
def test_factor_in_the_transition_lies_between_the_laws(e: float, constant: float, re: float) -> None:
    laws = sorted([float(laminar_factor(re, constant)), float(colebrook(re, e))])
    assert laws[0] * (1 - 1e-12) <= float(friction_factor(re, e, constant)) <= laws[1] * (1 + 1e-12)


@given(ROUGHNESS, st.floats(1e-9, 1e8), st.floats(1.0001, 3.0))
def test_the_gradient_grows_with_the_flow_in_every_regime(e: float, re: float, more: float) -> None:
    """Through the transition too, so a network has one solution; compared as f Re^2."""
    both = np.array([re, re * more])
    drop = friction_factor(both, e) * both**2
    assert drop[1] > drop[0]


@given(st.floats(4e3, 1e8), st.floats(0.0, 0.04), st.floats(1e-4, 0.01))
def test_turbulent_factor_grows_with_roughness_and_falls_with_reynolds(re: float, e: float, more: float) -> None:
    assert float(colebrook(re, e + more)) > float(colebrook(re, e))
    assert float(colebrook(re * 1.1, e)) < float(colebrook(re, e))


@given(st.floats(4e3, 1e8), ROUGHNESS)
def test_colebrook_satisfies_its_own_equation(re: float, e: float) -> None:
    x = 1 / np.sqrt(float(colebrook(re, e)))
    assert -2 * np.log10(e / 3.7 + 2.51 * x / re) == pytest.approx(x, rel=1e-13)


def test_fully_rough_limit() -> None:
    """von Karman: 1/sqrt f = 2 log10(3.7/e) as Re grows without bound."""
    assert float(colebrook(1e15, 0.01)) == pytest.approx((2 * np.log10(370.0)) ** -2, rel=1e-9)


def test_standstill_drops_nothing_and_warns_of_nothing() -> None:
    with np.errstate(all="raise"):
        v = np.array([0.0, 1e-12, 1.0])
        re = reynolds(998.0, v, 0.02, 1e-3)
        f = friction_factor(re, 1e-3)
        drop = pressure_gradient(f, 998.0, v, 0.02)
    assert f[0] == 0.0
    assert drop[0] == 0.0
    assert np.all(np.isfinite(f))
    # Hagen-Poiseuille, 32 mu v / D^2, down to the slowest creep
    assert drop[1] == pytest.approx(32 * 1e-3 * 1e-12 / 0.02**2)


def test_a_loss_has_the_sign_of_the_flow() -> None:
    v = np.array([-1.5, 1.5])
    f = friction_factor(reynolds(998.0, v, 0.05, 1e-3), 1e-3)
    drop = pressure_gradient(f, 998.0, v, 0.05)
    assert drop[0] == -drop[1] < 0


def test_arguments_broadcast_and_single_numbers_and_empty_arrays_work() -> None:
    re = np.array([[1000.0], [3000.0], [1e5]])
    assert friction_factor(re, np.array([0.0, 1e-3])).shape == (3, 2)
    assert float(friction_factor(1e5, 1e-4)) == pytest.approx(0.0185139, abs=1e-7)
    assert float(friction_factor(1000.0, 1e-4)) == pytest.approx(0.064)
    assert friction_factor(np.array([]), 1e-4).shape == (0,)


def test_a_mixed_array_gives_what_its_elements_give() -> None:
    re = np.array([0.0, 10.0, 2299.0, 2300.0, 3100.0, 4000.0, 4001.0, 1e6])
    e = np.geomspace(1e-5, 1e-2, len(re))
    each = [float(friction_factor(r, x, 70.0)) for r, x in zip(re, e, strict=True)]
    np.testing.assert_array_equal(friction_factor(re, e, 70.0), each)


def test_inputs_are_left_as_they_were() -> None:
    re, e = np.array([1000.0, 5000.0]), np.array([1e-3, 1e-3])
    friction_factor(re, e)
    np.testing.assert_array_equal(re, [1000.0, 5000.0])


@pytest.mark.parametrize(
    ("re", "name"),
    [
        (0.0, "laminar"), (2299.99, "laminar"), (2300.0, "transitional"), (4000.0, "transitional"),
        (4000.01, "turbulent"), (1e7, "turbulent"),
    ],
)  # fmt: skip
def test_regime(re: float, name: str) -> None:
    number = regime(re)
    assert REGIMES[int(number)] == name
    assert number.dtype == np.int8


@given(st.floats(0.1, 5.0), st.floats(0.01, 1.0), st.floats(1.0, 100.0))
def test_wall_shear_balances_the_drop(v: float, d: float, length: float) -> None:
    """Shear on the wall area equals the drop on the cross-section; and it is f/8 rho v^2."""
    f = 0.02
    drop = float(pressure_gradient(f, 1000.0, v, d)) * length
    shear = float(wall_shear_stress(drop, d, length))
    assert shear * np.pi * d * length == pytest.approx(drop * np.pi * d**2 / 4)
    assert shear == pytest.approx(f / 8 * 1000.0 * v**2)


def test_mean_to_centre_ratio() -> None:
    """0.5 in laminar flow; the ratios printed beside Nikuradse's exponents (Schlichting, from memory)."""
    assert float(mean_to_centre_ratio(1500.0)) == 0.5
    np.testing.assert_allclose(
        mean_to_centre_ratio([4e3, 2.3e4, 1.1e5, 1.1e6, 2e6, 1e8]),
        [0.791, 0.807, 0.817, 0.850, 0.866, 0.866],
        atol=6e-4,
    )
    assert np.all(np.diff(mean_to_centre_ratio(np.geomspace(100, 1e8, 400))) >= 0)
