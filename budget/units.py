"""Text with a unit to SI and back, for a closed vocabulary of units.

A quantity is a number and a unit, with or without a space: ``12.4 m``, ``0.42 L/s``, ``15 %``. Every unit
belongs to one table per dimension; nothing is ever evaluated, so a text costs the same whatever stands in it.
A temperature and a temperature difference are two dimensions.
"""

import difflib
import math
import re
from collections.abc import Mapping
from dataclasses import dataclass
from enum import StrEnum
from fractions import Fraction
from typing import Literal, NamedTuple

LONGEST_TEXT = 64


class Dimension(StrEnum):
    """What a quantity measures; the value is the word used as a key in a description."""

    LENGTH = "length"
    FLOW = "flow"
    PRESSURE = "pressure"
    GRADIENT = "gradient"
    VELOCITY = "velocity"
    POWER = "power"
    TEMPERATURE = "temperature"
    DIFFERENCE = "difference"
    DENSITY = "density"
    VISCOSITY = "viscosity"
    SPECIFIC_HEAT = "specific_heat"
    ANGLE = "angle"
    FRACTION = "fraction"

    @property
    def noun(self) -> str:
        """The dimension with its article, as in "a pressure was due"."""
        if self is Dimension.DIFFERENCE:
            return "a temperature difference"
        article = "an" if self is Dimension.ANGLE else "a"
        return f"{article} {self.value.replace('_', ' ')}"


class Basis(StrEnum):
    """What the value of a quantity stands for where a dimension can be stated in two ways."""

    PLAIN = "plain"
    MASS = "mass"  # a flow in kg/s
    HEAD = "head"  # a pressure in metres of the fluid itself
    KINEMATIC = "kinematic"  # a viscosity in m2/s


@dataclass(frozen=True, slots=True)
class Quantity:
    """A value in SI: m, m3/s, Pa, Pa/m, m/s, W, K, kg/m3, Pa s, J/(kg K); an angle in deg, a fraction 0..1.

    A basis other than plain says that the value is in kg/s, in metres of the fluid, or in m2/s.
    """

    value: float
    dimension: Dimension
    basis: Basis = Basis.PLAIN


Fault = Literal["not-a-quantity", "decimal-comma", "not-finite", "unknown-unit", "wrong-dimension"]
"""In which way a text fails to be a quantity."""


class UnitError(ValueError):
    """A text that is no quantity of the dimension that was due: what is wrong, and what would be right."""

    def __init__(self, message: str, remedy: str, code: Fault = "not-a-quantity") -> None:
        """Keep both halves; the text of the error joins them."""
        super().__init__(f"{message}; {remedy}")
        self.message = message
        self.remedy = remedy
        self.code = code


class Factor(NamedTuple):
    """One line of the list of units: SI value = (number + offset) x factor."""

    dimension: Dimension
    unit: str
    spellings: tuple[str, ...]
    factor: float
    offset: float
    basis: Basis
    source: str


def parse(text: str, dimension: Dimension, *, default_unit: str | None = None) -> Quantity:
    """Read a quantity such as ``12.4 m`` and give it in SI.

    A bare number takes ``default_unit``. Raises UnitError where the text is no number and unit, is not finite
    or has a unit of another dimension.
    """
    if len(text) > LONGEST_TEXT:
        raise UnitError(
            f"{_quoted(text)} has {len(text)} characters, at most {LONGEST_TEXT} are read",
            "write a number and a unit",
        )
    found = _NUMBER.match(text)
    if found is None:
        raise _not_a_number(text, dimension)
    number, spelling = found.groups()
    unit = _SPELLINGS[dimension].get(spelling) or _SPELLINGS[dimension].get(_normal(spelling))
    if unit is None:
        if spelling and not _HEXADECIMAL.match(text):
            raise _wrong_unit(text, number, spelling, dimension)
        if spelling:
            raise _not_a_number(text, dimension)
        if default_unit is None:
            raise UnitError(f"{_quoted(text)} has no unit", f"write {_choice(dimension, number)}")
        unit = _unit(default_unit, dimension)
    value = float(number.replace("−", "-"))
    return Quantity(_finite(unit.to_si(value), text), dimension, unit.basis)


def bare(number: float, dimension: Dimension, unit: str) -> Quantity:
    """Give a plain number, taken in ``unit``, in SI. Raises UnitError for nan, inf and a truth value."""
    if isinstance(number, bool):
        raise UnitError(f"{str(number).lower()} is not a number", f"write {_choice(dimension, '1')}")
    known = _unit(unit, dimension)
    shown = str(number)
    try:
        return Quantity(_finite(known.to_si(float(number)), shown), dimension, known.basis)
    except OverflowError:
        raise UnitError("the number is too large", "write a number below 1e308", "not-finite") from None


def bare_unit(dimension: Dimension, system: Literal["SI", "IP"], *, gas: bool, small: bool = False) -> str:
    """Give the unit that a bare number takes; ``small`` for a bore, a size or a roughness.

    A fraction has the empty unit: 0.15 is 15 %.
    """
    if small and dimension is Dimension.LENGTH:
        return "mm" if system == "SI" else "in"
    return _BARE[dimension][(0 if system == "SI" else 2) + gas]


def basis_of(unit: str, dimension: Dimension) -> Basis:
    """Tell whether a unit states a mass flow, a head or a kinematic viscosity."""
    return _unit(unit, dimension).basis


def to_unit(value_si: float, unit: str, dimension: Dimension) -> float:
    """Give an SI value in ``unit``, for display. Raises UnitError if the unit is unknown."""
    return _unit(unit, dimension).from_si(value_si)


def from_unit(value: float, unit: str, dimension: Dimension) -> float:
    """Give a value in ``unit`` in SI: the inverse of `to_unit`. Raises UnitError if the unit is unknown."""
    return _unit(unit, dimension).to_si(value)


def spell(value_si: float, unit: str, dimension: Dimension, digits: int | None = None) -> str:
    """Write an SI value as text, ``12.4 m``: the shortest that reads back to the same value within 1e-12.

    With ``digits`` at most so many significant ones are kept. Raises UnitError if the value is not finite.
    """
    known = _unit(unit, dimension)
    number = _finite(known.from_si(_finite(value_si, str(value_si))), str(value_si))
    for precision in range(1, digits or 17):
        text = f"{number:.{precision}g}"
        if math.isclose(known.to_si(float(text)), value_si, rel_tol=1e-12, abs_tol=0.0):
            break
    else:
        text = f"{number:.{digits or 17}g}"
    return f"{_plain(text)} {known.name}".rstrip()


def units_of(dimension: Dimension) -> tuple[str, ...]:
    """Name the units of a dimension in their usual order."""
    return tuple(unit.name for unit in _UNITS[dimension] if unit.name)


def factors() -> tuple[Factor, ...]:
    """List every unit with its other spellings, factor, offset and where the factor comes from."""
    return tuple(
        Factor(dimension, u.name, u.others, u.numerator / u.denominator, u.offset, u.basis, u.source)
        for dimension, units in _UNITS.items()
        for u in units
        if u.name
    )


# What follows is the machinery: the table first.


@dataclass(frozen=True, slots=True)
class _Unit:
    """A unit: SI value = (number + offset) x numerator / denominator, so that decimal factors round once."""

    name: str
    numerator: float
    denominator: float
    source: str
    others: tuple[str, ...] = ()
    basis: Basis = Basis.PLAIN
    offset: float = 0.0

    def to_si(self, number: float) -> float:
        return (number + self.offset) * self.numerator / self.denominator

    def from_si(self, value: float) -> float:
        return value * self.denominator / self.numerator - self.offset


_EXACT_INTEGER = 2**53


def _define(
    name: str,
    factor: int | str | Fraction,
    source: str = "SI",
    *others: str,
    basis: Basis = Basis.PLAIN,
    offset: float = 0.0,
) -> _Unit:
    exact = Fraction(factor)
    if max(exact.numerator, exact.denominator) <= _EXACT_INTEGER:
        return _Unit(name, float(exact.numerator), float(exact.denominator), source, others, basis, offset)
    return _Unit(name, float(exact), 1.0, source, others, basis, offset)


_FOOT, _INCH, _POUND = Fraction("0.3048"), Fraction("0.0254"), Fraction("0.45359237")
_GALLON = 231 * _INCH**3
_GRAVITY = Fraction("9.80665")
_BTU = Fraction("1055.05585262")
_WATER = 1000 * _GRAVITY  # Pa per metre of the conventional water column
_HOUR, _MINUTE = 3600, 60

_YARD = "international yard and pound, exact"
_US_GALLON = "US gallon of 231 cubic inches, exact"
_COLUMN = "conventional: water of 1000 kg/m3 under 9.80665 m/s2"
_IT = "International Table Btu of 1055.05585262 J"
_HEAD = "head of the fluid itself"
_DECIMAL = "by definition"

_UNITS: Mapping[Dimension, tuple[_Unit, ...]] = {
    Dimension.LENGTH: (
        _define("m", 1),
        _define("mm", "1e-3"),
        _define("cm", "1e-2"),
        _define("um", "1e-6", "SI", "µm"),
        _define("ft", _FOOT, _YARD),
        _define("in", _INCH, _YARD),
    ),
    Dimension.FLOW: (
        _define("m3/s", 1),
        _define("m3/h", Fraction(1, _HOUR), _DECIMAL, "m3/hr", "cmh", "CMH"),
        _define("L/s", "1e-3", _DECIMAL, "l/s"),
        _define("L/min", Fraction(1, 1000 * _MINUTE), _DECIMAL, "l/min"),
        _define("L/h", Fraction(1, 1000 * _HOUR), _DECIMAL, "l/h", "L/hr", "l/hr"),
        _define("gpm", _GALLON / _MINUTE, _US_GALLON, "GPM", "gal/min"),
        _define("cfm", _FOOT**3 / _MINUTE, _YARD, "CFM", "ft3/min"),
        _define("kg/s", 1, basis=Basis.MASS),
        _define("kg/h", Fraction(1, _HOUR), _DECIMAL, "kg/hr", basis=Basis.MASS),
        _define("lb/h", _POUND / _HOUR, _YARD, "lb/hr", basis=Basis.MASS),
    ),
    Dimension.PRESSURE: (
        _define("Pa", 1),
        _define("kPa", 1000),
        _define("mbar", 100, _DECIMAL, "hPa"),
        _define("bar", 100_000, _DECIMAL),
        _define("psi", _POUND * _GRAVITY / _INCH**2, _YARD + ", 9.80665 m/s2"),
        _define("inH2O", _WATER * _INCH, _COLUMN, "in H2O", "in wg", "inwg", "in w g", "in wc", "inwc"),
        _define("ftH2O", _WATER * _FOOT, _COLUMN, "ft H2O", "ft wg", "ftwg", "ft w g", "ft wc", "ftwc"),
        _define("mmH2O", _WATER / 1000, _COLUMN, "mm H2O", "mm wg", "mmwg", "mm w g", "mm wc", "mmwc"),
        _define("mH2O", _WATER, _COLUMN, "m H2O", "m wg", "mwg", "m w g", "m wc", "mwc"),
        _define("m", 1, _HEAD, basis=Basis.HEAD),
        _define("ft", _FOOT, _HEAD + ", " + _YARD, basis=Basis.HEAD),
    ),
    Dimension.GRADIENT: (
        _define("Pa/m", 1),
        _define("kPa/m", 1000),
        _define("mbar/m", 100, _DECIMAL),
        _define("mmH2O/m", _WATER / 1000, _COLUMN, "mm H2O/m", "mm wg/m", "mm wc/m"),
        _define(
            "inH2O/100ft", _WATER * _INCH / (100 * _FOOT), _COLUMN,
            "inH2O/100 ft", "in H2O/100 ft", "in wg/100ft", "in wg/100 ft", "in wc/100ft", "in wc/100 ft",
        ),
        _define(
            "ftH2O/100ft", _WATER / 100, _COLUMN,
            "ftH2O/100 ft", "ft H2O/100 ft", "ft wg/100ft", "ft wg/100 ft", "ft wc/100ft", "ft wc/100 ft",
        ),
    ),
    Dimension.VELOCITY: (
        _define("m/s", 1),
        _define("ft/s", _FOOT, _YARD, "fps"),
        _define("fpm", _FOOT / _MINUTE, _YARD, "FPM", "ft/min"),
    ),
    Dimension.POWER: (
        _define("W", 1),
        _define("kW", 1000),
        _define("MW", 1_000_000),
        _define("hp", 550 * _FOOT * _POUND * _GRAVITY, "mechanical horsepower of 550 ft lbf/s", "HP"),
        _define("Btu/h", _BTU / _HOUR, _IT, "Btu/hr", "BTU/h", "BTU/hr"),
        _define("MBH", 1000 * _BTU / _HOUR, "1000 Btu/h, " + _IT, "kBtu/h", "kBtu/hr"),
        _define("TR", 12_000 * _BTU / _HOUR, "ton of refrigeration of 12,000 Btu/h, " + _IT),
    ),
    Dimension.TEMPERATURE: (
        _define("degC", 1, "0 degC is 273.15 K", "deg C", "°C", offset=273.15),
        _define("degF", Fraction(5, 9), "0 degF is 459.67 R", "deg F", "°F", offset=459.67),
        _define("K", 1),
    ),
    Dimension.DIFFERENCE: (
        _define("K", 1),
        _define("delta_degC", 1, _DECIMAL, "Δ°C"),
        _define("delta_degF", Fraction(5, 9), _DECIMAL, "Δ°F"),
    ),
    Dimension.DENSITY: (
        _define("kg/m3", 1),
        _define("lb/ft3", _POUND / _FOOT**3, _YARD),
    ),
    Dimension.VISCOSITY: (
        _define("Pa s", 1, "SI", "Pas", "N s/m2"),
        _define("mPa s", "1e-3", "SI", "mPas"),
        _define("uPa s", "1e-6", "SI", "uPas", "µPa s"),
        _define("cP", "1e-3", _DECIMAL),
        _define("m2/s", 1, basis=Basis.KINEMATIC),
        _define("mm2/s", "1e-6", basis=Basis.KINEMATIC),
        _define("cSt", "1e-6", _DECIMAL, basis=Basis.KINEMATIC),
    ),
    Dimension.SPECIFIC_HEAT: (
        _define("J/(kg K)", 1, "SI", "J/(kgK)", "J/kg K", "J/kgK", "J/kg/K"),
        _define("kJ/(kg K)", 1000, "SI", "kJ/(kgK)", "kJ/kg K", "kJ/kgK", "kJ/kg/K"),
        _define(
            "Btu/(lb degF)", _BTU / _POUND * Fraction(9, 5), _IT,
            "Btu/(lbdegF)", "Btu/lb degF", "Btu/lbdegF", "Btu/lb/degF",
        ),
    ),
    Dimension.ANGLE: (_define("deg", 1, "degrees of arc", "°"),),
    Dimension.FRACTION: (_define("%", "1e-2", _DECIMAL), _define("", 1, _DECIMAL)),
}  # fmt: skip

_SPELLINGS: Mapping[Dimension, Mapping[str, _Unit]] = {
    dimension: {spelling: unit for unit in units for spelling in (unit.name, *unit.others) if spelling}
    for dimension, units in _UNITS.items()
}

_BARE: Mapping[Dimension, tuple[str, str, str, str]] = {  # SI for a liquid and a gas, IP for a liquid and a gas
    Dimension.LENGTH: ("m", "m", "ft", "ft"),
    Dimension.FLOW: ("L/s", "L/s", "gpm", "cfm"),
    Dimension.PRESSURE: ("kPa", "Pa", "ftH2O", "inH2O"),
    Dimension.GRADIENT: ("Pa/m", "Pa/m", "ftH2O/100ft", "inH2O/100ft"),
    Dimension.VELOCITY: ("m/s", "m/s", "ft/s", "fpm"),
    Dimension.POWER: ("kW", "kW", "MBH", "MBH"),
    Dimension.TEMPERATURE: ("degC", "degC", "degF", "degF"),
    Dimension.DIFFERENCE: ("K", "K", "delta_degF", "delta_degF"),
    Dimension.DENSITY: ("kg/m3", "kg/m3", "lb/ft3", "lb/ft3"),
    Dimension.VISCOSITY: ("mPa s", "mPa s", "cP", "cP"),
    Dimension.SPECIFIC_HEAT: ("kJ/(kg K)", "kJ/(kg K)", "Btu/(lb degF)", "Btu/(lb degF)"),
    Dimension.ANGLE: ("deg", "deg", "deg", "deg"),
    Dimension.FRACTION: ("", "", "", ""),
}

# A number, then nothing or what starts as a unit does; anything else after a number is refused by name.
_NUMBER = re.compile(
    r"\s*([+\-−]?(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)(?:[eE][+\-]?[0-9]+)?)\s*"
    r"(|[^\W\d_].*?|[%°º℃℉].*?)\s*\Z"
)
_SAME = str.maketrans(
    {"²": "2", "³": "3", "₂": "2", "^": "", "·": " ", "⋅": " ", "*": " ", ".": " ", "°": "deg", "º": "deg"}
    | {"℃": "degC", "℉": "degF", "µ": "u", "μ": "u", "Δ": "delta_", "∆": "delta_"}
)
_AROUND_SIGNS = re.compile(r"\s*([/()])\s*")


def _normal(spelling: str) -> str:
    """Bring superscripts, degree signs, dots and spaces of a unit into the form that the table has."""
    return _AROUND_SIGNS.sub(r"\1", " ".join(spelling.translate(_SAME).split()))


def _unit(spelling: str, dimension: Dimension) -> _Unit:
    if not spelling and dimension is Dimension.FRACTION:
        return _UNITS[dimension][-1]
    known = _SPELLINGS[dimension]
    unit = known.get(spelling) or known.get(_normal(spelling))
    if unit is None:
        raise _wrong_unit(spelling, "", spelling, dimension)
    return unit


def _finite(value: float, text: str) -> float:
    if not math.isfinite(value):
        raise UnitError(f"{_quoted(text)} is not a finite number", "write a finite number", "not-finite")
    return value


def _plain(number: str) -> str:
    """Write a number of the ``g`` format without an exponent where that stays readable."""
    mantissa, _, exponent = number.partition("e")
    if not exponent:
        return number
    power = int(exponent)
    decimals = len(mantissa.partition(".")[2])
    if -8 <= power < 16:
        return f"{float(number):.{max(0, decimals - power)}f}"
    return f"{mantissa}e{power}"


def _quoted(text: str) -> str:
    """Show a text inside a message: shortened, without control characters."""
    shown = text if len(text) <= LONGEST_TEXT else text[: LONGEST_TEXT - 3] + "..."
    return f'"{_printable(shown)}"'


def _printable(text: str) -> str:
    return "".join(c if c.isprintable() else "\N{REPLACEMENT CHARACTER}" for c in text)


def _choice(dimension: Dimension, number: str = "") -> str:
    """List what may be written: ``12.4 m, mm, cm, ft or in``."""
    *others, last = units_of(dimension)
    units = f"{', '.join(others)} or {last}" if others else last
    return f"{number} {units}".strip()


def _wrong_unit(text: str, number: str, spelling: str, dimension: Dimension) -> UnitError:
    """Say of what dimension a unit is, or which known unit is the nearest."""
    normal = _normal(spelling)
    for other, known in _SPELLINGS.items():
        unit = known.get(spelling) or known.get(normal)
        if unit is not None:
            return UnitError(
                f"{_quoted(text)} is {other.noun}, and {dimension.noun} was due",
                f"write {_choice(dimension, number)}",
                "wrong-dimension",
            )
    message = f"the unit {_quoted(spelling)} is not known"
    folded = {known.lower(): unit.name for known, unit in _SPELLINGS[dimension].items()}
    nearest = difflib.get_close_matches(normal.lower(), folded, n=1, cutoff=0.5)
    if nearest:
        hint = f"did you mean {folded[nearest[0]]}? It may be {_choice(dimension)}"
        return UnitError(message, hint, "unknown-unit")
    return UnitError(message, f"write {_choice(dimension, number)}", "unknown-unit")


_COMMA = re.compile(r"\s*([+-]?[0-9]+),([0-9]+)(?![0-9,.])(.*)", re.DOTALL)
_THOUSANDS = re.compile(r"\s*([+-]?[0-9]{1,3}(?:,[0-9]{3})+(?:\.[0-9]+)?)(?![0-9,])(.*)", re.DOTALL)
_FRACTION = re.compile(r"\s*([+-]?)(?:([0-9]{1,9})(?:-|\s+))?([0-9]{1,9})/([0-9]{1,9})(?![0-9/])(.*)", re.DOTALL)
_NAMED = re.compile(r"\s*[+-]?(nan|inf(?:inity)?)(?![a-z])", re.IGNORECASE)
_HEXADECIMAL = re.compile(r"\s*[+-]?0(?:x[0-9a-f]|o[0-7]|b[01])", re.IGNORECASE)
_UNDERSCORE = re.compile(r"\s*([+-]?[0-9]+(?:_[0-9]+)+(?:\.[0-9]+)?)(?![0-9_])(.*)", re.DOTALL)


def _not_a_number(text: str, dimension: Dimension) -> UnitError:
    """Name the way in which a text fails to be a number and a unit, with what should stand there."""
    text = _printable(text)
    shown = _quoted(text)
    if not text.strip():
        return UnitError("nothing was written", f"write a number and {_choice(dimension)}")
    if found := _THOUSANDS.fullmatch(text):
        number, rest = found.groups()
        plain = number.replace(",", "")
        if number.count(",") == 1 and "." not in number:
            decimal = number.replace(",", ".")
            remedy = f'write "{decimal}{rest}" or "{plain}{rest}"'
            return UnitError(f"{shown} has a comma", remedy, "decimal-comma")
        return UnitError(f"{shown} has commas between thousands", f'write "{plain}{rest}"')
    if found := _COMMA.fullmatch(text):
        whole, decimals, rest = found.groups()
        remedy = f'write "{whole}.{decimals}{rest}": a decimal point'
        return UnitError(f"{shown} has a decimal comma", remedy, "decimal-comma")
    if found := _UNDERSCORE.fullmatch(text):
        number, rest = found.groups()
        return UnitError(f"{shown} has an underscore", f'write "{number.replace("_", "")}{rest}"')
    if _HEXADECIMAL.match(text):
        return UnitError(f"{shown} is not a decimal number", f"write digits and {_choice(dimension)}")
    if _NAMED.match(text):
        remedy = f"write a finite number and {_choice(dimension)}"
        return UnitError(f"{shown} is not a finite number", remedy, "not-finite")
    if found := _FRACTION.fullmatch(text):
        sign, whole, top, bottom, rest = found.groups()
        if int(bottom):
            value = int(whole or 0) + int(top) / int(bottom)
            return UnitError(f"{shown} is written as a fraction", f'write "{sign}{value:.10g}{rest}"')
    return UnitError(f"{shown} is not a number and a unit", f"write a number and {_choice(dimension)}")
