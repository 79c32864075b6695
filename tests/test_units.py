"""Units: every factor against an independent library, every spelling, every refusal, round trips."""

import math
import time
from typing import Literal

import pint
import pytest
from hypothesis import given
from hypothesis import strategies as st

from budget.units import (
    LONGEST_TEXT,
    Basis,
    Dimension,
    Quantity,
    UnitError,
    bare,
    bare_unit,
    basis_of,
    factors,
    from_unit,
    parse,
    spell,
    to_unit,
    units_of,
)

# How the independent library calls a unit, and what it is compared in.
PINT_NAMES = {
    "L/s": "liter/second",
    "L/min": "liter/minute",
    "L/h": "liter/hour",
    "gpm": "gallon/minute",
    "cfm": "foot**3/minute",
    "lb/h": "pound/hour",
    "inH2O": "inch_H2O_conventional",
    "ftH2O": "foot_H2O_conventional",
    "mmH2O": "millimeter_H2O_conventional",
    "mH2O": "1000*millimeter_H2O_conventional",
    "mmH2O/m": "millimeter_H2O_conventional/meter",
    "inH2O/100ft": "inch_H2O_conventional/(100*foot)",
    "ftH2O/100ft": "foot_H2O_conventional/(100*foot)",
    "ft/s": "foot/second",
    "fpm": "foot/minute",
    "Btu/h": "Btu_it/hour",
    "MBH": "1000*Btu_it/hour",
    "TR": "12000*Btu_it/hour",
    "delta_degC": "delta_degC",
    "lb/ft3": "pound/foot**3",
    "Pa s": "pascal*second",
    "mPa s": "millipascal*second",
    "uPa s": "micropascal*second",
    "cP": "centipoise",
    "cSt": "centistokes",
    "J/(kg K)": "joule/(kilogram*kelvin)",
    "kJ/(kg K)": "kilojoule/(kilogram*kelvin)",
    "Btu/(lb degF)": "Btu_it/(pound*delta_degF)",
    "deg": "degree",
    "m3/s": "meter**3/second",
    "m3/h": "meter**3/hour",
    "kg/m3": "kilogram/meter**3",
    "m2/s": "meter**2/second",
    "mm2/s": "millimeter**2/second",
    "um": "micrometer",
}
PINT_BASE = {
    Dimension.LENGTH: "meter",
    Dimension.FLOW: "meter**3/second",
    Dimension.PRESSURE: "pascal",
    Dimension.GRADIENT: "pascal/meter",
    Dimension.VELOCITY: "meter/second",
    Dimension.POWER: "watt",
    Dimension.TEMPERATURE: "kelvin",
    Dimension.DIFFERENCE: "kelvin",
    Dimension.DENSITY: "kilogram/meter**3",
    Dimension.VISCOSITY: "pascal*second",
    Dimension.SPECIFIC_HEAT: "joule/kilogram/kelvin",
    Dimension.ANGLE: "degree",
    Dimension.FRACTION: "dimensionless",
}
PINT_BASE_OF_BASIS = {Basis.MASS: "kilogram/second", Basis.HEAD: "meter", Basis.KINEMATIC: "meter**2/second"}
ROWS = [(row.dimension, row.unit) for row in factors()]
SYSTEMS: tuple[Literal["SI", "IP"], ...] = ("SI", "IP")
Registry = pint.UnitRegistry[float]
FINITE = st.floats(min_value=-1e12, max_value=1e12).filter(lambda x: x == 0 or abs(x) > 1e-12)


@pytest.fixture(scope="module")
def registry() -> Registry:
    registry: Registry = pint.UnitRegistry()
    column = "1000 kg/m**3 * 9.80665 m/s**2"
    registry.define(f"inch_H2O_conventional = {column} * inch")
    registry.define(f"foot_H2O_conventional = {column} * foot")
    registry.define(f"millimeter_H2O_conventional = {column} * millimeter")
    return registry


@pytest.mark.parametrize(("dimension", "unit"), ROWS, ids=str)
def test_every_factor_agrees_with_an_independent_library(registry: Registry, dimension: Dimension, unit: str) -> None:
    basis = basis_of(unit, dimension)
    base = PINT_BASE_OF_BASIS.get(basis, PINT_BASE[dimension])
    for number in (0.0, 1.0, 37.25):
        if unit == "%":
            expected = number / 100
        elif unit in ("degC", "degF"):
            expected = registry.Quantity(number, unit).to(base).magnitude
        else:
            scale = registry.parse_expression(PINT_NAMES.get(unit, unit)).to(base).magnitude
            expected = number * scale
        assert from_unit(number, unit, dimension) == pytest.approx(expected, rel=1e-12)


def test_the_water_column_is_the_conventional_one(registry: Registry) -> None:
    # NIST SP 811 (2008), table B.8: inch of water, conventional: 2.490889 E+02 Pa.
    assert parse("1 inH2O", Dimension.PRESSURE).value == pytest.approx(249.08891, rel=1e-9)
    assert registry.Quantity(1, "inH2O").to("Pa").magnitude == pytest.approx(249.08891, rel=1e-9)


@pytest.mark.parametrize(
    ("text", "dimension", "value", "basis"),
    [
        ("12.4 m", Dimension.LENGTH, 12.4, Basis.PLAIN),
        ("12.4m", Dimension.LENGTH, 12.4, Basis.PLAIN),
        ("  +12.4   m ", Dimension.LENGTH, 12.4, Basis.PLAIN),
        (".5 m", Dimension.LENGTH, 0.5, Basis.PLAIN),
        ("5. m", Dimension.LENGTH, 5.0, Basis.PLAIN),
        ("1e3 mm", Dimension.LENGTH, 1.0, Basis.PLAIN),
        ("46 µm", Dimension.LENGTH, 46e-6, Basis.PLAIN),
        ("46 μm", Dimension.LENGTH, 46e-6, Basis.PLAIN),
        ("15 %", Dimension.FRACTION, 0.15, Basis.PLAIN),
        ("15%", Dimension.FRACTION, 0.15, Basis.PLAIN),
        ("36 m³/h", Dimension.FLOW, 0.01, Basis.PLAIN),
        ("36 m^3 / h", Dimension.FLOW, 0.01, Basis.PLAIN),
        ("0.42 l/s", Dimension.FLOW, 0.42e-3, Basis.PLAIN),
        ("3600 kg/h", Dimension.FLOW, 1.0, Basis.MASS),
        ("0.1 in. w.g.", Dimension.PRESSURE, 24.908891, Basis.PLAIN),
        ("1 inH₂O", Dimension.PRESSURE, 249.08891, Basis.PLAIN),
        ("3 m", Dimension.PRESSURE, 3.0, Basis.HEAD),
        ("10 ft", Dimension.PRESSURE, 3.048, Basis.HEAD),
        ("0.1 in wg/100 ft", Dimension.GRADIENT, 24.908891 / 30.48, Basis.PLAIN),
        ("20 °C", Dimension.TEMPERATURE, 293.15, Basis.PLAIN),
        ("20 ℃", Dimension.TEMPERATURE, 293.15, Basis.PLAIN),
        ("20 deg C", Dimension.TEMPERATURE, 293.15, Basis.PLAIN),
        ("−10 °F", Dimension.TEMPERATURE, 249.816666666667, Basis.PLAIN),
        ("300 K", Dimension.TEMPERATURE, 300.0, Basis.PLAIN),
        ("300 K", Dimension.DIFFERENCE, 300.0, Basis.PLAIN),
        ("18 delta_degF", Dimension.DIFFERENCE, 10.0, Basis.PLAIN),
        ("18 Δ°F", Dimension.DIFFERENCE, 10.0, Basis.PLAIN),
        ("1.0 mPa·s", Dimension.VISCOSITY, 1e-3, Basis.PLAIN),
        ("18.2 µPa s", Dimension.VISCOSITY, 18.2e-6, Basis.PLAIN),
        ("1 mm²/s", Dimension.VISCOSITY, 1e-6, Basis.KINEMATIC),
        ("4.19 kJ/(kg·K)", Dimension.SPECIFIC_HEAT, 4190.0, Basis.PLAIN),
        ("45°", Dimension.ANGLE, 45.0, Basis.PLAIN),
    ],
)
def test_what_is_read(text: str, dimension: Dimension, value: float, basis: Basis) -> None:
    quantity = parse(text, dimension)
    assert quantity.value == pytest.approx(value, rel=1e-12)
    assert (quantity.dimension, quantity.basis) == (dimension, basis)


@pytest.mark.parametrize(
    ("text", "dimension", "message", "remedy"),
    [
        ("12,4 m", Dimension.LENGTH, "decimal comma", '"12.4 m": a decimal point'),
        ("1,234 m", Dimension.LENGTH, "has a comma", '"1.234 m" or "1234 m"'),
        ("1,234.5 Pa", Dimension.PRESSURE, "between thousands", '"1234.5 Pa"'),
        ("1_000 m", Dimension.LENGTH, "underscore", '"1000 m"'),
        ("nan m", Dimension.LENGTH, "not a finite number", "finite"),
        ("-inf m", Dimension.LENGTH, "not a finite number", "finite"),
        ("Infinity", Dimension.LENGTH, "not a finite number", "finite"),
        ("1e999 m", Dimension.LENGTH, "not a finite number", "finite"),
        ("1e308 kPa", Dimension.PRESSURE, "not a finite number", "finite"),
        ("0x1F m", Dimension.LENGTH, "not a decimal number", "digits"),
        ("0b1", Dimension.LENGTH, "not a decimal number", "digits"),
        ("9**9**9 m", Dimension.LENGTH, "not a number and a unit", "a number and m, mm"),
        ("3 * 4 m", Dimension.LENGTH, "not a number and a unit", "a number and m, mm"),
        ("3/4 in", Dimension.LENGTH, "written as a fraction", '"0.75 in"'),
        ("1-1/2 in", Dimension.LENGTH, "written as a fraction", '"1.5 in"'),
        ("1 1/0 in", Dimension.LENGTH, "not a number and a unit", "a number and"),
        ("5", Dimension.LENGTH, "has no unit", "5 m, mm, cm, um, ft or in"),
        ("", Dimension.LENGTH, "nothing was written", "a number and m"),
        (" ", Dimension.ANGLE, "nothing was written", "a number and deg"),
        ("٣ m", Dimension.LENGTH, "not a number and a unit", "a number and"),
        ("5 \x1b[0m", Dimension.LENGTH, "not a number and a unit", "a number and"),
        ("5 kPa", Dimension.FLOW, "is a pressure, and a flow was due", "5 m3/s"),
        ("5 m", Dimension.GRADIENT, "is a length, and a gradient was due", "Pa/m"),
        ("5 degC", Dimension.DIFFERENCE, "is a temperature, and a temperature difference was due", "5 K"),
        ("5 delta_degF", Dimension.TEMPERATURE, "is a temperature difference", "5 degC, degF or K"),
        ("5 kpa", Dimension.PRESSURE, 'the unit "kpa" is not known', "did you mean kPa?"),
        ("5 lps", Dimension.FLOW, 'the unit "lps" is not known', "did you mean L/s?"),
        ("5 metres", Dimension.LENGTH, 'the unit "metres" is not known', "m, mm"),
        ("5 qqq", Dimension.LENGTH, 'the unit "qqq" is not known', "write 5 m, mm"),
        ("1" * (LONGEST_TEXT + 1), Dimension.LENGTH, "65 characters", "a number and a unit"),
    ],
)
def test_what_is_refused(text: str, dimension: Dimension, message: str, remedy: str) -> None:
    with pytest.raises(UnitError) as caught:
        parse(text, dimension)
    assert message in caught.value.message
    assert remedy in caught.value.remedy
    assert "\x1b" not in str(caught.value)
    assert len(str(caught.value)) < 300


def test_a_remedy_for_a_number_that_is_written_otherwise_is_itself_read() -> None:
    for text in ("12,4 m", "1_000 m", "1,234.5 m", "3/4 in", "1-1/2 in"):
        with pytest.raises(UnitError) as caught:
            parse(text, Dimension.LENGTH)
        assert parse(caught.value.remedy.split('"')[1], Dimension.LENGTH).value > 0


def test_no_text_takes_long() -> None:
    start = time.process_time()
    texts = ("9**9**9 m", "9" * 10_000_000, " " * 64, "1" * 64, "1" + " " * 62 + "]", "1," * 32, "1-" * 32)
    for text in texts:
        with pytest.raises(UnitError):
            parse(text, Dimension.LENGTH)
    assert time.process_time() - start < 4.0


@given(st.text(max_size=80), st.sampled_from(Dimension))
def test_any_text_is_read_or_refused(text: str, dimension: Dimension) -> None:
    try:
        quantity = parse(text, dimension)
    except UnitError as error:
        refused = error
    else:
        assert math.isfinite(quantity.value)
        assert quantity.dimension is dimension
        return
    assert refused.message
    assert refused.remedy
    assert str(refused).isprintable()


def test_a_bare_number_takes_the_default_unit() -> None:
    assert parse("5", Dimension.PRESSURE, default_unit="kPa").value == 5000
    assert parse("5", Dimension.PRESSURE, default_unit="m").basis is Basis.HEAD
    assert parse("5 Pa", Dimension.PRESSURE, default_unit="kPa").value == 5
    assert parse("0.15", Dimension.FRACTION, default_unit="").value == 0.15
    with pytest.raises(UnitError, match="has no unit"):
        parse("0.15", Dimension.FRACTION)


def test_a_bare_value_from_a_file() -> None:
    assert bare(40, Dimension.LENGTH, "mm") == Quantity(0.04, Dimension.LENGTH)
    assert bare(0.15, Dimension.FRACTION, "") == Quantity(0.15, Dimension.FRACTION)
    assert bare(2, Dimension.FLOW, "kg/s").basis is Basis.MASS
    for bad in (math.nan, math.inf, -math.inf, True, False, 10**400):
        with pytest.raises(UnitError):
            bare(bad, Dimension.LENGTH, "mm")
    with pytest.raises(UnitError, match="not known"):
        bare(1, Dimension.LENGTH, "furlong")


def test_every_dimension_has_its_bare_unit() -> None:
    for dimension in Dimension:
        for gas in (True, False):
            for small in (True, False):
                for system in SYSTEMS:
                    unit = bare_unit(dimension, system, gas=gas, small=small)
                    assert bare(1, dimension, unit).basis is Basis.PLAIN
    assert bare_unit(Dimension.LENGTH, "SI", gas=False) == "m"
    assert bare_unit(Dimension.LENGTH, "SI", gas=False, small=True) == "mm"
    assert bare_unit(Dimension.LENGTH, "IP", gas=False, small=True) == "in"
    assert bare_unit(Dimension.PRESSURE, "SI", gas=True) == "Pa"
    assert bare_unit(Dimension.PRESSURE, "SI", gas=False) == "kPa"
    assert bare_unit(Dimension.FLOW, "IP", gas=True) == "cfm"
    assert bare_unit(Dimension.FLOW, "IP", gas=False) == "gpm"
    assert bare_unit(Dimension.VELOCITY, "IP", gas=True) == "fpm"


def test_every_spelling_in_the_list_is_read_and_is_no_other_unit() -> None:
    for row in factors():
        seen = {row.unit, *row.spellings}
        assert len(seen) == 1 + len(row.spellings)
        for spelling in seen:
            read = parse(f"1 {spelling}", row.dimension)
            assert read.value == pytest.approx((1 + row.offset) * row.factor, rel=1e-15)
            assert read.basis is row.basis
        assert row.source
    spellings = [(row.dimension, s) for row in factors() for s in (row.unit, *row.spellings)]
    assert len(set(spellings)) == len(spellings)
    assert all(units_of(dimension) for dimension in Dimension)


@given(st.sampled_from(ROWS), FINITE)
def test_a_value_in_a_unit_comes_back(row: tuple[Dimension, str], value: float) -> None:
    dimension, unit = row
    scale = abs(value) + 500  # an offset costs digits near its zero
    assert from_unit(to_unit(value, unit, dimension), unit, dimension) == pytest.approx(
        value, rel=1e-12, abs=1e-15 * scale
    )


@given(st.sampled_from(ROWS), FINITE)
def test_what_is_spelled_reads_back(row: tuple[Dimension, str], value: float) -> None:
    dimension, unit = row
    if unit in ("degC", "degF"):
        value = abs(value) + 1.0  # kelvin
    text = spell(value, unit, dimension)
    assert parse(text, dimension).value == pytest.approx(value, rel=1.01e-12)


@given(st.sampled_from(ROWS), st.integers(min_value=1, max_value=99_999), st.integers(min_value=-4, max_value=4))
def test_a_short_number_stays_short(row: tuple[Dimension, str], digits: int, power: int) -> None:
    dimension, unit = row
    number = float(f"{digits}e{power}")
    text = spell(from_unit(number, unit, dimension), unit, dimension)
    assert float(text.removesuffix(unit)) == number
    assert "e" not in text.removesuffix(unit)


@pytest.mark.parametrize(
    ("value", "unit", "dimension", "digits", "text"),
    [
        (12.4, "m", Dimension.LENGTH, None, "12.4 m"),
        (0.0, "m", Dimension.LENGTH, None, "0 m"),
        (0.15, "%", Dimension.FRACTION, None, "15 %"),
        (0.15, "", Dimension.FRACTION, None, "0.15"),
        (293.15, "°C", Dimension.TEMPERATURE, None, "20 degC"),
        (1e6, "Pa", Dimension.PRESSURE, None, "1000000 Pa"),
        (1.5e-7, "m", Dimension.LENGTH, None, "0.00000015 m"),
        (1.5e-10, "m", Dimension.LENGTH, None, "1.5e-10 m"),
        (12.3456, "m", Dimension.LENGTH, 3, "12.3 m"),
        (1.0, "ft", Dimension.LENGTH, 4, "3.281 ft"),
    ],
)
def test_how_a_value_is_spelled(value: float, unit: str, dimension: Dimension, digits: int | None, text: str) -> None:
    assert spell(value, unit, dimension, digits) == text


def test_a_value_that_is_not_finite_is_not_spelled() -> None:
    with pytest.raises(UnitError, match="not a finite number"):
        spell(math.nan, "m", Dimension.LENGTH)
