"""Entries, exits, screens and plates: loss coefficients on the velocity in the pipe or duct.

Tables are interpolated and held at their edges; whoever calls says where that happens. D is the diameter of a round
opening and the hydraulic diameter of any other.
"""

from typing import Final

import numpy as np

from budget.physics.arrays import Array, ArrayLike
from budget.physics.tables import across, along

FLUSH: Final = 0.5
"""Sharp-edged entry flush in a wall, tank or header."""
OUTLET: Final = 1.0
"""Exit into a room, tank or header: the velocity pressure is lost."""
STANDARD_DENSITY: Final = 1.2
"""Density of air in kg/m3 at which makers' air-side drops are usually stated."""

# Idelchik 3-4, rounded edge in a wall: radius over D.
_ROUND = np.array([0.0, 0.01, 0.02, 0.03, 0.04, 0.05, 0.06, 0.08, 0.12, 0.16, 0.20])
_ROUNDED = np.array([0.50, 0.44, 0.37, 0.31, 0.26, 0.22, 0.20, 0.15, 0.09, 0.06, 0.03])
# Crane TP-410, the same edge.
_CRANE_ROUND = np.array([0.0, 0.02, 0.04, 0.06, 0.10, 0.15])
_CRANE_ROUNDED = np.array([0.50, 0.28, 0.24, 0.15, 0.09, 0.04])
# Idelchik 3-4, bell mouth at a free duct end: radius over D.
_BELL = np.array([0.0, 0.01, 0.02, 0.03, 0.04, 0.05, 0.06, 0.08, 0.10, 0.12, 0.16, 0.20])
_BELLMOUTH = np.array([1.0, 0.87, 0.74, 0.61, 0.51, 0.40, 0.32, 0.20, 0.15, 0.10, 0.06, 0.03])
# Idelchik 3-1, plain end: wall thickness over D (rows), distance of the end from the wall over D (columns).
_WALL = np.array([0.0, 0.004, 0.008, 0.012, 0.016, 0.020, 0.024, 0.030, 0.040, 0.050])
_OUT = np.array([0.0, 0.002, 0.005, 0.010, 0.020, 0.050, 0.100, 0.200, 0.300, 0.500])
_PLAIN = np.array(
    [
        [0.50, 0.57, 0.63, 0.68, 0.73, 0.80, 0.86, 0.92, 0.97, 1.00],
        [0.50, 0.54, 0.58, 0.63, 0.67, 0.74, 0.80, 0.86, 0.90, 0.94],
        [0.50, 0.53, 0.55, 0.58, 0.62, 0.68, 0.74, 0.81, 0.85, 0.88],
        [0.50, 0.52, 0.53, 0.55, 0.58, 0.63, 0.68, 0.75, 0.79, 0.83],
        [0.50, 0.51, 0.51, 0.53, 0.55, 0.58, 0.64, 0.70, 0.74, 0.77],
        [0.50, 0.51, 0.51, 0.52, 0.53, 0.55, 0.60, 0.66, 0.69, 0.72],
        [0.50, 0.50, 0.50, 0.51, 0.52, 0.53, 0.58, 0.62, 0.65, 0.68],
        [0.50, 0.50, 0.50, 0.51, 0.52, 0.52, 0.54, 0.57, 0.59, 0.61],
        [0.50, 0.50, 0.50, 0.51, 0.51, 0.51, 0.51, 0.52, 0.52, 0.54],
        [0.50, 0.50, 0.50, 0.50, 0.50, 0.50, 0.50, 0.50, 0.50, 0.50],
    ]
)
# Idelchik 3-7, bevelled edge in a wall: length of the bevel over D (rows), its included angle (columns).
_BEVEL = np.array([0.025, 0.050, 0.075, 0.100, 0.150, 0.600])
_BEVEL_ANGLE = np.array([0.0, 10.0, 20.0, 30.0, 40.0, 60.0, 100.0, 140.0, 180.0])
_BEVELLED = np.array(
    [
        [0.50, 0.47, 0.45, 0.43, 0.41, 0.40, 0.42, 0.45, 0.50],
        [0.50, 0.45, 0.41, 0.36, 0.33, 0.30, 0.35, 0.42, 0.50],
        [0.50, 0.42, 0.35, 0.30, 0.26, 0.23, 0.30, 0.40, 0.50],
        [0.50, 0.39, 0.32, 0.25, 0.22, 0.18, 0.27, 0.38, 0.50],
        [0.50, 0.37, 0.27, 0.20, 0.16, 0.15, 0.25, 0.37, 0.50],
        [0.50, 0.27, 0.18, 0.13, 0.11, 0.12, 0.23, 0.36, 0.50],
    ]
)
# Tapered hoods, from memory: included angle; round, and square or rectangular.
_HOOD_ANGLE = np.array([0.0, 20.0, 40.0, 60.0, 80.0, 100.0, 120.0, 140.0, 160.0, 180.0])
_HOOD_ROUND = np.array([1.00, 0.11, 0.06, 0.09, 0.14, 0.18, 0.27, 0.32, 0.43, 0.50])
_HOOD_RECTANGULAR = np.array([1.00, 0.19, 0.13, 0.16, 0.21, 0.27, 0.33, 0.43, 0.53, 0.62])
# Conical outlet, from memory: duct area over outlet area (rows), included angle (columns).
_OUTLET_RATIO = np.array([0.0625, 1.0 / 6.0, 0.25, 0.50])
_OUTLET_ANGLE = np.array([14.0, 16.0, 20.0, 30.0, 45.0, 60.0, 90.0])
_OUTLET_CONE = np.array(
    [
        [0.17, 0.20, 0.27, 0.49, 0.94, 1.00, 1.00],
        [0.22, 0.25, 0.32, 0.49, 0.94, 0.98, 1.00],
        [0.24, 0.28, 0.36, 0.54, 0.94, 1.00, 1.00],
        [0.33, 0.36, 0.44, 0.74, 0.97, 0.99, 1.00],
    ]
)


def rounded_entry(radius_ratio: ArrayLike) -> Array:
    """Entry flush in a wall with an edge of radius r, by r/D: 0.5 sharp, 0.03 from 0.2.

    Source: Idelchik, diagram 3-4 (off the `fluids` library, in part read).
    """
    return along(radius_ratio, _ROUND, _ROUNDED)


def rounded_entry_crane(radius_ratio: ArrayLike) -> Array:
    """Entry of a pipe with an edge of radius r, by r/d: 0.5 sharp, 0.04 from 0.15.

    Source: Crane TP-410 (off the `fluids` library).
    """
    return along(radius_ratio, _CRANE_ROUND, _CRANE_ROUNDED)


def bellmouth(radius_ratio: ArrayLike) -> Array:
    """Smooth bell mouth at a duct end without a wall, by r/D: 1 for a plain thin end, 0.03 from 0.2.

    Source: Idelchik 3-4, as printed in the supplement to Principles of HVAC, 9th ed., fitting 1-2 (read).
    """
    return along(radius_ratio, _BELL, _BELLMOUTH)


def plain_entry(thickness_ratio: ArrayLike, length_ratio: ArrayLike) -> Array:
    """Plain pipe or duct end standing out of a wall, or free.

    `thickness_ratio` is wall thickness over D, `length_ratio` the distance of the end from the wall over D; free from
    0.5. Source: Idelchik 3-1 (off the `fluids` library; in part read in the supplement to Principles of HVAC, fitting
    1-1).
    """
    return across(thickness_ratio, length_ratio, _WALL, _OUT, _PLAIN)


def bevelled_entry(length_ratio: ArrayLike, angle: ArrayLike) -> Array:
    """Entry flush in a wall with a bevelled edge: length of the bevel over D, included angle in degrees.

    A bevel shorter than the table begins with is led to the sharp edge. Source: Idelchik 3-7 (off the `fluids`
    library).
    """
    lengths = np.concatenate(([0.0], _BEVEL))
    table = np.vstack((np.full(len(_BEVEL_ANGLE), FLUSH), _BEVELLED))
    return across(length_ratio, angle, lengths, _BEVEL_ANGLE, table)


def inclined_entry(angle: ArrayLike) -> Array:
    """Sharp entry flush in a wall to which the pipe stands at `angle` degrees, 90 square: 0.57 + 0.3 cos + 0.2 cos^2.

    Source: Idelchik 3-2 (off the `fluids` library).
    """
    cosine = np.cos(np.radians(np.asarray(angle, dtype=np.float64)))
    return np.asarray(0.57 + 0.3 * cosine + 0.2 * cosine * cosine)


def hood(angle: ArrayLike, rectangular: ArrayLike) -> Array:
    """Tapered hood at a duct end, by the included angle of its sides in degrees; `rectangular` False for a cone.

    Source: ASHRAE and SMACNA fitting tables, hood, flanged or not (from memory).
    """
    cone, pyramid = along(angle, _HOOD_ANGLE, _HOOD_ROUND), along(angle, _HOOD_ANGLE, _HOOD_RECTANGULAR)
    return np.asarray(np.where(np.asarray(rectangular, dtype=np.bool_), pyramid, cone))


def conical_exit(area_ratio: ArrayLike, angle: ArrayLike) -> Array:
    """Exit through a cone into a room: duct area over outlet area 0.0625 to 0.5, included angle 14 to 90 degrees.

    Holds what is lost in the cone and the velocity pressure at its mouth. Source: ASHRAE fitting SD2 after Idelchik
    (from memory).
    """
    return across(area_ratio, angle, _OUTLET_RATIO, _OUTLET_ANGLE, _OUTLET_CONE)


def wire_screen(free_area: ArrayLike) -> Array:
    """Wire screen across a duct, by its free-area ratio n: 1.3 (1-n) + (1/n - 1)^2, wire Reynolds number above 1000.

    Source: Idelchik, diagram 8-6 (from memory; ASHRAE CD6-1 tabulates the same figures).
    """
    n = np.asarray(free_area, dtype=np.float64)
    return np.asarray(1.3 * (1.0 - n) + (1.0 / n - 1.0) ** 2)


def perforated_plate(free_area: ArrayLike) -> Array:
    """Thin sharp-edged plate with holes across a duct, or an orifice, by its free-area ratio n.

    (0.707 sqrt(1-n) + 1 - n)^2 / n^2, thickness below 0.015 hole diameters. Source: Idelchik, diagrams 8-1 and 4-15
    (from memory).
    """
    n = np.asarray(free_area, dtype=np.float64)
    return np.asarray(((0.707 * np.sqrt(1.0 - n) + 1.0 - n) / n) ** 2)


def rated_coefficient(
    drop: ArrayLike, velocity: ArrayLike, face_ratio: ArrayLike = 1.0, density: ArrayLike = STANDARD_DENSITY
) -> Array:
    """Coefficient on the duct velocity of what a maker rates: `drop` Pa at a face `velocity` in m/s, air of `density`.

    `face_ratio` is the face area over the duct area; K = drop / (rho v^2/2) / face_ratio^2.
    """
    dp, v, ratio, rho = (np.asarray(x, dtype=np.float64) for x in (drop, velocity, face_ratio, density))
    return np.asarray(dp / (0.5 * rho * (v * ratio) ** 2))
