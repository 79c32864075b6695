"""Air terminals: from the static pressure that makers print to the total pressure that a run must supply."""

import numpy as np

from budget.physics.arrays import Array, ArrayLike


def supply_total(static_drop: ArrayLike, neck_velocity_pressure: ArrayLike) -> Array:
    """Total-pressure drop of a supply terminal, Pa: static pressure in the neck + velocity pressure there.

    Both are given up to the room: the drop holds the exit loss.
    """
    return np.asarray(np.asarray(static_drop, dtype=np.float64) + np.asarray(neck_velocity_pressure, dtype=np.float64))


def extract_total(static_drop: ArrayLike, neck_velocity_pressure: ArrayLike) -> Array:
    """Total-pressure drop of an extract terminal, Pa: |static pressure in the neck| - velocity pressure.

    The static pressure is below the room's and may be given with either sign. A negative result is kept: the
    printed static drop is then less than the velocity pressure of the neck, which cannot be.
    """
    return np.asarray(
        np.abs(np.asarray(static_drop, dtype=np.float64)) - np.asarray(neck_velocity_pressure, dtype=np.float64)
    )
