"""Fittings by geometry against printed tables, other published methods and a general-purpose library."""

import tomllib

import numpy as np
import pytest
from fluids import fittings as library
from fluids.filters import round_edge_screen, square_edge_screen
from fluids.friction import ft_Crane

from budget.catalogue import coefficient, fitting_names, kind_coefficient
from budget.physics import area_changes, dampers, elbows, openings, valves
from budget.physics.fittings import coefficient_at
from tests.published.figures import DATA, column


def test_smooth_rectangular_elbows() -> None:
    """ASHRAE CR3-1, 55 printed figures (read); Idelchik's closed form, diagram 6-1, lies within 11.8 % of them."""
    name = "elbows-rectangular-smooth"
    radius, aspect, printed = (column(name, h) for h in ("radius_over_width", "height_over_width", "c_printed"))
    assert len(printed) == 55
    np.testing.assert_allclose(elbows.rectangular_smooth(radius, aspect), printed, rtol=1e-12)
    closed = elbows.rectangular_smooth_closed_form(radius, aspect)
    np.testing.assert_allclose(closed, column(name, "c_closed_form"), rtol=1e-3)
    np.testing.assert_allclose(closed, printed, rtol=0.118)


def test_between_the_printed_radii_the_table_follows_the_closed_form() -> None:
    """Interpolated at 0.55 to 1.75 r/W; Idelchik, diagram 6-1 (read and from memory): within the same 11.8 %."""
    radius, aspect = np.meshgrid([0.55, 0.6, 0.68, 0.85, 1.2, 1.75], [0.3, 0.6, 0.9, 1.2, 1.7, 2.5, 3.5])
    np.testing.assert_allclose(
        elbows.rectangular_smooth(radius, aspect), elbows.rectangular_smooth_closed_form(radius, aspect), rtol=0.118
    )


def test_mitred_rectangular_elbows() -> None:
    """SMACNA A-7 figure D, 54 printed figures (read); Idelchik's closed form within 9.8 %, 3.1 % above 0.3."""
    name = "elbows-rectangular-mitred"
    angle, aspect, printed = (column(name, h) for h in ("angle_deg", "height_over_width", "c_printed"))
    assert len(printed) == 54
    np.testing.assert_allclose(elbows.rectangular_mitre(angle, aspect), printed, rtol=1e-12)
    closed = elbows.mitre_closed_form(angle, aspect)
    np.testing.assert_allclose(closed, column(name, "c_closed_form"), rtol=1e-3)
    np.testing.assert_allclose(closed, printed, rtol=0.0985)
    high = printed > 0.3
    np.testing.assert_allclose(closed[high], printed[high], rtol=0.0315)


def test_mitred_round_elbows() -> None:
    """SMACNA A-7 figure C (read) against Idelchik's closed form: within 5 %."""
    angles = [20.0, 30.0, 45.0, 60.0, 75.0, 90.0]
    printed = [0.08, 0.16, 0.34, 0.55, 0.81, 1.2]
    np.testing.assert_allclose(elbows.round_mitre(angles), printed, rtol=1e-12)
    np.testing.assert_allclose(elbows.mitre_closed_form(angles), printed, rtol=0.05)


def test_factors_by_angle_and_reynolds_number() -> None:
    """SMACNA A-7 note 1 and the note to figure C (read)."""
    angles = [0, 20, 30, 45, 60, 75, 90, 110, 130, 150, 180]
    np.testing.assert_allclose(
        elbows.angle_factor(angles), [0, 0.31, 0.45, 0.6, 0.78, 0.9, 1.0, 1.13, 1.2, 1.28, 1.4], rtol=1e-12
    )
    re = np.array([1, 2, 3, 4, 6, 8, 10, 14]) * 1e4
    np.testing.assert_allclose(elbows.reynolds_factor(re), [1.4, 1.26, 1.19, 1.14, 1.09, 1.06, 1.04, 1.0], rtol=1e-12)


@pytest.mark.parametrize("bore", [0.0209, 0.0525, 0.1023])
@pytest.mark.parametrize("angle", [45.0, 90.0, 180.0, 540.0])
def test_pipe_bends(bore: float, angle: float) -> None:
    """Crane TP-410 by the fluids library, which fits a polynomial to n: within 4 % (library)."""
    ft = ft_Crane(bore)
    for radius in (1.0, 1.5, 2.0, 3.0, 4.0, 6.0, 8.0, 10.0, 12.0, 14.0, 16.0, 20.0):
        expected = library.bend_rounded(bore, angle, bend_diameters=radius, method="Crane")
        assert float(valves.bend(ft, radius, angle)) == pytest.approx(expected, rel=0.04)


def test_mitred_pipe_bends() -> None:
    """Crane TP-410 and Rennels and Hudson (2012) by the fluids library (read, library)."""
    ft = ft_Crane(0.1)
    for angle in (15.0, 30.0, 37.0, 45.0, 60.0, 90.0):
        assert float(valves.mitre(ft, angle)) == pytest.approx(library.bend_miter(angle, Di=0.1, method="Crane"))
        other = library.bend_miter(angle, method="Rennels")
        assert float(valves.mitre_closed_form(angle)) == pytest.approx(other)


@pytest.mark.parametrize("angle", [10.0, 30.0, 44.0, 46.0, 60.0, 120.0])
@pytest.mark.parametrize("ratio", [0.5, 0.7, 0.9])
def test_valves_with_a_reduced_bore(angle: float, ratio: float) -> None:
    """Crane TP-410 by the fluids library (library)."""
    ft = ft_Crane(0.1)
    for loss, n, function in (
        (valves.tapered_bore, 8.0, library.K_gate_valve_Crane),
        (valves.tapered_bore, 3.0, library.K_ball_valve_Crane),
        (valves.abrupt_bore, 18.0, library.K_plug_valve_Crane),
    ):
        assert float(loss(n * ft, ratio, angle)) == pytest.approx(function(0.1 * ratio, 0.1, angle))


def test_entries() -> None:
    """Idelchik and Crane by the fluids library (library), the supplement to Principles of HVAC, fitting 1-1 (read)."""
    for ratio in (0.0, 0.02, 0.06, 0.1, 0.12):
        expected = library.entrance_rounded(0.1, 0.1 * ratio, method="Crane")
        assert float(openings.rounded_entry_crane(ratio)) == pytest.approx(expected)
    for ratio in library.entrance_rounded_ratios_Idelchik:
        # The library draws a curve through the table.
        expected = library.entrance_rounded(0.1, 0.1 * ratio, method="Idelchik")
        assert float(openings.rounded_entry(ratio)) == pytest.approx(expected, abs=1e-3)
    for length in (0.025, 0.075, 0.15, 0.6):
        for angle in (10.0, 30.0, 60.0, 100.0, 180.0):
            # Its angle is that between bevel and axis, ours the included one.
            expected = library.entrance_beveled(0.1, 0.1 * length, angle / 2.0, method="Idelchik")
            assert float(openings.bevelled_entry(length, angle)) == pytest.approx(expected)
    thickness, out = np.meshgrid([0.0, 0.02, 0.05], [0.0, 0.002, 0.01, 0.05, 0.2, 0.5, 1.0], indexing="ij")
    printed = [
        [0.5, 0.57, 0.68, 0.8, 0.92, 1.0, 1.0],
        [0.5, 0.51, 0.52, 0.55, 0.66, 0.72, 0.72],
        [0.5, 0.5, 0.5, 0.5, 0.5, 0.5, 0.5],
    ]
    np.testing.assert_allclose(openings.plain_entry(thickness, out), printed, rtol=1e-12)
    for angle in (20.0, 45.0, 90.0):
        assert float(openings.inclined_entry(angle)) == pytest.approx(library.entrance_angled(angle))


def test_bellmouth_without_wall() -> None:
    """Supplement to Principles of HVAC, 9th ed., fitting 1-2 after Idelchik (read)."""
    ratios = [0, 0.01, 0.02, 0.03, 0.04, 0.05, 0.06, 0.08, 0.1, 0.12, 0.16, 0.2]
    printed = [1.0, 0.87, 0.74, 0.61, 0.51, 0.4, 0.32, 0.2, 0.15, 0.1, 0.06, 0.03]
    np.testing.assert_allclose(openings.bellmouth(ratios), printed, rtol=1e-12)


def test_sudden_changes() -> None:
    """Borda-Carnot in the Hydraulic Institute's eq. 3.B.3 (read); Idelchik's contraction (read and from memory)."""
    np.testing.assert_allclose(
        area_changes.sudden_enlargement([0.2, 0.4454, 0.5, 0.8]), [0.64, 0.3076, 0.25, 0.04], atol=5e-5
    )
    found = area_changes.sudden_contraction([0.2, 0.4, 0.6, 0.8])
    np.testing.assert_allclose(found, [0.4229, 0.3409, 0.2515, 0.1495], atol=5e-5)
    np.testing.assert_allclose(found, [0.5161, 0.4138, 0.2637, 0.1009], rtol=0.49)  # Rennels, another method


@pytest.mark.parametrize(
    ("angle", "idelchik", "gibson"),
    [(7.5, 0.1061, 0.126), (10, 0.1523, 0.1792), (15, 0.2538, 0.295), (20, 0.3656, 0.4213), (30, 0.6169, 0.7019)],
)
def test_gradual_enlargement(angle: float, idelchik: float, gibson: float) -> None:
    """Idelchik (from memory) and Gibson, 12 to 16 % above it, in the Hydraulic Institute's eq. 3.B.4 (read)."""
    share = float(area_changes.enlargement(0.5, angle)) / 0.25
    assert share == pytest.approx(idelchik, abs=5e-5)
    assert 1.12 < gibson / share < 1.19


def test_gradual_enlargement_against_the_table_of_cones() -> None:
    """Idelchik's table, printed to two decimals, out of the fluids library (library): within 0.02 or 12 %."""
    angles = np.array(library.diffuser_conical_Idelchik_angles)
    up_to_40 = (angles >= 6) & (angles <= 40)
    for ratio, row in zip(
        library.diffuser_conical_Idelchik_A_ratios, library.diffuser_conical_Idelchik_data, strict=True
    ):
        expected = np.array(row)[up_to_40]
        np.testing.assert_allclose(
            area_changes.enlargement(ratio, angles[up_to_40]), expected, rtol=0.12, atol=0.02, err_msg=str(ratio)
        )


def test_gradual_contraction() -> None:
    """Idelchik's formula, diagram 5-23 (from memory); at 180 degrees the sudden contraction takes its place."""
    angles = [30.0, 60.0, 90.0, 120.0]
    np.testing.assert_allclose(area_changes.contraction(0.25, angles), [0.04423, 0.1052, 0.1774, 0.2552], rtol=1e-3)
    np.testing.assert_allclose(area_changes.contraction(0.5, angles), [0.0342, 0.08137, 0.1372, 0.1973], rtol=1e-3)
    np.testing.assert_allclose(area_changes.contraction([0.25, 0.5], 180.0), [0.4052, 0.3133], rtol=0.052)


def test_gradual_contraction_against_the_table_of_ducts() -> None:
    """SMACNA (1990) table 14-12 A, area ratios 2 and 4 (read), from 90 degrees on: within 20 %."""
    angles = [90.0, 120.0, 150.0, 180.0]
    for ratio, printed in ((0.5, [0.12, 0.18, 0.24, 0.26]), (0.25, [0.17, 0.27, 0.35, 0.41])):
        np.testing.assert_allclose(area_changes.contraction(ratio, angles), printed, rtol=0.2)
        np.testing.assert_allclose(area_changes.duct_convergence(ratio, angles), printed, rtol=1e-12)


def test_rounded_contraction() -> None:
    """Idelchik by the fluids library (library)."""
    for ratio, radius in ((0.25, 0.05), (0.5, 0.02), (0.8, 0.12)):
        expected = library.contraction_round(0.1, 0.1 * ratio**0.5, rc=radius * 0.1 * ratio**0.5, method="Idelchik")
        assert float(area_changes.rounded_contraction(ratio, radius)) == pytest.approx(expected)


def test_screens_and_plates() -> None:
    """Values of Idelchik's formulas, the ASHRAE rows (from memory), and other methods by the fluids library."""
    free = [0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9]
    screens = openings.wire_screen(free)
    np.testing.assert_allclose(screens, [6.354, 3.03, 1.65, 0.9644, 0.5737, 0.3225, 0.1423], rtol=1e-3)
    np.testing.assert_allclose(screens, [6.2, 3.0, 1.7, 0.97, 0.58, 0.32, 0.14], rtol=0.03)
    other = [round_edge_screen(n, 1e4) for n in free[2:6]]
    np.testing.assert_allclose(screens[2:6], other, rtol=0.12)
    plates = openings.perforated_plate([0.2, 0.3, 0.4, 0.5, 0.6, 0.8])
    np.testing.assert_allclose(plates, [51.29, 18.53, 8.232, 3.999, 1.993, 0.4163], rtol=1e-3)
    np.testing.assert_allclose(plates[:4], [51.5, 18.2, 8.25, 4.0], rtol=0.02)
    other = [square_edge_screen(n) for n in (0.3, 0.5)]
    np.testing.assert_allclose(plates[[1, 3]], other, rtol=0.1)


def test_round_blade_damper() -> None:
    """ASHRAE CD9-1 against Idelchik's closed form, diagram 9-16 (both from memory): within 18 % from 10 degrees on."""
    angles = [10.0, 20.0, 30.0, 40.0, 50.0, 60.0]
    closed = dampers.round_blade_closed_form(angles)
    np.testing.assert_allclose(closed, [0.7882, 1.879, 4.494, 11.34, 32.13, 113.3], rtol=1e-3)
    np.testing.assert_allclose(dampers.round_blade(angles), closed, rtol=0.18)


def test_air_drops_of_a_printed_example() -> None:
    """SMACNA (1990) chapter 8 example 1: open damper 0.6 Pa at 5 m/s of standard air (read)."""
    found = kind_coefficient(
        "damper rectangular blade", {"angle": 0.0}, shape="rectangular", width=1.0, height=0.2, nominal=1.0
    )
    assert found.constant * 15.1 == pytest.approx(0.6, rel=0.01)


CHECKS = tomllib.loads((DATA / "fitting-checks.toml").read_text(encoding="utf-8"))["check"]


def test_every_fitting_by_name_has_a_check() -> None:
    assert {check["name"] for check in CHECKS} == set(fitting_names())
    assert all(check["source"] and check["known_from"] and 0.0 < check["tolerance"] <= 0.5 for check in CHECKS)


@pytest.mark.parametrize("check", CHECKS, ids=lambda check: f"{check['name']}, {check['method']}")
def test_fittings_by_name(check: dict[str, float | str]) -> None:
    """One published figure or more for each fitting by name; sources stand beside the figures."""
    nominal, bore = float(check["nominal"]) / 1000.0, float(check["bore"]) / 1000.0
    found = coefficient(str(check["name"]), str(check["method"]), nominal, bore)
    assert found is not None
    assert found.in_range
    value = float(coefficient_at(found.constant, found.per_reynolds, float(check.get("reynolds", 1e6))))
    assert value == pytest.approx(float(check["k"]), rel=float(check["tolerance"]))
