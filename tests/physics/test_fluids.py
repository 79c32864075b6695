"""Fluids: trends, ranges, shapes."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from budget.physics.fluids import (
    AIR_RANGE,
    GLYCOL_RANGES,
    STANDARD_PRESSURE,
    WATER_RANGE,
    freezing_point,
    glycol,
    humid_air,
    saturation_pressure,
    standard_pressure,
    water,
)
from budget.physics.glycols import Basis, Kind

SETS = list(GLYCOL_RANGES)


def test_water_by_hand_at_20_degc() -> None:
    """998.2 kg/m3, 1.002 mPa s, 4.18 kJ/(kg K): the figures of every handbook."""
    state = water(293.15)
    assert float(state.density) == pytest.approx(998.2, abs=0.05)
    assert float(state.viscosity) == pytest.approx(1.002e-3, abs=1e-6)
    assert float(state.specific_heat) == pytest.approx(4183, abs=3)


@given(st.floats(278.0, 420.0), st.floats(0.5, 3.0))
def test_warmer_water_is_lighter_and_thinner(t: float, more: float) -> None:
    cold, warm = water(t), water(t + more)
    assert float(warm.density) < float(cold.density)
    assert float(warm.viscosity) < float(cold.viscosity)


def test_states_take_the_shape_of_their_arguments() -> None:
    t = np.array([280.0, 300.0, 320.0])
    assert water(t).density.shape == (3,)
    assert humid_air(t, 1e5, 0.5).viscosity.shape == (3,)
    mixture = glycol("propylene", "mass", np.array([[0.2], [0.4]]), t)
    assert mixture.density.shape == mixture.viscosity.shape == mixture.specific_heat.shape == (2, 3)


@pytest.mark.parametrize(("kind", "basis"), SETS)
def test_more_glycol_is_denser_thicker_and_freezes_later(kind: Kind, basis: Basis) -> None:
    x = np.linspace(0.15, 0.55, 9)
    state = glycol(kind, basis, x, 303.15)
    assert np.all(np.diff(state.density) > 0)
    assert np.all(np.diff(state.viscosity) > 0)
    assert np.all(np.diff(state.specific_heat) < 0)
    assert np.all(np.diff(freezing_point(kind, basis, x)) < 0)


@given(st.floats(255.0, 330.0), st.floats(0.0, 0.95))
def test_moister_air_is_lighter_and_holds_more_heat(t: float, rh: float) -> None:
    drier, moister = humid_air(t, STANDARD_PRESSURE, rh), humid_air(t, STANDARD_PRESSURE, rh + 0.05)
    assert float(moister.density) < float(drier.density)
    assert float(moister.specific_heat) > float(drier.specific_heat)


def test_dry_air_is_an_ideal_gas() -> None:
    assert float(humid_air(293.15, 101325.0, 0.0).density) == pytest.approx(1.2041, abs=1e-4)
    halved = humid_air(293.15, 101325.0 / 2, 0.0)
    assert float(halved.density) == pytest.approx(1.2041 / 2, abs=1e-4)


def test_air_that_would_boil_stays_finite() -> None:
    state = humid_air(400.0, 101325.0, 1.0)
    assert float(state.density) == pytest.approx(101325.0 / (461.52 * 400.0), rel=1e-3)
    assert float(state.specific_heat) == pytest.approx(1860.0)


def test_saturation_is_continuous_over_the_freezing_point_and_100_degc_boils() -> None:
    below, above = saturation_pressure([273.15 - 1e-6, 273.15])
    assert below == pytest.approx(above, rel=1e-4)
    assert float(saturation_pressure(373.124)) == pytest.approx(101_325.0, rel=5e-4)


def test_pressure_falls_with_altitude() -> None:
    z = np.linspace(-500.0, 5000.0, 12)
    assert float(standard_pressure(0.0)) == STANDARD_PRESSURE
    assert np.all(np.diff(standard_pressure(z)) < 0)


def test_ranges_say_what_they_cover() -> None:
    assert WATER_RANGE.covers(273.15)
    assert not WATER_RANGE.covers(424.0)
    assert AIR_RANGE.covers(293.15, 0.5)
    assert not AIR_RANGE.covers(293.15, 1.1)
    by_volume = GLYCOL_RANGES["ethylene", "volume"]
    np.testing.assert_array_equal(by_volume.covers([300.0, 300.0, 380.0], [0.3, 0.05, 0.3]), [True, False, False])
    assert all(validity.source and validity.known_from for validity in [WATER_RANGE, AIR_RANGE, by_volume])
