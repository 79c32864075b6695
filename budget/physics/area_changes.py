"""Enlargements and contractions: loss coefficients on the velocity in the smaller area, led over to the sudden change.

`area_ratio` is always the smaller area over the larger one, 0 to 1; `angle` the included angle in degrees, 180 for an
abrupt change. Friction in the cone is not part of it: its length counts as straight pipe or duct.
"""

from typing import Final

import numpy as np

from budget.physics.arrays import Array, ArrayLike
from budget.physics.openings import rounded_entry
from budget.physics.polynomials import polynomial
from budget.physics.smooth import smooth_step
from budget.physics.tables import across

ABRUPT: Final = 180.0
"""Included angle in degrees of an abrupt change of area."""
# SMACNA 1990 table 14-12 A, on the downstream velocity; equal areas lose nothing.
_ANGLE = np.array([10.0, 15.0, 40.0, 50.0, 60.0, 90.0, 120.0, 150.0, 180.0])
_RATIO = np.array([0.1, 1.0 / 6.0, 0.25, 0.5, 1.0])
_CONVERGING = np.array(
    [
        [0.05, 0.05, 0.05, 0.08, 0.08, 0.19, 0.29, 0.37, 0.43],
        [0.05, 0.04, 0.04, 0.07, 0.07, 0.18, 0.28, 0.36, 0.42],
        [0.05, 0.04, 0.04, 0.07, 0.07, 0.17, 0.27, 0.35, 0.41],
        [0.05, 0.05, 0.05, 0.06, 0.06, 0.12, 0.18, 0.24, 0.26],
        [0.0, 0.0, 0.0, 0.0, 0.0, 0.0, 0.0, 0.0, 0.0],
    ]
)

# SMACNA A-8 figure B, pyramid, on the upstream velocity, from memory; no angle and equal areas lose nothing.
_PYRAMID_ANGLE = np.array([0.0, 16.0, 20.0, 30.0, 45.0, 60.0, 90.0, 120.0, 180.0])
_PYRAMID = np.array(
    [
        [0.0, 0.42, 0.49, 0.59, 0.70, 0.80, 0.87, 0.85, 0.86],
        [0.0, 0.42, 0.47, 0.58, 0.68, 0.72, 0.76, 0.76, 0.75],
        [0.0, 0.36, 0.43, 0.50, 0.56, 0.61, 0.63, 0.63, 0.63],
        [0.0, 0.18, 0.22, 0.25, 0.29, 0.31, 0.32, 0.33, 0.30],
        [0.0, 0.00, 0.00, 0.00, 0.00, 0.00, 0.00, 0.00, 0.00],
    ]
)

# Idelchik 5-23: K = -P(n) (10 a + 2 pi a^2 - a^3), a in radians.
_P = np.array([-0.00745, 0.00444, -0.00723, 0.0224, -0.0125])
_GRADUAL_TO = 120.0  # from here on the formula is led over to the sudden contraction


def enlargement(area_ratio: ArrayLike, angle: ArrayLike) -> Array:
    """Loss coefficient of an enlargement, a cone or one that widens in one plane, on the velocity in the smaller area.

    The share 3.2 tan(angle/2)^1.25 of the sudden loss, at most the whole of it, which is reached at 43 degrees.
    Source: Idelchik, diagram 5-1 (from memory; 12 to 16 % below Gibson's formula between 7.5 and 30 degrees); that
    one steeper than 50 degrees counts as sudden: Hydraulic Institute, eq. 3.B.4 (read).
    """
    theta = np.clip(np.asarray(angle, dtype=np.float64), 0.0, 90.0)  # tan grows beyond any share before 90 degrees
    share = 3.2 * np.tan(0.5 * np.radians(theta)) ** 1.25
    return np.asarray(np.minimum(share, 1.0) * sudden_enlargement(area_ratio))


def sudden_enlargement(area_ratio: ArrayLike) -> Array:
    """Loss coefficient of an abrupt enlargement on the velocity in the smaller area: (1 - n)^2, Borda-Carnot."""
    return np.asarray((1.0 - _ratio(area_ratio)) ** 2)


def contraction(area_ratio: ArrayLike, angle: ArrayLike) -> Array:
    """Loss coefficient of a contraction on the velocity in the smaller area.

    Idelchik's formula for cones to 120 degrees, never above the sudden contraction; to 180 degrees led over to it.
    Source: Idelchik, diagram 5-23 (from memory).
    """
    n = _ratio(area_ratio)
    theta = np.clip(np.asarray(angle, dtype=np.float64), 0.0, ABRUPT)
    a = np.radians(theta)
    sudden = sudden_contraction(n)
    gradual = -polynomial(n, _P) * a * (10.0 + a * (2.0 * np.pi - a))
    gradual = np.minimum(gradual, sudden)
    return np.asarray(gradual + smooth_step(theta, _GRADUAL_TO, ABRUPT) * (sudden - gradual))


def sudden_contraction(area_ratio: ArrayLike) -> Array:
    """Loss coefficient of an abrupt contraction on the velocity in the smaller area: 0.5 (1 - n)^0.75.

    Source: Idelchik, diagram 4-9 (read, off a library and from memory).
    """
    return np.asarray(0.5 * (1.0 - _ratio(area_ratio)) ** 0.75)


def rounded_contraction(area_ratio: ArrayLike, radius_ratio: ArrayLike) -> Array:
    """Loss coefficient of a contraction with a rounded edge, on the velocity in the smaller area.

    That of an entry with the same edge x (1 - n); `radius_ratio` is the radius over the smaller diameter. Source:
    Idelchik, diagram 4-9 (off the `fluids` library).
    """
    return np.asarray(rounded_entry(radius_ratio) * (1.0 - _ratio(area_ratio)))


def duct_convergence(area_ratio: ArrayLike, angle: ArrayLike) -> Array:
    """Loss coefficient of a converging duct transition, round or rectangular, on the velocity in the smaller area.

    A printed table to area ratio 0.5, from there straight to nothing at 1; its least figures, 0.04 to 0.05, hold the
    friction of the piece. Source: SMACNA HVAC Systems Duct Design (1990), table 14-12 A (read).
    """
    return across(_ratio(area_ratio), angle, _RATIO, _ANGLE, _CONVERGING)


def pyramid_divergence(area_ratio: ArrayLike, angle: ArrayLike) -> Array:
    """Loss coefficient of a rectangular duct that widens on all four sides, or between rectangular and round.

    On the velocity in the smaller area; a printed table from 16 degrees and to area ratio 0.5, from there straight to
    nothing at no angle and at equal areas. Source: SMACNA HVAC Systems Duct Design, table A-8 figure B (from memory).
    """
    return across(_ratio(area_ratio), angle, _RATIO, _PYRAMID_ANGLE, _PYRAMID)


def _ratio(area_ratio: ArrayLike) -> Array:
    return np.asarray(np.clip(np.asarray(area_ratio, dtype=np.float64), 0.0, 1.0))
