"""Duct lines and the standard grid."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from budget.catalogue import (
    duct_line,
    duct_names,
    is_standard_rectangle,
    is_standard_round,
    nearest_round,
    standard_sizes,
)
from budget.catalogue.ducts import System

INCH = 0.0254


@pytest.mark.parametrize(
    ("name", "millimetres", "flexible"),
    [
        ("galvanised steel", 0.09, False), ("aluminium", 0.05, False), ("flexible", 0.9, True),
        ("fibrous lined", 0.9, False), ("concrete or brick shaft", 1.3, False), ("plastic", 0.046, False),
    ],
)  # fmt: skip
def test_ducts(name: str, millimetres: float, flexible: bool) -> None:
    line = duct_line(name.upper())
    assert line is not None
    assert line.name in duct_names()
    assert (line.roughness, line.flexible) == (float(f"{millimetres}e-3"), flexible)
    assert line.roughness_range[0] <= line.roughness <= line.roughness_range[1]
    assert line.source
    assert line.known_from


def test_there_are_six() -> None:
    assert len(duct_names()) == 6
    assert duct_line("cardboard") is None


@pytest.mark.parametrize(
    ("diameter", "system", "standard"),
    [
        (0.250, "SI", True), (0.355, "SI", True), (0.2504, "SI", True), (0.251, "SI", False),
        (0.260, "SI", False),
        (12 * INCH, "IP", True), (11 * INCH, "IP", False), (12 * INCH, "SI", False),
    ],
)  # fmt: skip
def test_round_sizes(diameter: float, system: System, standard: bool) -> None:
    assert is_standard_round(diameter, system) is standard


@pytest.mark.parametrize(
    ("width", "height", "system", "standard"),
    [
        (0.600, 0.300, "SI", True), (0.300, 0.600, "SI", True), (0.400, 0.100, "SI", True),
        (0.500, 0.100, "SI", False),
        (0.650, 0.300, "SI", False), (0.150, 0.100, "SI", False), (2.0, 1.2, "SI", True),
        (2.0, 1.4, "SI", False),
        (24 * INCH, 12 * INCH, "IP", True), (25 * INCH, 12 * INCH, "IP", False),
        (48 * INCH, 4 * INCH, "IP", False),
    ],
)  # fmt: skip
def test_rectangular_sizes(width: float, height: float, system: System, standard: bool) -> None:
    assert is_standard_rectangle(width, height, system) is standard


@given(st.floats(0.05, 2.0), st.floats(0.05, 2.0))
def test_a_rectangle_may_lie_or_stand(width: float, height: float) -> None:
    assert is_standard_rectangle(width, height) == is_standard_rectangle(height, width)


def test_nearest_round_sizes() -> None:
    assert nearest_round(0.26) == pytest.approx([0.25, 0.3, 0.315])
    assert nearest_round(5.0, count=2) == pytest.approx([1.12, 1.25])
    assert [d / INCH for d in nearest_round(11 * INCH, "IP", 2)] == pytest.approx([10, 12])


def test_grids_carry_their_source() -> None:
    for system in ("SI", "IP"):
        for shape in ("round", "rectangular"):
            grid = standard_sizes(shape, system)
            assert list(grid.sides) == sorted(grid.sides)
            assert grid.source
            assert grid.known_from
