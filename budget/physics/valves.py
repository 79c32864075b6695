"""Bends and valves by Crane's n fT: bends of any radius and angle, coils, mitres, valves with a reduced bore.

fT is the friction factor of the pipe at fully turbulent flow; coefficients are on the velocity in the pipe.
"""

import numpy as np

from budget.physics.arrays import Array, ArrayLike
from budget.physics.tables import along

_RADIUS = np.array([1.0, 1.5, 2.0, 3.0, 4.0, 6.0, 8.0, 10.0, 12.0, 14.0, 16.0, 20.0])
_BEND = np.array([20.0, 14.0, 12.0, 12.0, 14.0, 17.0, 24.0, 30.0, 34.0, 38.0, 42.0, 50.0])
_MITRE_ANGLE = np.array([0.0, 15.0, 30.0, 45.0, 60.0, 75.0, 90.0])
_MITRE = np.array([2.0, 4.0, 8.0, 15.0, 25.0, 40.0, 60.0])
_STEEP = 45.0  # degrees of the cone in a reduced-bore valve, above which its losses count as of a sudden change


def bend(ft: ArrayLike, radius_ratio: ArrayLike, angle: ArrayLike = 90.0) -> Array:
    """Pipe bend of centre-line radius r/D 1 to 20 that turns by `angle` degrees; a coil turns by more than 360.

    K = (angle/90 - 1) (pi/4 fT r/D + K90/2) + K90 with K90 = n fT. Source: Crane TP-410 (read); published
    for 90 degrees and more, taken down to 45.
    """
    factor, radius = np.asarray(ft, dtype=np.float64), np.asarray(radius_ratio, dtype=np.float64)
    k90 = along(radius, _RADIUS, _BEND) * factor
    quarters = np.asarray(angle, dtype=np.float64) / 90.0
    return np.asarray((quarters - 1.0) * (0.25 * np.pi * factor * radius + 0.5 * k90) + k90)


def mitre(ft: ArrayLike, angle: ArrayLike) -> Array:
    """Single mitre in a pipe, 0 to 90 degrees. Source: Crane TP-410 (read)."""
    return np.asarray(along(angle, _MITRE_ANGLE, _MITRE) * np.asarray(ft, dtype=np.float64))


def mitre_closed_form(angle: ArrayLike) -> Array:
    """Single mitre in a pipe, whatever its size: 0.42 sin(a/2) + 2.56 sin^3(a/2); 18 to 30 % above Crane's.

    Source: Rennels and Hudson (2012), chapter 15 (read, off a library).
    """
    sine = np.sin(0.5 * np.radians(np.asarray(angle, dtype=np.float64)))
    return np.asarray(0.42 * sine + 2.56 * sine**3)


def tapered_bore(k_full: ArrayLike, bore_ratio: ArrayLike, angle: ArrayLike) -> Array:
    """Gate or ball valve whose bore is narrowed by cones of an included `angle` in degrees, on the pipe's velocity.

    `k_full` is the coefficient at full bore, `bore_ratio` the bore of the seat over that of the pipe. Source: Crane
    TP-410, formulas 5 and 6 (off the `fluids` library). At 45 degrees the published formulas part by a few per cent.
    """
    k1, b, theta = (np.asarray(x, dtype=np.float64) for x in (k_full, bore_ratio, angle))
    lost = 1.0 - b * b
    sine = np.sin(0.5 * np.radians(theta))
    gradual = sine * lost * (0.8 + 2.6 * lost)
    return np.asarray(np.where(theta <= _STEEP, (k1 + gradual) / b**4, abrupt_bore(k1, b, theta)))


def abrupt_bore(k_full: ArrayLike, bore_ratio: ArrayLike, angle: ArrayLike) -> Array:
    """Plug valve with a narrowed port, or a valve with steep cones; arguments as for `tapered_bore`.

    Source: Crane TP-410, formula 6 (off the `fluids` library).
    """
    k1, b, theta = (np.asarray(x, dtype=np.float64) for x in (k_full, bore_ratio, angle))
    lost = 1.0 - b * b
    return np.asarray((k1 + 0.5 * np.sqrt(np.sin(0.5 * np.radians(theta))) * lost + lost * lost) / b**4)
