"""Dampers and part-open valves: loss coefficients on the velocity in the duct or pipe, by the angle from fully open.

The figures run over four decades, so they are interpolated on their logarithm. Angles are in degrees, 0 fully open;
beyond a table the figure at its end is held, and whoever calls says so.
"""

from typing import Final

import numpy as np

from budget.physics.arrays import Array, ArrayLike
from budget.physics.tables import across_log, along_log

BLADE_ANGLES: Final = (0.0, 80.0)
"""Angles that the tables of multi-blade dampers hold."""
BLADE_RATIOS: Final = (0.3, 1.5)
"""Ratios of blade length to perimeter that they hold."""

# ASHRAE CD9-1 at blade diameter = duct diameter, from memory.
_ROUND_ANGLE = np.array([0.0, 10.0, 20.0, 30.0, 40.0, 50.0, 60.0])
_ROUND = np.array([0.19, 0.67, 1.76, 4.38, 11.2, 32.0, 113.0])

# SMACNA table A-14, single thin blade in a rectangular duct, by its aspect, from memory.
_SINGLE_ANGLE = np.array([0.0, 10.0, 20.0, 30.0, 40.0, 50.0, 60.0, 70.0])
_SINGLE = (
    (0.25, np.array([0.04, 0.30, 1.1, 3.0, 8.0, 23.0, 60.0, 190.0])),
    (1.00, np.array([0.08, 0.33, 1.2, 3.3, 9.0, 26.0, 70.0, 210.0])),
    (np.inf, np.array([0.13, 0.35, 1.3, 3.6, 10.0, 29.0, 80.0, 230.0])),
)

# ASHRAE CR9-4 (opposed) and CR9-3 (parallel), from memory: L/R (rows), angle (columns).
_ANGLE = np.array([0.0, 10.0, 20.0, 30.0, 40.0, 50.0, 60.0, 70.0, 80.0])
_RATIO = np.array([0.3, 0.4, 0.5, 0.6, 0.8, 1.0, 1.5])
_OPPOSED = np.array(
    [
        [0.52, 0.85, 2.1, 4.1, 9.0, 21.0, 73.0, 284.0, 807.0],
        [0.52, 0.92, 2.2, 5.0, 11.0, 28.0, 100.0, 332.0, 915.0],
        [0.52, 1.00, 2.3, 5.4, 13.0, 33.0, 122.0, 377.0, 1045.0],
        [0.52, 1.00, 2.3, 6.0, 14.0, 38.0, 148.0, 411.0, 1121.0],
        [0.52, 1.10, 2.4, 6.6, 18.0, 54.0, 188.0, 495.0, 1299.0],
        [0.52, 1.20, 2.7, 7.3, 21.0, 65.0, 245.0, 547.0, 1521.0],
        [0.52, 1.40, 3.2, 9.0, 28.0, 107.0, 361.0, 677.0, 1654.0],
    ]
)
_PARALLEL = np.array(
    [
        [0.52, 0.79, 1.4, 2.3, 5.2, 9.0, 14.0, 32.0, 116.0],
        [0.52, 0.85, 1.5, 2.4, 6.0, 9.0, 16.0, 38.0, 152.0],
        [0.52, 0.92, 1.5, 2.4, 6.0, 9.0, 18.0, 45.0, 188.0],
        [0.52, 0.92, 1.5, 2.4, 5.4, 9.0, 21.0, 45.0, 245.0],
        [0.52, 0.92, 1.5, 2.5, 5.4, 9.0, 22.0, 55.0, 284.0],
        [0.52, 1.00, 1.6, 2.6, 5.4, 10.0, 24.0, 65.0, 361.0],
        [0.52, 1.00, 1.6, 2.7, 5.4, 10.0, 28.0, 102.0, 576.0],
    ]
)

# Weisbach's valves in a round pipe, from memory. Open share of the bore for the gate, angle for cock and butterfly.
_GATE_OPEN = np.array([0.125, 0.25, 0.375, 0.5, 0.625, 0.75, 0.875])
_GATE = np.array([97.8, 17.0, 5.52, 2.06, 0.81, 0.26, 0.07])
_COCK_ANGLE = np.array([5.0, 10.0, 15.0, 20.0, 25.0, 30.0, 35.0, 40.0, 45.0, 50.0, 55.0, 60.0, 65.0])
_COCK = np.array([0.05, 0.29, 0.75, 1.56, 3.10, 5.47, 9.68, 17.3, 31.2, 52.6, 106.0, 206.0, 486.0])
_VALVE_ANGLE = np.array([5.0, 10.0, 20.0, 30.0, 40.0, 50.0, 60.0, 70.0])
_VALVE = np.array([0.24, 0.52, 1.54, 3.91, 10.8, 32.6, 118.0, 751.0])


def round_blade(angle: ArrayLike) -> Array:
    """Single flat blade of the duct's diameter in a round duct, 0 to 60 degrees. Source: ASHRAE CD9-1 (from memory)."""
    return along_log(angle, _ROUND_ANGLE, _ROUND)


def round_blade_closed_form(angle: ArrayLike) -> Array:
    """The same blade by (1.56/(1 - sin(angle)) - 1)^2; beside the table, high near fully open.

    Source: Idelchik, diagram 9-16 (from memory); 0 to 70 degrees.
    """
    sine = np.sin(np.radians(np.asarray(angle, dtype=np.float64)))
    return np.asarray((1.56 / (1.0 - sine) - 1.0) ** 2)


def rectangular_blade(angle: ArrayLike, aspect: ArrayLike) -> Array:
    """Single thin blade in a rectangular duct, 0 to 70 degrees.

    `aspect` is the side across the blade's axis over the side along it, in three classes: below 0.25, 0.25 to 1, above.
    Source: SMACNA HVAC Systems Duct Design, table A-14 (from memory).
    """
    h = np.asarray(aspect, dtype=np.float64)
    classes = [along_log(angle, _SINGLE_ANGLE, row) for _, row in _SINGLE]
    return np.asarray(np.select([h < _SINGLE[0][0], h <= _SINGLE[1][0]], classes[:2], classes[2]))


def blade_ratio(blades: ArrayLike, width: ArrayLike, height: ArrayLike) -> Array:
    """Total length of a multi-blade damper's blades over the duct's perimeter: L/R = N W / (2 (H + W)).

    The N blades lie across the `width`; sides in one unit.
    """
    n, w, h = (np.asarray(x, dtype=np.float64) for x in (blades, width, height))
    return np.asarray(n * w / (2.0 * (h + w)))


def opposed_blades(angle: ArrayLike, ratio: ArrayLike) -> Array:
    """Opposed-blade damper in a duct, 0 to 80 degrees, `ratio` L/R 0.3 to 1.5, see `blade_ratio`.

    Source: ASHRAE CR9-4 (from memory).
    """
    return across_log(ratio, angle, _RATIO, _ANGLE, _OPPOSED)


def parallel_blades(angle: ArrayLike, ratio: ArrayLike) -> Array:
    """Parallel-blade damper in a duct, 0 to 80 degrees, `ratio` L/R 0.3 to 1.5, see `blade_ratio`.

    Source: ASHRAE CR9-3 (from memory).
    """
    return across_log(ratio, angle, _RATIO, _ANGLE, _PARALLEL)


def gate(opening: ArrayLike) -> Array:
    """Gate valve or slide in a round pipe, open by 1/8 to 7/8 of the bore's height. Source: Weisbach (from memory)."""
    return along_log(opening, _GATE_OPEN, _GATE)


def cock(angle: ArrayLike) -> Array:
    """Plug cock of full bore in a round pipe, 5 to 65 degrees. Source: Weisbach (from memory)."""
    return along_log(angle, _COCK_ANGLE, _COCK)


def butterfly(angle: ArrayLike) -> Array:
    """Butterfly valve in a round pipe, 5 to 70 degrees. Source: Weisbach (from memory)."""
    return along_log(angle, _VALVE_ANGLE, _VALVE)
