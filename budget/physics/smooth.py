"""Joining two laws without a step: the cubic blend."""

import numpy as np

from budget.physics.arrays import Array, ArrayLike


def smooth_step(value: ArrayLike, low: float, high: float) -> Array:
    """Weight of the upper law where two laws meet: 0 up to `low`, 1 from `high`, smooth between.

    w = s^2 (3 - 2 s) with s = (value - low)/(high - low), so that the blend (1-w) lower + w upper and its
    slope are continuous. Shape of `value`, no unit.
    """
    s = np.clip((np.asarray(value, dtype=np.float64) - low) / (high - low), 0.0, 1.0)
    return np.asarray(s * s * (3.0 - 2.0 * s))
