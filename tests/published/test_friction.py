"""Friction against printed tables and against an independent solution of the Colebrook-White equation."""

import numpy as np
import pytest

from budget.physics.fittings import k_of_equivalent_length
from budget.physics.friction import colebrook, friction_factor, laminar_factor, pressure_gradient, reynolds
from budget.physics.shapes import flat_oval, rectangle
from tests.published.figures import column


def test_water_in_steel_pipe_holds_the_printed_losses_within_2_percent() -> None:
    """84 rows of the Hydraulic Institute Engineering Data Book and of Rishel, HVAC Pump Handbook (read)."""
    name = "friction-water-steel"
    d, rho = column(name, "id_mm") / 1000, column(name, "rho_kg_m3")
    v = column(name, "flow_kg_s") / rho / (np.pi * d**2 / 4)
    re = reynolds(rho, v, d, rho * column(name, "nu_m2_s"))
    gradient = pressure_gradient(friction_factor(re, column(name, "roughness_mm") / 1000 / d), rho, v, d)
    assert len(gradient) == 84
    np.testing.assert_allclose(v, column(name, "velocity_m_s"), rtol=1e-3)
    np.testing.assert_allclose(gradient, column(name, "dp_published_pa_m"), rtol=0.02)


def test_colebrook_agrees_with_the_table_to_its_last_digit() -> None:
    name = "friction-factor-checks"
    f = colebrook(column(name, "re"), column(name, "rel_roughness"))
    np.testing.assert_allclose(f, column(name, "Colebrook"), atol=0.51e-7, rtol=0)


def test_laminar_factor_agrees_with_the_table() -> None:
    name = "friction-factor-checks"
    printed = column(name, "laminar_64_over_re")
    given = ~np.isnan(printed)
    np.testing.assert_allclose(laminar_factor(column(name, "re"))[given], printed[given], atol=0.51e-6, rtol=0)


def test_colebrook_agrees_with_an_exact_solution_over_the_whole_range() -> None:
    """The fluids library solves the equation in closed form (Lambert W) or to the last digit numerically."""
    friction = pytest.importorskip("fluids.friction")
    grid = np.meshgrid(np.geomspace(4e3, 1e8, 23), [0, 1e-7, 1e-5, 1e-4, 1e-3, 1e-2, 0.05])
    re, rough = (axis.ravel() for axis in grid)
    exact = [friction.Colebrook(r, e, tol=-1) for r, e in zip(re, rough, strict=True)]
    np.testing.assert_allclose(colebrook(re, rough), exact, rtol=4e-15)


def test_rectangles_agree_with_the_printed_polynomial_and_nearly_with_the_exact_series() -> None:
    """Shah and London (1978): polynomial to its two digits, exact series within 0.07 %."""
    name = "laminar-rectangular"
    a = column(name, "short_over_long")
    constant = rectangle(1.0, np.maximum(a, 1e-12)).laminar_constant
    np.testing.assert_allclose(constant, column(name, "fRe_darcy_shah_london_polynomial"), atol=6e-4)
    np.testing.assert_allclose(constant, column(name, "fRe_darcy_exact_series"), rtol=7e-4)


def test_flat_ovals_agree_with_the_numerical_solution() -> None:
    name = "laminar-flat-oval"
    constant = flat_oval(column(name, "major_over_minor"), 1.0).laminar_constant
    np.testing.assert_allclose(constant, column(name, "fRe_darcy_numeric_Richardson"), atol=1e-9)


def test_equivalent_length_of_a_copper_circuit() -> None:
    """Trade journal column on equivalent resistance, table 1, 3/4 in copper (read): in all 104.8 ft."""
    fittings = {
        "elbow 90": (2.0, 6),
        "tee side": (3.0, 2),
        "tee straight": (0.4, 1),
        "globe": (20.0, 1),
        "ball": (2.2, 2),
    }
    total_ft = 62 + sum(length * count for length, count in fittings.values())
    assert total_ft == pytest.approx(104.8)
    d, f = 0.0206, 0.025
    k = sum(float(k_of_equivalent_length(length * 0.3048, f, d)) * count for length, count in fittings.values())
    v = 0.9
    straight = float(pressure_gradient(f, 985.0, v, d)) * 62 * 0.3048
    assert straight + k * 985.0 * v**2 / 2 == pytest.approx(
        float(pressure_gradient(f, 985.0, v, d)) * total_ft * 0.3048
    )
