"""Density, viscosity and specific heat of the fluids in pipes and ducts, with the ranges that hold."""

from dataclasses import dataclass
from typing import Final

import numpy as np

from budget.physics.arrays import Array, ArrayLike, Flags
from budget.physics.glycols import POLYNOMIALS, Basis, Kind
from budget.physics.polynomials import polynomial, polynomial_of_two

ZERO_CELSIUS: Final = 273.15
STANDARD_PRESSURE: Final = 101_325.0
"""Pressure of the standard atmosphere at sea level, Pa."""


@dataclass(frozen=True, slots=True)
class FluidState:
    """A fluid at the temperature of a leg: density kg/m3, dynamic viscosity Pa s, specific heat J/(kg K)."""

    density: Array
    viscosity: Array
    specific_heat: Array


@dataclass(frozen=True, slots=True)
class Validity:
    """Where a correlation was verified: temperature in K, fraction of glycol or relative humidity 0 to 1."""

    temperature: tuple[float, float]
    fraction: tuple[float, float]
    source: str
    known_from: str

    def covers(self, temperature: ArrayLike, fraction: ArrayLike = 0.0) -> Flags:
        """Whether the correlation holds; the ends belong to the range. Beyond it one can compute too."""
        t, x = np.asarray(temperature, dtype=np.float64), np.asarray(fraction, dtype=np.float64)
        low, high = self.temperature
        least, most = self.fraction
        return np.asarray((t >= low) & (t <= high) & (x >= least) & (x <= most))


WATER_RANGE: Final = Validity(
    (273.15, 423.15),
    (0.0, 0.0),
    "Kell (1975) density; IAPWS SR6-08 viscosity; own fit of specific heat; all verified against IAPWS-IF97",
    "memory, verified against a library",
)
AIR_RANGE: Final = Validity(
    (253.15, 333.15),
    (0.0, 1.0),
    "ideal-gas mixture; saturation by Hyland and Wexler (1983); verified against a library, -20 to 60 degC",
    "memory, verified against a library",
)
_MASS = "Melinder, Properties of Secondary Working Fluids (IIR, 2010), polynomials as in the CoolProp library"
_VOLUME = "ASHRAE tables of inhibited glycols, polynomials as in the CoolProp library"
GLYCOL_RANGES: Final[dict[tuple[Kind, Basis], Validity]] = {
    ("propylene", "mass"): Validity((173.15, 373.15), (0.0, 0.6), _MASS, "library"),
    ("ethylene", "mass"): Validity((173.15, 373.15), (0.0, 0.6), _MASS, "library"),
    ("propylene", "volume"): Validity((238.15, 373.15), (0.1, 0.6), _VOLUME, "library"),
    ("ethylene", "volume"): Validity((238.15, 373.15), (0.1, 0.6), _VOLUME, "library"),
}
"""Limits by glycol and basis; the lower temperature is the set's, the freezing point is mostly above it."""
ALTITUDE_RANGE: Final = (-500.0, 11_000.0)
"""Altitudes in m within which the standard atmosphere has the one gradient that the formula takes."""


def water(temperature: ArrayLike) -> FluidState:
    """Liquid water at `temperature` in K, near atmospheric or system pressure.

    Within 0.05 % (density), 0.2 % (viscosity) and 0.1 % (specific heat) of IAPWS-IF97 from 0 to 150 degC.

    Source: Kell (1975), J. Chem. Eng. Data 20; IAPWS SR6-08; specific heat an own fit. From memory, verified.
    """
    t = np.asarray(temperature, dtype=np.float64) - ZERO_CELSIUS
    density = polynomial(t, _KELL) / (1.0 + 16.879850e-3 * t)
    reduced = np.asarray(temperature, dtype=np.float64) / 300.0
    viscosity = 1e-6 * (
        280.68 * reduced**-1.9 + 511.45 * reduced**-7.7 + 61.131 * reduced**-19.6 + 0.45903 * reduced**-40.0
    )
    specific_heat = polynomial(t / 100.0, _WATER_HEAT)
    return FluidState(np.asarray(density), np.asarray(viscosity), np.asarray(specific_heat))


def glycol(kind: Kind, basis: Basis, fraction: ArrayLike, temperature: ArrayLike) -> FluidState:
    """Water with `fraction` (0 to 1) of propylene or ethylene glycol by mass or volume, at `temperature` K.

    Computes below the freezing point and outside GLYCOL_RANGES too, where the caller has to say so.
    Source: see `glycols`.
    """
    p = POLYNOMIALS[kind, basis]
    t = np.asarray(temperature, dtype=np.float64) - p.temperature_base
    x = np.asarray(fraction, dtype=np.float64) - p.fraction_base
    t, x = np.broadcast_arrays(t, x)
    return FluidState(
        np.asarray(polynomial_of_two(t, x, p.density)),
        np.asarray(p.viscosity_unit * np.exp(polynomial_of_two(t, x, p.log_viscosity))),
        np.asarray(polynomial_of_two(t, x, p.specific_heat)),
    )


def freezing_point(kind: Kind, basis: Basis, fraction: ArrayLike) -> Array:
    """Temperature in K at which the first ice forms in a mixture with `fraction` (0 to 1) of glycol."""
    p = POLYNOMIALS[kind, basis]
    x = np.asarray(fraction, dtype=np.float64) - p.fraction_base
    value = polynomial(x, p.freezing)
    return np.asarray(np.exp(value) if p.freezing_is_log else value)


def standard_pressure(altitude: ArrayLike) -> Array:
    """Pressure in Pa of the standard atmosphere at `altitude` in m. Source: ICAO, ISO 2533:1975."""
    z = np.asarray(altitude, dtype=np.float64)
    return np.asarray(STANDARD_PRESSURE * (1.0 - 2.25577e-5 * z) ** 5.25588)


def saturation_pressure(temperature: ArrayLike) -> Array:
    """Pressure of saturated water vapour in Pa, over ice below 273.15 K and over water above.

    Source: Hyland and Wexler (1983), ASHRAE Transactions 89(2A); from memory, verified against a library.
    """
    t = np.asarray(temperature, dtype=np.float64)
    over_ice = _log_saturation(t, _OVER_ICE)
    over_water = _log_saturation(t, _OVER_WATER)
    return np.asarray(np.exp(np.where(t < ZERO_CELSIUS, over_ice, over_water)))


def humid_air(
    temperature: ArrayLike, pressure: ArrayLike = STANDARD_PRESSURE, relative_humidity: ArrayLike = 0.5
) -> FluidState:
    """Moist air at `temperature` in K, absolute `pressure` in Pa and `relative_humidity` 0 to 1.

    Density and specific heat are those of the mixture, per kg of moist air. Density by the ideal-gas law of
    dry air and vapour; viscosity by the rule of Herning and Zipperer (1936) from Sutherland's law for dry air
    and the dilute-gas term of IAPWS R12-08 for vapour, within 1 % of a property library; specific heat from
    1006 and 1860 J/(kg K) of dry air and vapour (all from memory, verified).
    """
    t, p, rh = np.broadcast_arrays(
        *(np.asarray(x, dtype=np.float64) for x in (temperature, pressure, relative_humidity))
    )
    vapour = np.minimum(rh * saturation_pressure(t), p)  # boiling: vapour alone
    rho_air, rho_vapour = (p - vapour) / (_R_AIR * t), vapour / (_R_VAPOUR * t)
    density = rho_air + rho_vapour
    specific_heat = (1006.0 * rho_air + 1860.0 * rho_vapour) / density
    return FluidState(np.asarray(density), _mixture_viscosity(t, vapour / p), np.asarray(specific_heat))


_KELL = np.array([999.83952, 16.945176, -7.9870401e-3, -46.170461e-6, 105.56302e-9, -280.54253e-12], dtype=np.float64)
_WATER_HEAT = np.array([4215.6129, -250.14317, 577.96725, -608.97163, 361.0647, -79.665419], dtype=np.float64)

_M_AIR, _M_VAPOUR = 28.966e-3, 18.015268e-3  # kg/mol
_R_AIR, _R_VAPOUR = 8.314462618 / _M_AIR, 8.314462618 / _M_VAPOUR

# ln p = c0/T + c1 + c2 T + c3 T^2 + c4 T^3 + c5 T^4 + c6 ln T
_OVER_ICE = (
    -5.6745359e3, 6.3925247, -9.6778430e-3, 6.2215701e-7, 2.0747825e-9, -9.4840240e-13, 4.1635019,
)  # fmt: skip
_OVER_WATER = (-5.8002206e3, 1.3914993, -4.8640239e-2, 4.1764768e-5, -1.4452093e-8, 0.0, 6.5459673)


def _log_saturation(t: Array, c: tuple[float, ...]) -> Array:
    return np.asarray(c[0] / t + polynomial(t, c[1:6]) + c[6] * np.log(t))


def _mixture_viscosity(t: Array, vapour_share: Array) -> Array:
    """Viscosity of dry air with a mole fraction of water vapour, Pa s."""
    air = 1.716e-5 * (t / ZERO_CELSIUS) ** 1.5 * (ZERO_CELSIUS + 110.4) / (t + 110.4)
    reduced = t / 647.096
    collisions = 1.67752 + 2.20462 / reduced + 0.6366564 / reduced**2 - 0.241605 / reduced**3
    vapour = 1e-4 * np.sqrt(reduced) / collisions
    air_weight = (1.0 - vapour_share) * np.sqrt(_M_AIR)
    vapour_weight = vapour_share * np.sqrt(_M_VAPOUR)
    return np.asarray((air_weight * air + vapour_weight * vapour) / (air_weight + vapour_weight))
