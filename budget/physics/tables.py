"""Reading between the rows of a printed table: linear, and held at the ends."""

import numpy as np

from budget.physics.arrays import Array, ArrayLike, Indices


def along(x: ArrayLike, xs: ArrayLike, ys: ArrayLike) -> Array:
    """Value of a row at `x`, linear between its entries and held beyond them; `xs` rise."""
    nodes, figures = np.asarray(xs, dtype=np.float64), np.asarray(ys, dtype=np.float64)
    return np.asarray(np.interp(np.asarray(x, dtype=np.float64), nodes, figures))


def along_log(x: ArrayLike, xs: ArrayLike, ys: ArrayLike) -> Array:
    """As `along`, but linear in the logarithm of the value: for rows that run over decades; `ys` positive."""
    return np.asarray(np.exp(along(x, xs, np.log(np.asarray(ys, dtype=np.float64)))))


def across(x: ArrayLike, y: ArrayLike, xs: ArrayLike, ys: ArrayLike, table: ArrayLike) -> Array:
    """Value of a table at (x, y), linear in both and held beyond its edges.

    `xs` are the rows and `ys` the columns, both rising; `table` has their shape. x and y broadcast.
    """
    figures = np.asarray(table, dtype=np.float64)
    i, s = _place(x, xs)
    j, t = _place(y, ys)
    low = figures[i, j] + t * (figures[i, j + 1] - figures[i, j])
    high = figures[i + 1, j] + t * (figures[i + 1, j + 1] - figures[i + 1, j])
    return np.asarray(low + s * (high - low))


def across_log(x: ArrayLike, y: ArrayLike, xs: ArrayLike, ys: ArrayLike, table: ArrayLike) -> Array:
    """As `across`, but linear in the logarithm of the value; the table is positive."""
    return np.asarray(np.exp(across(x, y, xs, ys, np.log(np.asarray(table, dtype=np.float64)))))


def _place(x: ArrayLike, xs: ArrayLike) -> tuple[Indices, Array]:
    """The interval of `xs` that holds x and the share of it, 0 to 1."""
    nodes = np.asarray(xs, dtype=np.float64)
    held = np.clip(np.asarray(x, dtype=np.float64), nodes[0], nodes[-1])
    i = np.clip(np.searchsorted(nodes, held, side="right") - 1, 0, len(nodes) - 2)
    return np.asarray(i, dtype=np.int64), np.asarray((held - nodes[i]) / (nodes[i + 1] - nodes[i]))
