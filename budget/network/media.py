"""The fluid on each leg of each source: properties at its temperature, and findings where they don't hold."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from budget.description import Basis, Description, Finding, Fluid, Path, Quantity, Source, error, warning
from budget.physics import fluids
from budget.physics.glycols import Basis as GlycolBasis
from budget.physics.glycols import Kind

FREEZING_MARGIN = 3.0
"""K above the freezing point within which a warning is given (design margin; common practice)."""

GRAVITY = 9.80665
"""Standard acceleration of gravity, m/s2."""

_GLYCOLS = {"propylene glycol": "propylene", "ethylene glycol": "ethylene"}


@dataclass(frozen=True, slots=True)
class Medium:
    """A fluid on one leg: kg/m3, Pa s, J/(kg K), K. NaN where it can't be computed."""

    temperature: float
    density: float
    viscosity: float
    specific_heat: float


@dataclass(frozen=True, slots=True)
class Media:
    """The fluid of one source on its supply and return leg (of a gas: discharge and suction side)."""

    name: str
    supply: Medium
    back: Medium


def media_of(description: Description) -> tuple[list[Media], list[Finding]]:
    """Return the fluid of every source on both legs, in file order, and what is doubtful about it."""
    findings: list[Finding] = []
    media = []
    for source in description.sources.values():
        fluid = description.fluid
        supply, back = leg_temperatures(fluid, source)
        media.append(Media(fluid.name or "", medium_at(fluid, supply), medium_at(fluid, back)))
        findings += _doubts(fluid, source, supply, back)
    return media, list(dict.fromkeys(findings))


def design_media(fluid: Fluid) -> Media:
    """Return the fluid on both legs at the design's own temperatures, which a source may override."""
    supply, back = leg_temperatures(fluid)
    return Media(fluid.name or "", medium_at(fluid, supply), medium_at(fluid, back))


def leg_temperatures(fluid: Fluid, source: Source | None = None) -> tuple[float, float]:
    """Return supply and return temperature, of a source where one is given, K; NaN where none is stated."""
    supply, back = fluid.temperature, fluid.return_temperature
    if source is not None:
        supply = source.temperature if source.temperature is not None else supply
        back = source.return_temperature if source.return_temperature is not None else back
    if supply is None:
        supply = back if back is not None else math.nan
    return supply, supply if back is None else back


def medium_at(fluid: Fluid, temperature: float) -> Medium:
    """Return the properties of the design's fluid at a temperature in K; NaN where they can't be computed."""
    nowhere = Medium(temperature, math.nan, math.nan, math.nan)
    if fluid.name is None or (math.isnan(temperature) and fluid.name != "custom"):
        return nowhere
    if fluid.name == "custom":
        return _custom(fluid, temperature)
    with np.errstate(all="ignore"):
        if fluid.name == "water":
            state = fluids.water(temperature)
        elif fluid.name == "air":
            state = fluids.humid_air(temperature, fluids.standard_pressure(fluid.altitude), fluid.humidity)
        elif fluid.concentration is None or fluid.concentration_by is None:
            return nowhere
        else:
            state = fluids.glycol(*_glycol(fluid), temperature)
    figures = [float(state.density), float(state.viscosity), float(state.specific_heat)]
    if not all(math.isfinite(figure) and figure > 0 for figure in figures):
        return nowhere
    return Medium(temperature, *figures)


def pascals(quantity: Quantity, density: float) -> float:
    """Return a pressure in Pa; head of the fluid itself by its density in kg/m3."""
    return quantity.value * density * GRAVITY if quantity.basis is Basis.HEAD else quantity.value


def volume(quantity: Quantity, density: float) -> float:
    """Return a flow in m3/s at a density in kg/m3."""
    return quantity.value / density if quantity.basis is Basis.MASS else quantity.value


def _glycol(fluid: Fluid) -> tuple[Kind, GlycolBasis, float]:
    kind: Kind = "propylene" if fluid.name == "propylene glycol" else "ethylene"
    basis: GlycolBasis = "volume" if fluid.concentration_by == "volume" else "mass"
    return kind, basis, fluid.concentration or 0.0


def _custom(fluid: Fluid, temperature: float) -> Medium:
    density = fluid.density if fluid.density is not None else math.nan
    viscosity = math.nan
    if fluid.viscosity is not None:
        kinematic = fluid.viscosity.basis is Basis.KINEMATIC
        viscosity = fluid.viscosity.value * (density if kinematic else 1.0)
    heat = fluid.specific_heat if fluid.specific_heat is not None else math.nan
    return Medium(temperature, density, viscosity, heat)


def _doubts(fluid: Fluid, source: Source, supply: float, back: float) -> Iterator[Finding]:
    for key, stated, temperature in (
        ("temperature", source.temperature, supply),
        ("return_temperature", source.return_temperature, back),
    ):
        if math.isnan(temperature) or fluid.name in (None, "custom"):
            continue
        if key == "return_temperature" and back == supply:
            continue
        path: Path = (*source.path, key) if stated is not None else ("fluid", key)
        yield from _doubts_at(fluid, temperature, path)


def _doubts_at(fluid: Fluid, temperature: float, path: Path) -> Iterator[Finding]:
    temperature = round(temperature, 6)  # -20 degC in kelvin comes out a rounding below 253.15
    celsius = temperature - fluids.ZERO_CELSIUS
    fraction = 0.0
    if fluid.name == "water":
        validity, freezing = fluids.WATER_RANGE, fluids.ZERO_CELSIUS
    elif fluid.name == "air":
        validity, freezing, fraction = fluids.AIR_RANGE, -math.inf, fluid.humidity
    elif fluid.concentration is None or fluid.concentration_by is None:
        return
    else:
        kind, basis, fraction = _glycol(fluid)
        validity = fluids.GLYCOL_RANGES[kind, basis]
        freezing = float(fluids.freezing_point(kind, basis, fraction))
    if not bool(validity.covers(temperature, fraction)):
        low, high = (bound - fluids.ZERO_CELSIUS for bound in validity.temperature)
        span = f"{low:g} to {high:g} degC"
        if fluid.name in _GLYCOLS:
            span += f" and {validity.fraction[0]:.0%} to {validity.fraction[1]:.0%}"
        yield warning("fluid-range", f"{celsius:.4g} degC is outside the range of its properties, {span}", path)
    point = freezing - fluids.ZERO_CELSIUS
    # Water may be stated at 0 degC exactly; what freezes is below its point.
    if temperature < freezing:
        yield error("frozen", f"{celsius:.4g} degC is below the freezing point, {point:.1f} degC; raise it", path)
    elif temperature < freezing + FREEZING_MARGIN:
        yield warning(
            "near-freezing", f"{celsius:.4g} degC is within {FREEZING_MARGIN:g} K of freezing at {point:.1f} degC", path
        )
