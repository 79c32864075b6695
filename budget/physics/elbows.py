"""Duct elbows and offsets: loss coefficients on the velocity in the duct, by radius, aspect, angle and Reynolds number.

The printed tables are the method and are interpolated, along the radius on logarithms, for the loss is nearly a power
of it; where a closed form was published too it stands beside the table and is the check on it. `radius_ratio` is the
centre-line radius over the side W in the plane of the bend (round: over the diameter), `aspect` is H/W with H the
other side, angles are of deflection in degrees. Outside a table the figure at its edge is held; whoever calls says
so. The coefficients are for what is lost beyond the friction of the elbow's centre-line length, which counts as
straight duct.
"""

from typing import Final

import numpy as np

from budget.physics.arrays import Array, ArrayLike
from budget.physics.tables import across, across_log, along, along_log

MITRE_ANGLES: Final = (20.0, 90.0)
"""Angles of deflection in degrees that the tables of mitred elbows hold."""
MITRE_ASPECTS: Final = (0.25, 8.0)
"""Aspects H/W that the tables of rectangular elbows hold."""

# SMACNA A-7 figure C, a note to it.
_RE = np.array([1.0, 2.0, 3.0, 4.0, 6.0, 8.0, 10.0, 14.0]) * 1e4
_RE_FACTOR = np.array([1.40, 1.26, 1.19, 1.14, 1.09, 1.06, 1.04, 1.00])

# SMACNA A-7 note 1.
_ANGLE = np.array([0.0, 20.0, 30.0, 45.0, 60.0, 75.0, 90.0, 110.0, 130.0, 150.0, 180.0])
_ANGLE_FACTOR = np.array([0.0, 0.31, 0.45, 0.60, 0.78, 0.90, 1.00, 1.13, 1.20, 1.28, 1.40])

# SMACNA A-7 figures A and B.
_ROUND_RADIUS = np.array([0.5, 0.75, 1.0, 1.5, 2.0, 2.5])
_ROUND_SMOOTH = np.array([0.71, 0.33, 0.22, 0.15, 0.13, 0.12])
_GORE_RADIUS = np.array([0.75, 1.0, 1.5, 2.0])
_GORE_PIECES = np.array([3.0, 4.0, 5.0])
_GORED = np.array([[0.54, 0.42, 0.34, 0.33], [0.50, 0.37, 0.27, 0.24], [0.46, 0.33, 0.24, 0.19]])
_THREE_PIECES_TIGHT = 0.98  # at r/D 0.5, which is printed for three pieces alone

# SMACNA A-7 figures C (round) and D (rectangular).
_MITRE_ANGLE = np.array([20.0, 30.0, 45.0, 60.0, 75.0, 90.0])
_ROUND_MITRE = np.array([0.08, 0.16, 0.34, 0.55, 0.81, 1.2])
_MITRE_ASPECT = np.array([0.25, 0.5, 0.75, 1.0, 1.5, 2.0, 4.0, 6.0, 8.0])
_MITRE = np.array(
    [
        [0.08, 0.08, 0.08, 0.07, 0.07, 0.07, 0.06, 0.05, 0.05],
        [0.18, 0.17, 0.17, 0.16, 0.15, 0.15, 0.13, 0.12, 0.11],
        [0.38, 0.37, 0.36, 0.34, 0.33, 0.31, 0.27, 0.25, 0.24],
        [0.60, 0.59, 0.57, 0.55, 0.52, 0.49, 0.43, 0.39, 0.38],
        [0.89, 0.87, 0.84, 0.81, 0.77, 0.73, 0.63, 0.58, 0.57],
        [1.3, 1.3, 1.2, 1.2, 1.1, 1.1, 0.92, 0.85, 0.83],
    ]
)
_MITRE_A = np.array([2.5, 2.22, 1.87, 1.50, 1.28, 1.20])
_C1_ASPECT = np.array([0.25, 0.5, 0.75, 1.0, 1.5, 2.0, 3.0, 4.0, 5.0, 6.0, 7.0, 8.0])
_C1 = np.array([1.10, 1.07, 1.04, 1.00, 0.95, 0.90, 0.83, 0.78, 0.75, 0.72, 0.71, 0.70])

# ASHRAE CR3-1.
_SMOOTH_RADIUS = np.array([0.5, 0.75, 1.0, 1.5, 2.0])
_SMOOTH_ASPECT = np.array([0.25, 0.5, 0.75, 1.0, 1.5, 2.0, 3.0, 4.0, 5.0, 6.0, 8.0])
_SMOOTH = np.array(
    [
        [1.53, 1.38, 1.29, 1.18, 1.06, 1.00, 1.00, 1.06, 1.12, 1.16, 1.18],
        [0.57, 0.52, 0.48, 0.44, 0.40, 0.39, 0.39, 0.40, 0.42, 0.43, 0.44],
        [0.27, 0.25, 0.23, 0.21, 0.19, 0.18, 0.18, 0.19, 0.20, 0.21, 0.21],
        [0.22, 0.20, 0.19, 0.17, 0.15, 0.14, 0.14, 0.15, 0.16, 0.17, 0.17],
        [0.20, 0.18, 0.16, 0.15, 0.14, 0.13, 0.13, 0.14, 0.14, 0.15, 0.15],
    ]
)

# ASHRAE CR3-3.
_SPLIT_RADIUS = np.array([0.55, 0.60, 0.65, 0.70, 0.75, 0.80, 0.85, 0.90, 0.95, 1.00])
_SPLIT_ASPECT = np.array([0.25, 0.5, 1.0, 1.5, 2.0, 3.0, 4.0, 5.0, 6.0, 7.0, 8.0])
_SPLIT = np.array(
    [
        [0.52, 0.40, 0.43, 0.49, 0.55, 0.66, 0.75, 0.84, 0.93, 1.01, 1.09],
        [0.36, 0.27, 0.25, 0.28, 0.30, 0.35, 0.39, 0.42, 0.46, 0.49, 0.52],
        [0.28, 0.21, 0.18, 0.19, 0.20, 0.22, 0.25, 0.26, 0.28, 0.30, 0.32],
        [0.22, 0.16, 0.14, 0.14, 0.15, 0.16, 0.17, 0.18, 0.19, 0.20, 0.21],
        [0.18, 0.13, 0.11, 0.11, 0.11, 0.12, 0.13, 0.14, 0.14, 0.15, 0.15],
        [0.15, 0.11, 0.09, 0.09, 0.09, 0.09, 0.10, 0.10, 0.11, 0.11, 0.12],
        [0.13, 0.09, 0.08, 0.07, 0.07, 0.08, 0.08, 0.08, 0.08, 0.09, 0.09],
        [0.11, 0.08, 0.07, 0.06, 0.06, 0.06, 0.06, 0.07, 0.07, 0.07, 0.07],
        [0.10, 0.07, 0.06, 0.05, 0.05, 0.05, 0.05, 0.05, 0.06, 0.06, 0.06],
        [0.09, 0.06, 0.05, 0.05, 0.04, 0.04, 0.04, 0.05, 0.05, 0.05, 0.05],
    ]
)

# ASHRAE CR3-17 (Idelchik 6-13), from memory: distance between the mitres over W, coefficient of the pair at H/W 1.
_OFFSET_LENGTH = np.array(
    [0.0, 0.4, 0.6, 0.8, 1.0, 1.2, 1.4, 1.6, 1.8, 2.0, 2.4, 2.8, 3.2, 4.0, 5.0, 6.0, 7.0, 9.0, 10.0]
)
_OFFSET = np.array(
    [0.0, 0.62, 0.90, 1.61, 2.63, 3.61, 4.01, 4.18, 4.22, 4.18, 3.75, 3.31, 3.20, 3.08, 2.92, 2.80, 2.70, 2.50, 2.41]
)


def reynolds_factor(re: ArrayLike) -> Array:
    """Factor on the coefficient of a mitred elbow at a Reynolds number: 1.40 at 1e4 and below, 1 from 1.4e5.

    Source: SMACNA HVAC Systems Duct Design, 4th ed., table A-7 figure C (read).
    """
    return along(re, _RE, _RE_FACTOR)


def angle_factor(angle: ArrayLike) -> Array:
    """Factor on the 90 degree coefficient of a smooth-radius elbow that turns by `angle`, 0 to 180 degrees.

    Source: SMACNA A-7 note 1, the same as ASHRAE CR3-1 (read).
    """
    return along(angle, _ANGLE, _ANGLE_FACTOR)


def round_smooth(radius_ratio: ArrayLike, angle: ArrayLike = 90.0) -> Array:
    """Smooth (pressed or spun) round elbow, r/D 0.5 to 2.5. Source: SMACNA A-7 figure A and note 1 (read)."""
    return np.asarray(along_log(_log(radius_ratio), np.log(_ROUND_RADIUS), _ROUND_SMOOTH) * angle_factor(angle))


def round_gored(radius_ratio: ArrayLike, pieces: ArrayLike) -> Array:
    """Segmented round elbow of 90 degrees in 3, 4 or 5 pieces, r/D 0.75 to 2. Source: SMACNA A-7 figure B (read).

    In three pieces the table begins at r/D 0.5.
    """
    r, n = np.asarray(radius_ratio, dtype=np.float64), np.asarray(pieces, dtype=np.float64)
    tight = along_log(_log(r), np.log([0.5, 0.75]), [_THREE_PIECES_TIGHT, _GORED[0, 0]])
    table = across_log(n, _log(r), _GORE_PIECES, np.log(_GORE_RADIUS), _GORED)
    return np.asarray(np.where((r < 0.75) & (n <= 3.0), tight, table))


def round_mitre(angle: ArrayLike) -> Array:
    """Mitred round elbow without vanes, 20 to 90 degrees, Re above 1.4e5, see `reynolds_factor`.

    Source: SMACNA A-7 figure C (read).
    """
    return along(angle, _MITRE_ANGLE, _ROUND_MITRE)


def rectangular_mitre(angle: ArrayLike, aspect: ArrayLike) -> Array:
    """Mitred rectangular elbow without vanes, 20 to 90 degrees, H/W 0.25 to 8, Re above 1.4e5, see `reynolds_factor`.

    Source: SMACNA A-7 figure D (read).
    """
    return across(angle, aspect, _MITRE_ANGLE, _MITRE_ASPECT, _MITRE)


def mitre_closed_form(angle: ArrayLike, aspect: ArrayLike = 1.0) -> Array:
    """Mitred elbow by its closed form, A C1 [0.95 sin^2(angle/2) + 2.05 sin^4(angle/2)]; beside the printed tables.

    Within 9.8 % of them, 3.1 % where C is above 0.3. Source: Idelchik, diagrams 6-5 and 6-7 (read and from memory).
    """
    sine = np.sin(0.5 * np.radians(np.asarray(angle, dtype=np.float64))) ** 2
    factor = along(angle, _MITRE_ANGLE, _MITRE_A) * along(aspect, _C1_ASPECT, _C1)
    return np.asarray(factor * sine * (0.95 + 2.05 * sine))


def rectangular_smooth(radius_ratio: ArrayLike, aspect: ArrayLike, angle: ArrayLike = 90.0) -> Array:
    """Smooth-radius rectangular elbow without vanes, r/W 0.5 to 2, H/W 0.25 to 8.

    Source: ASHRAE Fundamentals 2005, fitting CR3-1, with its angle factor (read).
    """
    at_90 = across_log(_log(radius_ratio), aspect, np.log(_SMOOTH_RADIUS), _SMOOTH_ASPECT, _SMOOTH)
    return np.asarray(at_90 * angle_factor(angle))


def rectangular_smooth_closed_form(radius_ratio: ArrayLike, aspect: ArrayLike, angle: ArrayLike = 90.0) -> Array:
    """Smooth-radius rectangular elbow by its closed form A1 B1 C1; beside the printed table, within 11.8 % of it.

    Source: Idelchik, diagram 6-1 (read and from memory); r/W 0.5 to 3, Re above 2e5.
    """
    r, h, theta = (np.asarray(x, dtype=np.float64) for x in (radius_ratio, aspect, angle))
    by_angle = np.select(
        [theta <= 70.0, theta < 100.0],
        [
            0.9 * np.sin(np.radians(theta)),
            along(theta, [70.0, 90.0, 100.0], [0.9 * np.sin(np.radians(70.0)), 1.0, 1.0889]),
        ],
        0.7 + 0.35 * theta / 90.0,
    )
    by_radius = 0.21 * np.where(r <= 1.0, r**-2.5, r**-0.5)
    by_aspect = np.where(h <= 4.0, 0.85 + 0.125 / h, 1.115 - 0.84 / h)
    return np.asarray(by_angle * by_radius * by_aspect)


def rectangular_splitter(radius_ratio: ArrayLike, aspect: ArrayLike) -> Array:
    """Smooth-radius rectangular elbow of 90 degrees with one splitter vane, r/W 0.55 to 1, H/W 0.25 to 8.

    Source: ASHRAE, fitting CR3-3 (read).
    """
    return across_log(_log(radius_ratio), aspect, np.log(_SPLIT_RADIUS), _SPLIT_ASPECT, _SPLIT)


def mitred_offset(length_ratio: ArrayLike, aspect: ArrayLike) -> Array:
    """Offset of two mitred 90 degree elbows in one plane (Z-shape), both together, Re above 1.4e5.

    `length_ratio` is the distance between the elbows over W, 0 to 10. Source: ASHRAE fitting CR3-17 after Idelchik,
    with the aspect factor of mitred elbows (from memory).
    """
    return np.asarray(along(length_ratio, _OFFSET_LENGTH, _OFFSET) * along(aspect, _C1_ASPECT, _C1))


def _log(radius_ratio: ArrayLike) -> Array:
    return np.asarray(np.log(np.asarray(radius_ratio, dtype=np.float64)))
