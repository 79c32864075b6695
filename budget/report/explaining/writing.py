"""One calculation as text: a formula, its numbers with their units, the result, and where it comes from.

The numbers are written so that they can be worked out again as they stand: each with its unit, +, -, x, /, ^,
parentheses, pi, sqrt, log10, exp, max and |...|. Worked out in SI, they give the result to the digits shown.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import Final

from budget.description import Description
from budget.report.figures import GRAVITY, NONE, Figures
from budget.report.plain import plain
from budget.units import Basis, Dimension, bare_unit, basis_of, to_unit

DIGITS: Final = 5
"""Significant digits of a figure; what is exact with fewer is written with fewer."""

UNKNOWN: Final = "?"
"""Stands within the numbers for one that can't be computed: such numbers are not shown."""

_NOTHING: Final = 1e-12
"""What is left of sums that come to nothing is below this."""

AREAS: Final = {"m2": 1.0, "ft2": 0.3048**2}
ACCELERATIONS: Final = {"m/s2": 1.0, "ft/s2": 0.3048}
SPECIFIC_POWER: Final = "W/(m3/s)"

_APART: Final = str.maketrans("()|", "   ")
_LOST: Final = "can't be computed: a finding says why"


@dataclass(frozen=True, slots=True)
class Step:
    """One figure: what it is, its formula, the numbers in it, the result, and its source.

    Numbers are empty for a figure that is stated or read off a table. A step with nothing but a title is a heading.
    """

    title: str
    formula: str = ""
    numbers: str = ""
    result: str = ""
    source: str = ""


class Writer:
    """Spells numbers in the units of a design."""

    def __init__(self, description: Description) -> None:
        """Take the units of a description."""
        self._figures = Figures(description)
        self._system = description.design.units
        self._gas = description.fluid.gas

    def unit(self, dimension: Dimension, *, small: bool = False) -> str:
        """Name the unit of a quantity; a head, a mass or a kinematic viscosity gives way to the plain one."""
        name = self._figures.unit(dimension, small=small)
        if basis_of(name, dimension) is Basis.PLAIN:
            return name
        return bare_unit(dimension, self._system, gas=self._gas, small=small)

    def of(self, value: float | None, dimension: Dimension, *, small: bool = False) -> str:
        """Spell an SI value with its unit, `12.346 kPa`; `small` for a bore or a roughness."""
        if value is None or not math.isfinite(value):
            return UNKNOWN
        name = self.unit(dimension, small=small)
        return _in(number(to_unit(value, name, dimension)), name)

    def pressure(self, value: float | None) -> str:
        """Spell a pressure in Pa."""
        return self.of(value, Dimension.PRESSURE)

    def mass(self, value: float | None) -> str:
        """Spell a mass flow in kg/s."""
        if value is None or not math.isfinite(value):
            return UNKNOWN
        name = self._mass_unit
        return _in(number(to_unit(value, name, Dimension.FLOW)), name)

    @property
    def _mass_unit(self) -> str:
        shown = self._figures.unit(Dimension.FLOW)
        if basis_of(shown, Dimension.FLOW) is Basis.MASS:
            return shown
        return "kg/s" if self._system == "SI" else "lb/h"

    def area(self, value: float) -> str:
        """Spell an area in m2."""
        name = "m2" if self._system == "SI" else "ft2"
        return _in(number(value / AREAS[name]), name)

    def gravity(self) -> str:
        """Spell the standard acceleration of gravity."""
        name = "m/s2" if self._system == "SI" else "ft/s2"
        return _in(number(GRAVITY / ACCELERATIONS[name], 6), name)

    def power(self, value: float | None) -> str:
        """Spell the power of a pump or fan in W."""
        if value is None or not math.isfinite(value):
            return UNKNOWN
        stated = self._figures.unit(Dimension.POWER)
        usual = {"kW": "W", "MBH": "hp"}.get(stated, stated)
        return _in(number(to_unit(value, usual, Dimension.POWER)), usual)

    def head(self, value: float | None, density: float) -> str:
        """Spell a pressure as a head of the fluid in parentheses, where the design shows pressures so; else ""."""
        name = self._figures.unit(Dimension.PRESSURE)
        if value is None or not math.isfinite(value) or basis_of(name, Dimension.PRESSURE) is Basis.PLAIN:
            return ""
        return f" ({_in(number(to_unit(value / (density * GRAVITY), name, Dimension.PRESSURE)), name)} of the fluid)"

    def total(
        self,
        title: str,
        formula: str,
        terms: Sequence[float],
        result: float | None,
        *,
        mass: bool = False,
        source: str = "",
        density: float | None = None,
    ) -> Step:
        """Return a sum of pressures (or mass flows), all with the decimals of the largest; a negative term is a minus.

        Where `density` is given, the result is written as a head too if the design shows heads.
        """
        dimension = Dimension.FLOW if mass else Dimension.PRESSURE
        name = self._mass_unit if mass else self.unit(dimension)
        values = [*terms, math.nan if result is None else result]
        if not all(map(math.isfinite, values)):
            return calculation(title, formula, "", UNKNOWN, source)
        shown = [to_unit(value, name, dimension) for value in values]
        decimals = _decimals(max(map(abs, shown)))
        written = [f"{abs(value):.{decimals}f} {name}" for value in shown]
        signs = ["-" if value < 0.0 and text.strip("0. ") else "" for value, text in zip(shown, written, strict=True)]
        numbers = signs[0] + written[0] if len(terms) > 1 or terms[:1] != [result] else ""
        for sign, text in zip(signs[1:-1], written[1:-1], strict=True):
            numbers += f" {sign or '+'} {text}"
        head = "" if density is None or result is None else self.head(result, density)
        return calculation(title, formula, numbers, signs[-1] + written[-1] + head, source)


def calculation(title: str, formula: str, numbers: str, result: str, source: str = "") -> Step:
    """Return a step; where a number in it is unknown, so is the result."""
    if UNKNOWN in (result, *numbers.translate(_APART).split()):
        return Step(title, formula, "", NONE, _LOST)
    return Step(title, formula, numbers, result, source)


def number(value: float | None, digits: int = DIGITS) -> str:
    """Spell a number with its significant digits: `0.023100`; exact ones without trailing zeros: `14.5`."""
    if value is None or not math.isfinite(value):
        return UNKNOWN
    if abs(value) < _NOTHING:
        return "0"
    short = f"{value:.{digits}g}"
    text = f"{value:.{_decimals(abs(value), digits)}f}"
    if "." in text and math.isclose(float(short), value, rel_tol=1e-12):
        text = text.rstrip("0").rstrip(".")
    return text


def factor(text: str) -> str:
    """Put a number that has a sign into parentheses, so that it can stand after an operator."""
    return f"({text})" if text.startswith("-") else text


def product(*factors: str) -> str:
    """Join factors; one that is 1 is left out where others stand."""
    kept = [factor(one) for one in factors if one != "1"]
    return " x ".join(kept or ["1"])


def names(ids: Iterable[str], what: str = "{}") -> str:
    """Join IDs for a formula: `m(M1) + m(M2)` for `m({})`."""
    return " + ".join(what.format(plain(id_)) for id_ in ids)


def said(*parts: str) -> str:
    """Join what is known of the origin of a figure."""
    return "; ".join(plain(part) for part in parts if part)


def _decimals(size: float, digits: int = DIGITS) -> int:
    if size == 0.0:
        return 0
    return min(max(digits - 1 - math.floor(math.log10(size)), 0), 15)


def _in(text: str, unit: str) -> str:
    return f"{text} {unit}".rstrip()
