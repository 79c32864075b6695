"""Pressure drop and exact slope of edges, on whole arrays. Every law is odd: what flows back loses the same."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from budget.physics.arrays import Array, Flags, Indices
from budget.physics.elbows import reynolds_factor
from budget.physics.friction_slope import factor_by_reynolds
from budget.physics.junctions import junction_coefficients

STEEP = 1e-6
"""Share of its flow by which a flow-holding device lets more through when its drop grows by the network's pressure."""
_LEAST_RATIO = 1e-3  # below it a drop that hardly depends on the flow is led to nothing in a straight line
_STEP = 1e-6  # of Reynolds number or flow ratio, to take a slope where a law is a table or has many branches


@dataclass(frozen=True, slots=True, eq=False)
class Constant:
    """Drops that do not depend on the flow: heights, outlet pressures, a held differential (negative)."""

    drop: Array

    def add(self, flow: Array, drop: Array, slope: Array) -> None:  # noqa: ARG002
        """Add the drop of every edge."""
        drop += self.drop


@dataclass(frozen=True, slots=True, eq=False)
class Quadratic:
    """Drops that grow with the square of the flow: coefficient x flow |flow|, a coefficient for every edge."""

    coefficient: Array

    def add(self, flow: Array, drop: Array, slope: Array) -> None:
        """Add drop and slope of every edge."""
        size = self.coefficient * np.abs(flow)
        drop += size * flow
        slope += 2.0 * size


@dataclass(frozen=True, slots=True, eq=False)
class Power:
    """Drops by an exponent of their own: value (flow/at)^exponent, on the edges named.

    Below an exponent of 1 the slope at standstill is infinite; under a thousandth of `at` the drop goes straight to 0.
    """

    edge: Indices
    value: Array
    at: Array
    exponent: Array

    def add(self, flow: Array, drop: Array, slope: Array) -> None:
        """Add drop and slope of the edges named."""
        ratio = flow[self.edge] / self.at
        size = np.abs(ratio)
        low = (self.exponent < 1.0) & (size < _LEAST_RATIO)
        held = np.where(low, _LEAST_RATIO, np.maximum(size, 1e-300))
        level = self.value * held**self.exponent
        along = np.where(low, level / _LEAST_RATIO, self.exponent * level / held)
        np.add.at(drop, self.edge, np.where(low, level / _LEAST_RATIO * ratio, level * np.sign(ratio)))
        np.add.at(slope, self.edge, along / self.at)


@dataclass(frozen=True, slots=True, eq=False)
class Friction:
    """Friction along legs, and fittings whose coefficient depends on the Reynolds number. Flow in kg/s.

    `share` is the part of a leg's flow that the edge carries, 1 where it is the leg itself.
    """

    edge: Indices
    share: Array
    density: Array
    viscosity: Array
    area: Array
    diameter: Array
    roughness: Array
    laminar: Array
    length: Array
    per_reynolds: Array
    corrected: Array

    def add(self, flow: Array, drop: Array, slope: Array) -> None:
        """Add drop and slope of the legs."""
        mass = flow[self.edge] / self.share
        per_flow = self.diameter / (self.area * self.viscosity)
        re = per_flow * np.abs(mass)
        # Velocity pressure is c m|m|, and Re = r |m|: a coefficient K costs (K Re)(c/r) m.
        scale = 0.5 / (self.density * self.area**2 * per_flow)
        product, bend = factor_by_reynolds(re, self.roughness / self.diameter, self.laminar)
        along = self.length / self.diameter
        product, bend = along * product + self.per_reynolds, along * bend
        if self.corrected.any():
            factor = reynolds_factor(re)
            change = (reynolds_factor(re * (1 + _STEP)) - reynolds_factor(re * (1 - _STEP))) / (2 * _STEP)
            product = product + self.corrected * factor * re
            bend = bend + self.corrected * re * (factor + change)
        np.add.at(drop, self.edge, scale * product * mass)
        np.add.at(slope, self.edge, scale * (product + bend) / self.share)


OPEN, HOLDING, BEYOND = range(3)
"""What a flow-holding device does: fully open below its least drop, holding, or left as it is above its greatest."""


@dataclass(frozen=True, slots=True, eq=False)
class HeldFlow:
    """Flow-holding devices: what they add to their drop fully open, by what each of them does.

    `least` is the coefficient of the open device (in another law), `greatest` the drop up to which it holds. While it
    holds, its drop climbs by `steep` (Pa per kg/s) with what passes beyond the flow that it holds.
    """

    edge: Indices
    held: Array
    least: Array
    greatest: Array
    steep: Array
    doing: Indices

    def add(self, flow: Array, drop: Array, slope: Array) -> None:
        """Add what holding costs."""
        m = flow[self.edge]
        more = np.maximum(self.greatest / self.held**2 - self.least, 0.0)
        more = np.where(self.doing == BEYOND, more, 0.0)
        holding = self.doing == HOLDING
        np.add.at(drop, self.edge, np.where(holding, self.steep * (m - self.held), more * m * np.abs(m)))
        np.add.at(slope, self.edge, np.where(holding, self.steep, 2.0 * more * np.abs(m)))

    def fitting(self, flow: Array, slack: float) -> Indices:
        """Return what each device would have to do at these flows; `slack` in Pa by which it may be off."""
        m = flow[self.edge]
        drop = self.least * m * np.abs(m) + self.steep * (m - self.held)
        bound = np.maximum(self.greatest, self.least * self.held**2)
        held = np.where(drop > bound + slack, BEYOND, np.where(self.steep * (m - self.held) < -slack, OPEN, HOLDING))
        free = np.where(m > self.held * (1.0 + STEEP), HOLDING, self.doing)
        beyond = np.where(m < self.held * (1.0 - STEEP), HOLDING, BEYOND)
        return np.select([self.doing == HOLDING, self.doing == OPEN], [held, free], beyond).astype(np.int64)


@dataclass(frozen=True, slots=True, eq=False)
class JunctionLaw:
    """Junctions by the flows that really meet: branch and straight leg, their coefficients on the combined flow.

    Where both run the other way, what joined divides and what divided joins. Where they run against each other the
    published formulas end, and the coefficient is that of the nearer end of their range.
    """

    branch: Indices
    straight: Indices
    counts: tuple[Flags, Flags]
    family: Indices
    converging: Flags
    area_ratio: Array
    angle: Array
    scale: Array
    """Velocity pressure of the combined leg over the square of its flow."""

    @property
    def pairs(self) -> tuple[Indices, Indices]:
        """Branch and straight leg of each."""
        return self.branch, self.straight

    def add(self, flow: Array, drop: Array, slope: Array) -> None:
        """Add drop and slope of the legs that meet."""
        for leg, found in zip(self.pairs, self._parts(flow), strict=True):
            drop[leg] += found[0]
            slope[leg] += found[1]

    def cross(self, flow: Array) -> tuple[Array, Array]:
        """Return each leg's slope by the flow of the other."""
        branch, straight = self._parts(flow)
        return branch[2], straight[2]

    def _parts(self, flow: Array) -> tuple[tuple[Array, Array, Array], tuple[Array, Array, Array]]:
        """Return drop, own slope and slope by the other's flow, of the branches and of the straight legs."""
        whole = flow[self.branch] + flow[self.straight]
        ratio = np.divide(flow[self.branch], whole, out=np.zeros_like(whole), where=whole != 0.0)
        inside = (ratio > 0.0) & (ratio < 1.0)
        ratio = np.clip(ratio, 0.0, 1.0)
        joins = self.converging ^ (whole < 0.0)
        values = [
            junction_coefficients(self.family, joins, np.clip(ratio + step, 0.0, 1.0), self.area_ratio, self.angle)
            for step in (0.0, _STEP, -_STEP)
        ]
        width = np.clip(ratio + _STEP, 0.0, 1.0) - np.clip(ratio - _STEP, 0.0, 1.0)
        size = self.scale * np.abs(whole)
        found = []
        for part in (0, 1):
            k, more, less = (np.where(self.counts[part], value[part], 0.0) for value in values)
            bend = np.where(inside, (more - less) / width, 0.0)
            # K(q) c W|W| with q = b/W: dq/db = (1 - q)/W, dq/ds = -q/W.
            by_branch, by_straight = size * (2.0 * k + bend * (1.0 - ratio)), size * (2.0 * k - bend * ratio)
            own, other = (by_branch, by_straight) if part == 0 else (by_straight, by_branch)
            found.append((k * size * whole, own, other))
        return found[0], found[1]
