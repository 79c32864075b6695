"""Leakage of ductwork by its tightness class."""

from types import MappingProxyType
from typing import Final

import numpy as np

from budget.physics.arrays import Array, ArrayLike

LEAKAGE_CLASSES: Final = MappingProxyType(
    {"ATC 1": 0.00033, "ATC 2": 0.001, "ATC 3": 0.003, "ATC 4": 0.009, "ATC 5": 0.027, "ATC 6": 0.0675}
)
"""Leakage factor by class, L/(s m2) at 1 Pa. Source: EN 16798-3:2017; the former classes D, C, B, A are ATC 2 to 5."""


def leakage_flow(factor: ArrayLike, static_pressure: ArrayLike, surface: ArrayLike) -> Array:
    """Greatest leakage of a duct of its class, m3/s: factor p^0.65 x surface.

    `factor` in L/(s m2) as in LEAKAGE_CLASSES, `static_pressure` inside against outside in Pa of either sign, `surface`
    in m2.
    Source: EN 12237:2003 and EN 1507:2006, by the classes of EN 16798-3:2017.
    """
    p = np.abs(np.asarray(static_pressure, dtype=np.float64))
    return np.asarray(1e-3 * np.asarray(factor, dtype=np.float64) * p**0.65 * np.asarray(surface, dtype=np.float64))
