"""Figures are spelled in the design's units, so that a column of them lines up."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from budget.description.model import Description, Design, Fluid
from budget.report.figures import NONE, Figures, plain_number, share
from budget.units import Dimension


def figures(units: str = "SI", fluid: str = "water", **display: str) -> Figures:
    design = Design(units="IP" if units == "IP" else "SI")
    return Figures(Description(design=design, fluid=Fluid(name=fluid), display=display))


@pytest.mark.parametrize(
    ("units", "fluid", "value", "dimension", "expected"),
    [
        ("SI", "water", 12_400.0, Dimension.PRESSURE, "12.40 kPa"),
        ("SI", "air", 12.46, Dimension.PRESSURE, "12.5 Pa"),
        ("IP", "water", 2989.067, Dimension.PRESSURE, "1.00 ftH2O"),
        ("IP", "air", 249.08891, Dimension.PRESSURE, "1.000 inH2O"),
        ("SI", "water", 0.00042, Dimension.FLOW, "0.420 L/s"),
        ("SI", "water", 14.5, Dimension.LENGTH, "14.5 m"),
        ("SI", "water", 343.15, Dimension.TEMPERATURE, "70.0 degC"),
        ("SI", "air", 0.876, Dimension.GRADIENT, "0.88 Pa/m"),
    ],
)
def test_spells_a_value_in_the_units_of_the_design(
    units: str, fluid: str, value: float, dimension: Dimension, expected: str
) -> None:
    assert figures(units, fluid).text(value, dimension, unit=True) == expected


def test_display_overrides_the_unit() -> None:
    assert figures(pressure="mbar", flow="m3/h").text(1234.0, Dimension.PRESSURE, unit=True) == "12.3 mbar"
    assert figures(flow="m3/h").flow(0.001, 0.98, unit=True) == "3.60 m3/h"


def test_a_flow_by_mass_and_a_pressure_as_head_are_shown_where_the_design_asks_for_them() -> None:
    assert figures(flow="kg/s").flow(0.001, 0.978, unit=True) == "0.978 kg/s"
    assert figures(pressure="m").pressure(9806.65, 1000.0, unit=True) == "1.0 m"
    assert figures(pressure="m").text(9806.65, Dimension.PRESSURE, unit=True) == "9.81 kPa"


@pytest.mark.parametrize("value", [None, math.nan, math.inf, -math.inf])
def test_what_cannot_be_computed_is_a_dash(value: float | None) -> None:
    assert figures().text(value, Dimension.PRESSURE, unit=True) == NONE
    assert plain_number(value) == NONE


def test_a_change_has_its_sign_and_none_is_told_for_none() -> None:
    spelled = figures()
    assert spelled.change(40_000.0, 41_800.0) == "+1.80 kPa"
    assert spelled.change(41_800.0, 40_000.0) == "-1.80 kPa"
    assert spelled.change(40_000.0, 40_000.001) == ""
    assert spelled.change(None, 40_000.0) == ""


def test_the_share_of_no_budget_is_nothing() -> None:
    assert share(5.0, 10.0) == 0.5
    assert share(5.0, 0.0) == 0.0


@given(st.floats(-1e6, 1e6))
def test_a_figure_is_the_value_within_half_its_last_decimal(value: float) -> None:
    text = figures().text(value, Dimension.PRESSURE)
    assert abs(float(text) - value / 1000.0) <= 0.005 + 1e-9
    assert text != "-0.00"
