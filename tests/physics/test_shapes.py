"""Cross-sections, equal-friction diameters and compressed flexible duct."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from budget.physics.shapes import circle, flat_oval, flexible_factor, heyt_diaz, huebscher, rectangle

SIDE = st.floats(0.05, 3.0)


def test_circle() -> None:
    pipe = circle([0.1, 0.2])
    np.testing.assert_allclose(pipe.area, [0.00785398, 0.0314159], rtol=1e-6)
    np.testing.assert_allclose(pipe.hydraulic_diameter, [0.1, 0.2])
    np.testing.assert_allclose(pipe.perimeter * pipe.hydraulic_diameter / 4, pipe.area)
    np.testing.assert_array_equal(pipe.laminar_constant, 64.0)


@given(SIDE, SIDE)
def test_sides_may_be_given_either_way_round(a: float, b: float) -> None:
    for shape in (rectangle, flat_oval):
        one, other = shape(a, b), shape(b, a)
        assert one.area == other.area
        assert one.laminar_constant == other.laminar_constant
    assert huebscher(a, b) == huebscher(b, a)
    assert heyt_diaz(a, b) == heyt_diaz(b, a)


@given(SIDE, SIDE)
def test_hydraulic_diameter_is_four_areas_over_the_perimeter(a: float, b: float) -> None:
    duct = rectangle(a, b)
    assert float(duct.area) == pytest.approx(a * b)
    assert float(duct.hydraulic_diameter) == pytest.approx(2 * a * b / (a + b))
    oval = flat_oval(a, b)
    assert float(oval.hydraulic_diameter) == pytest.approx(4 * float(oval.area) / float(oval.perimeter))
    assert float(oval.area) < float(duct.area)


@given(SIDE)
def test_a_flat_oval_of_equal_axes_is_a_circle(d: float) -> None:
    oval, pipe = flat_oval(d, d), circle(d)
    for field in ("area", "perimeter", "hydraulic_diameter", "laminar_constant"):
        assert float(getattr(oval, field)) == pytest.approx(float(getattr(pipe, field)))
    assert float(heyt_diaz(d, d)) == pytest.approx(d, rel=0.003)


@given(SIDE, st.floats(1.0, 20.0))
def test_laminar_constant_stays_between_the_circle_or_square_and_parallel_plates(a: float, aspect: float) -> None:
    assert 56.8 < float(rectangle(a * aspect, a).laminar_constant) < 96.0
    assert 64.0 <= float(flat_oval(a * aspect, a).laminar_constant) < 96.0


@given(SIDE, SIDE, st.floats(0.1, 10.0))
def test_equal_friction_diameters_scale_with_the_duct(a: float, b: float, scale: float) -> None:
    assert float(huebscher(a * scale, b * scale)) == pytest.approx(float(huebscher(a, b)) * scale)
    assert float(heyt_diaz(a * scale, b * scale)) == pytest.approx(float(heyt_diaz(a, b)) * scale)


@given(st.floats(0.0, 0.3), st.floats(0.1, 0.5))
def test_flexible_factor_is_one_stretched_and_grows_with_compression(r: float, d: float) -> None:
    assert float(flexible_factor(0.0, d)) == 1.0
    assert float(flexible_factor(r + 0.05, d)) > float(flexible_factor(r, d)) >= 1.0
    assert float(flexible_factor(0.1, d)) > float(flexible_factor(0.1, d + 0.05))


def test_flexible_factor_in_millimetres() -> None:
    """The same law as it stands in SI: 0.58 r exp(-0.00496 D), r in percent, D in mm."""
    assert float(flexible_factor(0.15, 0.2)) == pytest.approx(1 + 0.58 * 15 * np.exp(-0.00496 * 200), rel=5e-4)
