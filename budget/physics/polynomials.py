"""Polynomials by Horner's rule. NumPy's own module for them takes longer to import than a run takes to compute."""

from collections.abc import Sequence

import numpy as np

from budget.physics.arrays import Array, ArrayLike


def polynomial(x: ArrayLike, coefficients: Sequence[Array | float] | Array) -> Array:
    """Value of a polynomial at `x`; coefficients from the constant upward, each a number or an array like `x`."""
    at = np.asarray(x, dtype=np.float64)
    value = np.asarray(coefficients[-1], dtype=np.float64)
    for coefficient in coefficients[-2::-1]:
        value = np.asarray(value * at + coefficient, dtype=np.float64)
    return value


def polynomial_of_two(x: ArrayLike, y: ArrayLike, coefficients: Array) -> Array:
    """Sum of c[i, j] x^i y^j; a row of the table is a power of x, a column a power of y."""
    return polynomial(x, [polynomial(y, row) for row in coefficients])
