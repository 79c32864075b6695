"""Pumps and fans: powers, specific fan power, velocity pressure and the affinity laws."""

from typing import Final

import numpy as np

from budget.physics.arrays import Array, ArrayLike

SFP_CLASSES: Final = (
    (300.0, "SFP 0"),
    (500.0, "SFP 1"),
    (750.0, "SFP 2"),
    (1250.0, "SFP 3"),
    (2000.0, "SFP 4"),
    (3000.0, "SFP 5"),
    (4500.0, "SFP 6"),
)
"""Greatest specific fan power, W/(m3/s), of each class; above the last it is SFP 7.
EN 16798-3:2017 (read in part, the rest from memory)."""


def hydraulic_power(flow: ArrayLike, pressure: ArrayLike) -> Array:
    """Power given to the fluid, W: volume flow (m3/s) x duty pressure (Pa)."""
    return np.asarray(np.asarray(flow, dtype=np.float64) * np.asarray(pressure, dtype=np.float64))


def shaft_power(hydraulic: ArrayLike, efficiency: ArrayLike) -> Array:
    """Power at the shaft, W: hydraulic power over the efficiency of the pump or fan (0 to 1)."""
    return np.asarray(np.asarray(hydraulic, dtype=np.float64) / np.asarray(efficiency, dtype=np.float64))


def electrical_power(shaft: ArrayLike, motor_efficiency: ArrayLike) -> Array:
    """Power drawn from the supply, W: shaft power over the efficiency of motor and drive (0 to 1)."""
    return np.asarray(np.asarray(shaft, dtype=np.float64) / np.asarray(motor_efficiency, dtype=np.float64))


def specific_fan_power(electrical: ArrayLike, flow: ArrayLike) -> Array:
    """Specific fan power, W/(m3/s): electrical power over volume flow. Source: EN 16798-3:2017."""
    return np.asarray(np.asarray(electrical, dtype=np.float64) / np.asarray(flow, dtype=np.float64))


def sfp_class(sfp: float) -> str:
    """Class of a specific fan power in W/(m3/s), "SFP 0" to "SFP 7"; on a limit it is the better class."""
    return next((name for limit, name in SFP_CLASSES if sfp <= limit), "SFP 7")


def velocity_pressure(density: ArrayLike, velocity: ArrayLike) -> Array:
    """Velocity pressure, Pa: rho v^2/2."""
    v = np.asarray(velocity, dtype=np.float64)
    return np.asarray(0.5 * np.asarray(density, dtype=np.float64) * v * v)


def fan_static_pressure(total: ArrayLike, outlet_velocity_pressure: ArrayLike) -> Array:
    """Fan static pressure, Pa: fan total less the velocity pressure at its outlet. Source: ISO 5801."""
    return np.asarray(np.asarray(total, dtype=np.float64) - np.asarray(outlet_velocity_pressure, dtype=np.float64))


def affinity(flow: ArrayLike, pressure: ArrayLike, power: ArrayLike, ratio: ArrayLike) -> tuple[Array, Array, Array]:
    """Flow, pressure and power of a pump or fan at another speed: times r, r^2 and r^3, at equal efficiency.

    `ratio` is new over old speed; for a small trim of the impeller in its casing it is the ratio of
    diameters. Source: Hydraulic Institute, Engineering Data Book, pump principles.
    """
    r = np.asarray(ratio, dtype=np.float64)
    q, p, w = (np.asarray(x, dtype=np.float64) for x in (flow, pressure, power))
    return np.asarray(q * r), np.asarray(p * r**2), np.asarray(w * r**3)


def fan_laws(
    flow: ArrayLike,
    pressure: ArrayLike,
    power: ArrayLike,
    speed: ArrayLike = 1.0,
    diameter: ArrayLike = 1.0,
    density: ArrayLike = 1.0,
) -> tuple[Array, Array, Array]:
    """Flow, pressure and power of a geometrically similar fan: q ~ n D^3, p ~ rho n^2 D^2, P ~ rho n^3 D^5.

    `speed`, `diameter` and `density` are ratios new over old. Source: EN ISO 13349, ISO 5801 (from memory).
    """
    n, d, rho = (np.asarray(x, dtype=np.float64) for x in (speed, diameter, density))
    q, p, w = (np.asarray(x, dtype=np.float64) for x in (flow, pressure, power))
    return np.asarray(q * n * d**3), np.asarray(p * rho * n**2 * d**2), np.asarray(w * rho * n**3 * d**5)
