"""Fluid properties against IAPWS-IF97, the published polynomials and a property library."""

import numpy as np
import pytest

from budget.physics.fluids import (
    AIR_RANGE,
    GLYCOL_RANGES,
    freezing_point,
    glycol,
    humid_air,
    saturation_pressure,
    standard_pressure,
    water,
)
from budget.physics.glycols import Basis, Kind
from tests.published.figures import column, table

COOLPROP = {
    ("propylene", "mass"): "MPG",
    ("ethylene", "mass"): "MEG",
    ("propylene", "volume"): "APG",
    ("ethylene", "volume"): "AEG",
}


def test_water_holds_iapws_if97_from_0_to_150_degc() -> None:
    state = water(column("water", "temp_c") + 273.15)
    np.testing.assert_allclose(state.density, column("water", "rho_kg_m3_iapws97"), rtol=0.05e-2)
    np.testing.assert_allclose(state.viscosity, column("water", "mu_pa_s_iapws97"), rtol=0.2e-2)
    np.testing.assert_allclose(state.specific_heat, column("water", "cp_j_kgk_iapws97"), rtol=0.1e-2)


def test_water_holds_iapws_95_too() -> None:
    state = water(column("water", "temp_c") + 273.15)
    np.testing.assert_allclose(state.density, column("water", "rho_coolprop_iapws95"), rtol=0.05e-2)
    np.testing.assert_allclose(state.viscosity, column("water", "mu_coolprop"), rtol=0.2e-2)


@pytest.mark.parametrize("row", table("glycol-freezing"), ids=lambda row: f"{row['coolprop_fluid']}-{row['percent']}")
def test_glycol_freezes_where_the_table_says(row: dict[str, str]) -> None:
    kind: Kind = "propylene" if row["glycol"].startswith("propylene") else "ethylene"
    basis: Basis = "mass" if row["basis"] == "mass" else "volume"
    freezing = float(freezing_point(kind, basis, float(row["percent"]) / 100)) - 273.15
    assert freezing == pytest.approx(float(row["freezing_c"]), abs=0.0051)


@pytest.mark.parametrize(("kind", "basis"), list(COOLPROP))
def test_glycol_holds_the_property_library(kind: Kind, basis: Basis) -> None:
    """CoolProp's incompressible fluids over all fractions, from 1 K above freezing to 99 degC."""
    props = pytest.importorskip("CoolProp.CoolProp").PropsSI
    least, most = GLYCOL_RANGES[kind, basis].fraction
    for x in np.linspace(max(least, 0.05), most, 5):
        name = f"INCOMP::{COOLPROP[kind, basis]}[{x}]"
        coldest = max(float(freezing_point(kind, basis, x)) + 1.0, GLYCOL_RANGES[kind, basis].temperature[0])
        for t in np.linspace(coldest, 372.15, 5):
            state = glycol(kind, basis, x, t)
            for value, key in (
                (state.density, "D"),
                (state.viscosity, "V"),
                (state.specific_heat, "C"),
            ):
                expected = props(key, "T", t, "P", 5e5, name)
                assert float(value) == pytest.approx(expected, rel=1e-6), (x, t, key)


def test_glycol_without_glycol_is_nearly_water() -> None:
    """The sets by mass reach down to pure water."""
    t = np.array([283.15, 313.15, 343.15])
    for kind in ("propylene", "ethylene"):
        mixture, pure = glycol(kind, "mass", 0.0, t), water(t)
        np.testing.assert_allclose(mixture.density, pure.density, rtol=0.005)
        np.testing.assert_allclose(mixture.viscosity, pure.viscosity, rtol=0.05)


def test_air_holds_the_table() -> None:
    """Altitudes 0 to 3000 m, -20 to 60 degC, dry to saturated."""
    t, p, rh = column("air", "temp_c") + 273.15, column("air", "p_pa"), column("air", "rh_pct") / 100
    state = humid_air(t, p, rh)
    np.testing.assert_allclose(state.density, column("air", "rho_ideal_psychrolib"), rtol=1e-4)
    np.testing.assert_allclose(state.density, column("air", "rho_coolprop_real"), rtol=0.2e-2)
    np.testing.assert_allclose(state.viscosity, column("air", "mu_coolprop_pa_s"), rtol=1e-2)


def test_air_specific_heat_and_saturation_hold_the_property_library() -> None:
    coolprop = pytest.importorskip("CoolProp.CoolProp")
    for t in np.linspace(*AIR_RANGE.temperature, 9):
        for rh in (0.0, 0.5, 1.0):
            expected = coolprop.HAPropsSI("cp_ha", "T", t, "P", 101325.0, "R", rh)
            tolerance = 0.5e-2 if t <= 313.15 else 1.5e-2
            assert float(humid_air(t, 101325.0, rh).specific_heat) == pytest.approx(expected, rel=tolerance)
        if t > 273.16:
            expected = coolprop.PropsSI("P", "T", t, "Q", 0, "IF97::Water")
            assert float(saturation_pressure(t)) == pytest.approx(expected, rel=1e-3)


def test_saturation_over_ice() -> None:
    """WMO: 103.2 Pa at -20 degC and 259.9 Pa at -10 degC over ice; 611.2 Pa at 0 degC (from memory)."""
    np.testing.assert_allclose(saturation_pressure([253.15, 263.15, 273.15]), [103.2, 259.9, 611.2], rtol=1e-3)


def test_standard_pressure_holds_the_table() -> None:
    name = "air-altitude"
    z = column(name, "altitude_m")
    headings = list(table(name)[0])
    np.testing.assert_allclose(standard_pressure(z), column(name, headings[2]), atol=0.11)
    np.testing.assert_allclose(standard_pressure(z), column(name, "p_pa_psychrolib"), atol=0.16)
    dry = humid_air(column(name, "temp_c") + 273.15, standard_pressure(z), 0.0).density
    np.testing.assert_allclose(dry, column(name, "rho_dry_kg_m3"), rtol=1e-4)
