"""Solving a network: pressures as unknowns, flows updated edge by edge by the exact slopes (Newton's method).

Source: Todini and Pilati, A gradient algorithm for the analysis of pipe networks (1987; from memory), with blocks for
junctions in place of single slopes.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from budget.network.flows.graph import Network
from budget.network.flows.matrix import NodalMatrix
from budget.physics.arrays import Array, Indices

TOLERANCE = 1e-9
"""Of the network's pressure: what an edge's equation may be off by."""
FLOW_TOLERANCE = 1e-8
"""Of the network's flow: what a last step may still change."""
LEAST = 1e-9
"""Slope of an edge that costs nothing, as a share of the network's pressure over its flow."""
STEPS = 100
PASSES = 60
_PATIENCE = 6  # steps without progress after which steps are shortened


@dataclass(frozen=True, slots=True, eq=False)
class Solution:
    """Flows and pressures of a network, and how well they fit."""

    flow: Array
    pressure: Array
    drop: Array
    """Of every edge by its laws at that flow."""
    residual: Array
    """By how much each edge's equation is off."""
    steps: int
    converged: bool

    @property
    def worst(self) -> int:
        """The edge whose equation is furthest off."""
        return int(np.argmax(np.abs(self.residual)))


def solve(
    network: Network, start: Array | None = None, *, watch: Callable[[int, float], None] | None = None
) -> Solution:
    """Find the flows at which every node balances and every edge drops what its laws say.

    `start` are flows to begin with, which need not balance; none: the typical flows. `watch` is called after every step
    with its number and the largest residual over the tolerance; it may raise to stop. Where no solution is found the
    best flows are returned, and `converged` says so.
    """
    with np.errstate(all="ignore"):
        return _Newton(network, watch).run(network.typical if start is None else start)


def solve_switching(
    network: Network,
    start: Array,
    switch: Callable[[Solution, Network, bool], Network | None],
    passes: int = PASSES,
    watch: Callable[[int, float], None] | None = None,
) -> tuple[Solution, Network, bool]:
    """Solve a network with devices that come into play and leave it; return the solution, and whether they settled.

    `switch` returns the network with its devices doing what they can at a solution, or None where they already do.
    After half the passes it is asked to switch only one, so that two that chase each other come to rest.
    """
    found = solve(network, start, watch=watch)
    for turn in range(passes):
        switched = switch(found, network, turn >= passes // 2)
        if switched is None:
            return found, network, found.converged
        network = switched
        found = solve(network, found.flow if found.converged else start, watch=watch)
    return found, network, False


class _Newton:
    def __init__(self, network: Network, watch: Callable[[int, float], None] | None) -> None:
        self.network, self.watch = network, watch
        self.references, self.known = network.references()
        self.matrix = NodalMatrix(network, self.references)
        edges, controls = self.matrix.edges, network.controls
        typical = np.abs(network.typical)
        self.flow_scale = max(float(typical[edges].max(initial=0.0)), 1e-30)
        at_typical = np.abs(network.drops(typical)[0][edges])
        self.pressure_scale = max(
            float(at_typical[np.isfinite(at_typical)].max(initial=0.0)),
            float(np.ptp(self.known)) if len(self.known) else 0.0,
            float(np.abs(controls.set_point).max(initial=0.0)),
            1e-30,
        )
        self.least = LEAST * self.pressure_scale / self.flow_scale
        self.on: Indices = controls.edge[controls.on]
        self.points = controls.set_point[controls.on]

    def equations(self, flow: Array) -> tuple[Array, Array]:
        """Return what each edge's pressure difference must be, and the slope of that."""
        drop, slope = self.network.drops(flow)
        drop, slope = drop + self.least * flow, np.maximum(slope, 0.0) + self.least
        # A held difference gives way a little as the flow grows, so that it has a slope too.
        drop[self.on], slope[self.on] = self.points - self.least * flow[self.on], -self.least
        return drop, slope

    def inverse(self, flow: Array, slope: Array) -> Array:
        """Return the numbers of W: a junction's two slopes and the two across are inverted as a block."""
        own = 1.0 / slope
        matrix = self.matrix
        first, second = matrix.first, matrix.second
        if not len(first):
            return own[matrix.edges]
        crosses = [law.cross(flow) for law in self.network.junctions]
        one = np.concatenate([a[kept] for (a, _), kept in zip(crosses, matrix.kept, strict=True)])
        two = np.concatenate([b[kept] for (_, b), kept in zip(crosses, matrix.kept, strict=True)])
        whole = slope[first] * slope[second] - one * two
        # Where the block is not surely positive the two are taken by themselves, and the next step corrects it.
        sound = whole > 0.05 * slope[first] * slope[second]
        whole = np.where(sound, whole, 1.0)
        weights = own.copy()
        weights[first] = np.where(sound, slope[second] / whole, own[first])
        weights[second] = np.where(sound, slope[first] / whole, own[second])
        return np.concatenate(
            [weights[matrix.edges], np.where(sound, -one / whole, 0.0), np.where(sound, -two / whole, 0.0)]
        )

    def run(self, start: Array) -> Solution:
        network, matrix = self.network, self.matrix
        flow = np.where(network.open, start, 0.0)
        typical = np.abs(network.typical)
        pressure = np.zeros(network.nodes)
        pressure[self.references] = self.known
        best: tuple[float, Array, Array] = (np.inf, flow, pressure)
        since, converged, count = 0, False, 0
        drop, slope = self.equations(flow)
        for count in range(1, STEPS + 1):
            # What stands still has no slope to start from: a first one is taken at a flow of its size.
            still = np.abs(flow) < 1e-3 * typical if count == 1 else np.zeros(0, dtype=np.bool_)
            if still.any():
                at = np.where(still, typical, flow)
                slope = np.where(still, self.equations(at)[1], slope)
            try:
                step, pressure = self.step(flow, drop, slope, pressure)
            except RuntimeError:
                break
            share = 1.0 if since < _PATIENCE or count == 1 else self.shorter(flow, step, pressure)
            flow = flow + share * step
            drop, slope = self.equations(flow)
            off = self.off(flow, drop, slope, pressure)
            moved = float(np.abs(step).max(initial=0.0)) / self.flow_scale
            if self.watch is not None:
                self.watch(count, off)
            if off < 0.7 * best[0]:
                since = 0
            else:
                since += 1
            if off < best[0]:
                best = (off, flow, pressure)
            if off <= 1.0 and moved <= FLOW_TOLERANCE and share == 1.0:
                converged, best = True, (off, flow, pressure)
                break
            if not np.isfinite(off):
                break
        _, flow, pressure = best
        residual = np.where(network.open, self.equations(flow)[0] - matrix.differences(pressure), 0.0)
        return Solution(flow, pressure, network.drops(flow)[0], residual, count, converged)

    def off(self, flow: Array, drop: Array, slope: Array, pressure: Array) -> float:
        """Return the largest residual, in tolerances; a steep edge can't be met better than its flow is spelled."""
        edges = self.matrix.edges
        residual = np.abs(drop - self.matrix.differences(pressure))[edges]
        allowed = TOLERANCE * self.pressure_scale + 8.0 * np.finfo(float).eps * np.abs(slope * flow)[edges]
        return float((residual / allowed).max(initial=0.0))

    def step(self, flow: Array, drop: Array, slope: Array, pressure: Array) -> tuple[Array, Array]:
        """Return the change of every flow, and the pressures that go with it. Raises RuntimeError for none."""
        matrix, network = self.matrix, self.network
        weights = self.inverse(flow, slope)
        solve = matrix.factorise(weights)
        pressure = pressure.copy()
        step = matrix.changes(weights, matrix.differences(pressure) - drop)
        for _ in range(2):  # the second time takes away what rounding left
            lacking = network.imbalance(flow + step)[matrix.free]
            more = np.zeros(network.nodes)
            more[matrix.free] = solve(lacking)
            pressure += more
            step = step + matrix.changes(weights, matrix.differences(more))
        if not np.isfinite(step).all():
            raise RuntimeError("the equations had no solution")
        return step, pressure

    def shorter(self, flow: Array, step: Array, pressure: Array) -> float:
        """Return the part of a step at which the energy that the network turns over is least, by halving intervals."""
        wanted = self.matrix.differences(pressure)

        def slope_along(share: float) -> float:
            return float(step @ (self.equations(flow + share * step)[0] - wanted))

        if len(self.on):
            return 0.5
        low, high = 0.0, 1.0
        if slope_along(1.0) <= 0.0:
            return 1.0
        for _ in range(12):
            middle = 0.5 * (low + high)
            low, high = (middle, high) if slope_along(middle) < 0.0 else (low, middle)
        return max(0.5 * (low + high), 1e-3)
