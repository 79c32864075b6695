"""The equations of the nodes: how a change of pressure changes the balance of flows, as one sparse matrix."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from budget.network.flows.graph import Network
from budget.physics.arrays import Array, Indices


class NodalMatrix:
    """N W C': N says which edges meet in a node, C which pressures an edge looks at, W is the inverse of the slopes.

    W holds a number for each edge, and two more for each pair of edges that a junction couples. Where entries stand is
    worked out once; filling them in is one sum.
    """

    def __init__(self, network: Network, references: Indices) -> None:
        """Find where every entry stands."""
        controls = network.controls
        on = controls.edge[controls.on]
        self.high, self.low = network.start.copy(), network.end.copy()
        self.high[on], self.low[on] = controls.high[controls.on], controls.low[controls.on]
        edges = np.flatnonzero(network.open)
        pairs = [law.pairs for law in network.junctions]
        held = np.zeros(len(network.start), dtype=np.bool_)
        held[on] = True
        self.kept = [network.open[a] & network.open[b] & ~held[a] & ~held[b] for a, b in pairs]
        """Which pairs of each junction law are coupled."""
        firsts = [first[kept] for (first, _), kept in zip(pairs, self.kept, strict=True)]
        seconds = [second[kept] for (_, second), kept in zip(pairs, self.kept, strict=True)]
        none = np.zeros(0, dtype=np.int64)
        self.first, self.second = np.concatenate([none, *firsts]), np.concatenate([none, *seconds])
        self.by = np.concatenate([edges, self.first, self.second])
        """Edges whose flow each number of W changes, and whose pressures it looks at."""
        self.of = np.concatenate([edges, self.second, self.first])
        self.edges = edges
        self.symmetric = not len(on) and not len(self.first)
        self.network = network
        place = np.full(network.nodes, -1, dtype=np.int64)
        free = np.ones(network.nodes, dtype=np.bool_)
        free[references] = False
        self.free = np.flatnonzero(free)
        place[self.free] = np.arange(len(self.free))
        start, end = place[network.start[self.by]], place[network.end[self.by]]
        high, low = place[self.high[self.of]], place[self.low[self.of]]
        rows, columns = np.concatenate([start, start, end, end]), np.concatenate([high, low, high, low])
        self._inside = np.flatnonzero((rows >= 0) & (columns >= 0))
        key = columns[self._inside] * len(self.free) + rows[self._inside]
        where, self._slot = np.unique(key, return_inverse=True)
        count = len(self.free)
        self._rows = (where % count if count else where).astype(np.int32)
        self._starts = np.searchsorted(where // count if count else where, np.arange(count + 1)).astype(np.int32)

    def filled(self, weights: Array) -> object:
        """Return the matrix, in compressed columns, for the numbers of W."""
        from scipy.sparse import csc_matrix  # noqa: PLC0415 - SciPy is slow to import, and few commands need it

        values = np.concatenate([weights, -weights, -weights, weights])[self._inside]
        data = np.bincount(self._slot, values, minlength=len(self._rows))
        count = len(self.free)
        return csc_matrix((data, self._rows, self._starts), shape=(count, count))

    def factorise(self, weights: Array) -> Callable[[Array], Array]:
        """Return what solves the equations for a right-hand side. Raises RuntimeError where they have no solution."""
        from scipy.sparse.linalg import splu  # noqa: PLC0415

        if not len(self.free):
            return lambda right: right
        options = {"SymmetricMode": True} if self.symmetric else {}
        threshold = 0.0 if self.symmetric else 0.1
        factors = splu(self.filled(weights), permc_spec="MMD_AT_PLUS_A", diag_pivot_thresh=threshold, options=options)
        solve: Callable[[Array], Array] = factors.solve
        return solve

    def changes(self, weights: Array, wanted: Array) -> Array:
        """Return W x: the flow of every edge that answers what each edge's equation lacks."""
        return np.bincount(self.by, weights * wanted[self.of], minlength=len(wanted)).astype(np.float64)

    def differences(self, pressure: Array) -> Array:
        """Return the pressure difference that each edge's equation looks at."""
        return pressure[self.high] - pressure[self.low]
