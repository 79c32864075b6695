"""Cross-sections of pipes and ducts, and the equal-friction diameters that designers read beside them."""

from dataclasses import dataclass
from typing import Final

import numpy as np

from budget.physics.arrays import Array, ArrayLike
from budget.physics.friction import ROUND
from budget.physics.polynomials import polynomial

FLEXIBLE_DIAMETERS: Final = (0.150, 0.250)
"""Diameters in m within which the compression factor of flexible duct was measured."""
FLEXIBLE_COMPRESSION: Final = (0.0, 0.30)
"""Compressions (share of the stretched length) within which it was measured."""

# f Re of rectangles, Shah and London (1978), in powers of short over long side; from memory, checked against
# the exact series to 0.07 %.
_RECTANGLE = 96.0 * np.array([1.0, -1.3553, 1.9467, -1.7012, 0.9564, -0.2537])
# f Re of flat ovals against major over minor axis (numerical solution); parallel plates have 96.
_OVAL_RATIO = np.array([1.0, 1.5, 2.0, 3.0, 4.0, 6.0, 8.0])
_OVAL_CONSTANT = np.array([ROUND, 65.274, 68.109, 73.621, 77.648, 82.643, 85.535])
_PLATES = 96.0


@dataclass(frozen=True, slots=True)
class Shape:
    """What friction needs of a cross-section; arrays of one shape, m2, m, m and a plain number (f Re)."""

    area: Array
    perimeter: Array
    hydraulic_diameter: Array
    laminar_constant: Array


def circle(diameter: ArrayLike) -> Shape:
    """Round pipe or duct of inside `diameter` in m."""
    d = np.asarray(diameter, dtype=np.float64)
    return Shape(np.asarray(0.25 * np.pi * d * d), np.asarray(np.pi * d), d, np.asarray(np.full_like(d, ROUND)))


def rectangle(width: ArrayLike, height: ArrayLike) -> Shape:
    """Rectangular duct, inside sides in m, either way round. Hydraulic diameter 2ab/(a+b).

    The laminar constant is the Shah-London polynomial (1978).
    """
    a, b = _sides(width, height)
    area, perimeter = a * b, 2.0 * (a + b)
    constant = polynomial(a / b, _RECTANGLE)
    return _shape(area, perimeter, constant)


def flat_oval(width: ArrayLike, height: ArrayLike) -> Shape:
    """Flat-oval duct: two half circles joined by flats; inside overall dimensions in m, either way round.

    A = pi a^2/4 + a (b - a), P = pi a + 2 (b - a), a the minor and b the major axis. The laminar constant is
    interpolated in a numerical table of major/minor axis to 8, beyond it toward 96, that of parallel plates.
    """
    a, b = _sides(width, height)
    area = 0.25 * np.pi * a * a + a * (b - a)
    perimeter = np.pi * a + 2.0 * (b - a)
    ratio = b / a
    constant = np.interp(ratio, _OVAL_RATIO, _OVAL_CONSTANT)
    beyond = _PLATES - (_PLATES - _OVAL_CONSTANT[-1]) * _OVAL_RATIO[-1] / np.maximum(ratio, _OVAL_RATIO[-1])
    constant = np.where(ratio > _OVAL_RATIO[-1], beyond, constant)
    return _shape(area, perimeter, constant)


def huebscher(width: ArrayLike, height: ArrayLike) -> Array:
    """Round duct of equal friction at equal flow for a rectangle, m: 1.30 (ab)^0.625/(a+b)^0.25; information.

    Source: Huebscher (1948), ASHVE Transactions 54.
    """
    a, b = _sides(width, height)
    return np.asarray(1.30 * (a * b) ** 0.625 / (a + b) ** 0.25)


def heyt_diaz(width: ArrayLike, height: ArrayLike) -> Array:
    """Round duct of equal friction at equal flow for a flat oval, m: 1.55 A^0.625/P^0.25; information.

    Source: Heyt and Diaz (1975), ASHRAE Transactions 81.
    """
    shape = flat_oval(width, height)
    return np.asarray(1.55 * shape.area**0.625 / shape.perimeter**0.25)


def flexible_factor(compression: ArrayLike, diameter: ArrayLike) -> Array:
    """Factor on the friction per metre of fully stretched flexible duct when it is fitted compressed.

    `compression` is 1 - fitted length/stretched length (0.10 for 10 %), `diameter` in m; the drop is the
    stretched duct's gradient x this factor x the fitted length. Measured within FLEXIBLE_DIAMETERS and
    FLEXIBLE_COMPRESSION; outside them the formula goes on and the caller says so.

    Source: Abushakra, Walker and Sherman (2004), ASHRAE Transactions 110: 1 + 0.58 r exp(-0.00496 D), r in
    percent and D in mm.
    """
    r, d = np.asarray(compression, dtype=np.float64), np.asarray(diameter, dtype=np.float64)
    return np.asarray(1.0 + 58.0 * r * np.exp(-4.96 * d))


def _shape(area: Array, perimeter: Array, constant: ArrayLike) -> Shape:
    return Shape(
        np.asarray(area),
        np.asarray(perimeter),
        np.asarray(4.0 * area / perimeter),
        np.asarray(constant, dtype=np.float64),
    )


def _sides(width: ArrayLike, height: ArrayLike) -> tuple[Array, Array]:
    w, h = np.asarray(width, dtype=np.float64), np.asarray(height, dtype=np.float64)
    return np.asarray(np.minimum(w, h)), np.asarray(np.maximum(w, h))
