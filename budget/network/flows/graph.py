"""A network as a graph: nodes with a pressure, edges with a flow, and what each edge's equation looks at."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Protocol

import numpy as np

from budget.network.flows.laws import HeldFlow
from budget.physics.arrays import Array, Flags, Indices


class Law(Protocol):
    """A part of the pressure drop of some edges."""

    def add(self, flow: Array, drop: Array, slope: Array) -> None:
        """Add its drop, Pa, and slope, Pa per unit of flow, to those of its edges; flow of all edges, signed."""


class PairLaw(Law, Protocol):
    """A law by which the drops of two edges rest on the flow of both: a junction."""

    @property
    def pairs(self) -> tuple[Indices, Indices]:
        """Edges that it couples, the first and the second of each pair; no edge is in two pairs."""

    def cross(self, flow: Array) -> tuple[Array, Array]:
        """Return the slope of the first's drop by the second's flow, and the other way round."""


@dataclass(frozen=True, slots=True, eq=False)
class Controls:
    """Edges that hold a pressure difference elsewhere: a differential-holding valve, a pump with a remote sensor.

    While one is on, its own drop is whatever it takes for pressure[high] - pressure[low] to be the set point.
    """

    edge: Indices
    high: Indices
    low: Indices
    set_point: Array
    on: Flags

    @classmethod
    def none(cls) -> Controls:
        """Return no controls."""
        nothing = np.zeros(0, dtype=np.int64)
        return cls(nothing, nothing, nothing, np.zeros(0), np.zeros(0, dtype=np.bool_))


@dataclass(frozen=True, slots=True, eq=False)
class Network:
    """Nodes and edges, the laws of the edges, and what is known from outside.

    Flow is positive from `start` to `end` of an edge, and pressure[start] - pressure[end] is its drop. `inflow` enters
    each node from outside; `known` nodes hold their `pressure`. Any unit of flow does, if the laws use the same.
    """

    nodes: int
    start: Indices
    end: Indices
    laws: Sequence[Law]
    typical: Array
    """A flow of each edge's size, from which scales and first slopes are taken; not 0."""
    junctions: Sequence[PairLaw] = ()
    inflow: Array | None = None
    known: Indices = field(default_factory=lambda: np.zeros(0, dtype=np.int64))
    pressure: Array = field(default_factory=lambda: np.zeros(0))
    shut: Flags | None = None
    """Edges that let nothing through."""
    controls: Controls = field(default_factory=Controls.none)
    held: HeldFlow | None = None
    """Devices that hold a flow."""

    @property
    def open(self) -> Flags:
        """Edges that flow can pass."""
        return np.ones(len(self.start), dtype=np.bool_) if self.shut is None else ~self.shut

    def drops(self, flow: Array) -> tuple[Array, Array]:
        """Return the drop and the slope of every edge by all laws."""
        drop, slope = np.zeros(len(self.start)), np.zeros(len(self.start))
        for law in (*self.laws, *self.junctions, *([] if self.held is None else [self.held])):
            law.add(flow, drop, slope)
        return drop, slope

    def imbalance(self, flow: Array) -> Array:
        """Return what enters each node from outside and along its edges less what leaves it."""
        entering = np.zeros(self.nodes) if self.inflow is None else self.inflow
        return np.asarray(
            entering
            + np.bincount(self.end, flow, minlength=self.nodes)
            - np.bincount(self.start, flow, minlength=self.nodes)
        )

    def references(self) -> tuple[Indices, Array]:
        """Return the nodes whose pressure is known, with one at 0 for each part of the network that has none."""
        from scipy.sparse import coo_matrix  # noqa: PLC0415 - SciPy is slow to import, and few commands need it
        from scipy.sparse.csgraph import connected_components  # noqa: PLC0415

        these = self.open
        shape = (self.nodes, self.nodes)
        joined = coo_matrix((np.ones(int(these.sum())), (self.start[these], self.end[these])), shape=shape)
        count, part = connected_components(joined, directed=False)
        lacking = np.ones(count, dtype=np.bool_)
        lacking[part[self.known]] = False
        _, first = np.unique(part, return_index=True)
        more = first[lacking]
        return np.concatenate([self.known, more]).astype(np.int64), np.concatenate([self.pressure, np.zeros(len(more))])
