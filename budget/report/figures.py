"""Figures as text, in the units that the design shows.

A figure is rounded to a fixed number of decimals for its unit, so that a column of them lines up and a figure that
did not change is spelled the same. What can't be computed is a dash.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Literal

from budget.description.model import Description
from budget.units import Basis, Dimension, bare_unit, basis_of, to_unit

NONE = "-"
"""Stands for a figure that can't be computed, or that does not exist here."""

GRAVITY = 9.80665
"""m/s2, standard; turns a pressure into a head of the fluid itself."""

_DECIMALS: Mapping[str, int] = {
    "m": 1,
    "mm": 1,
    "cm": 1,
    "um": 0,
    "ft": 1,
    "in": 2,
    "m3/s": 4,
    "m3/h": 2,
    "L/s": 3,
    "L/min": 1,
    "L/h": 0,
    "gpm": 2,
    "cfm": 0,
    "kg/s": 3,
    "kg/h": 0,
    "lb/h": 0,
    "Pa": 0,
    "kPa": 2,
    "mbar": 1,
    "bar": 4,
    "psi": 2,
    "inH2O": 3,
    "ftH2O": 2,
    "mmH2O": 0,
    "mH2O": 3,
    "Pa/m": 0,
    "kPa/m": 3,
    "mbar/m": 2,
    "mmH2O/m": 1,
    "inH2O/100ft": 3,
    "ftH2O/100ft": 2,
    "m/s": 2,
    "ft/s": 2,
    "fpm": 0,
    "W": 0,
    "kW": 2,
    "MW": 4,
    "hp": 2,
    "Btu/h": 0,
    "MBH": 1,
    "TR": 2,
    "degC": 1,
    "degF": 1,
    "K": 1,
    "delta_degC": 1,
    "delta_degF": 1,
    "%": 1,
    "deg": 0,
    "kg/m3": 2,
    "lb/ft3": 3,
    "": 3,
}
_DECIMALS_OF_A_GAS: Mapping[str, int] = {
    "L/s": 1,
    "m3/h": 0,
    "m3/s": 3,
    "L/min": 0,
    "kg/s": 4,
    "kg/h": 1,
    "Pa": 1,
    "kPa": 4,
    "mmH2O": 2,
    "Pa/m": 2,
    "mmH2O/m": 3,
    "inH2O/100ft": 3,
}


class Figures:
    """How the figures of one design are spelled: its system of units, and what its `[display]` overrides."""

    __slots__ = ("_gas", "_shown", "_system")

    def __init__(self, description: Description) -> None:
        """Take the units of a description."""
        self._system: Literal["SI", "IP"] = description.design.units
        self._gas = description.fluid.gas
        # A unit may be written with any blanks around and within it, such as a line break.
        self._shown = {name: " ".join(unit.split()) for name, unit in description.display.items()}

    def unit(self, dimension: Dimension, *, small: bool = False) -> str:
        """Name the unit in which a quantity is shown; `small` for a bore, a size or a roughness."""
        bare = bare_unit(dimension, self._system, gas=self._gas, small=small)
        return bare if small else self._shown.get(dimension.value, bare)

    def text(self, value: float | None, dimension: Dimension, *, small: bool = False, unit: bool = False) -> str:
        """Spell an SI value, `12.40`, with `unit` `12.40 kPa`; a dash where there is none.

        A pressure that is shown as a head, or a flow that is shown by mass, needs `head` or `flow`.
        """
        name = self.unit(dimension, small=small)
        if value is None or not math.isfinite(value):
            return NONE
        if basis_of(name, dimension) is not Basis.PLAIN:
            name = bare_unit(dimension, self._system, gas=self._gas)
        return self._spell(to_unit(value, name, dimension), name, with_unit=unit)

    def pressure(self, value: float | None, density: float | None = None, *, unit: bool = False) -> str:
        """Spell a pressure in Pa; where the design shows heads, as that of a fluid of `density` in kg/m3."""
        name = self.unit(Dimension.PRESSURE)
        if value is None or density is None or basis_of(name, Dimension.PRESSURE) is not Basis.HEAD:
            return self.text(value, Dimension.PRESSURE, unit=unit)
        head = to_unit(value / (density * GRAVITY), name, Dimension.PRESSURE)
        return self._spell(head, name, with_unit=unit)

    def flow(self, volume: float | None, mass: float | None, *, unit: bool = False) -> str:
        """Spell a flow, in m3/s and in kg/s, whichever of them the design shows."""
        name = self.unit(Dimension.FLOW)
        shown = mass if basis_of(name, Dimension.FLOW) is Basis.MASS else volume
        if shown is None:
            return NONE
        return self._spell(to_unit(shown, name, Dimension.FLOW), name, with_unit=unit)

    def change(self, before: float | None, after: float | None) -> str:
        """Spell by how much a pressure changed, with its sign and unit: `+1.80 kPa`; "" where it did not."""
        if before is None or after is None or not (math.isfinite(before) and math.isfinite(after)):
            return ""
        text = self.text(after - before, Dimension.PRESSURE)
        if not text.strip("-0."):
            return ""
        sign = "" if text.startswith("-") else "+"
        return f"{sign}{text} {self.unit(Dimension.PRESSURE)}"

    def _spell(self, number: float, unit: str, *, with_unit: bool) -> str:
        if not math.isfinite(number):
            return NONE
        decimals = _DECIMALS.get(unit, 3)
        if self._gas:
            decimals = _DECIMALS_OF_A_GAS.get(unit, decimals)
        text = f"{number:.{decimals}f}"
        if text.startswith("-") and not text.strip("-0."):
            text = text[1:]
        return f"{text} {unit}".rstrip() if with_unit else text


def share(part: float, whole: float) -> float:
    """Return what part of a budget is spent, 0 to 1 and beyond; 0 where there is no budget."""
    return part / whole if whole > 0.0 and math.isfinite(part) else 0.0


def plain_number(value: float | None, digits: int = 3) -> str:
    """Spell a coefficient, a setting or a count with so many significant digits, a dash where there is none."""
    if value is None or not math.isfinite(value):
        return NONE
    text = f"{value:.{digits}g}"
    return f"{value:.0f}" if "e+" in text and abs(value) < 1e15 else text
