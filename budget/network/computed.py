"""A run laid out and computed: the arrays that every result is read from."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from budget.description.schema import HEADINGS
from budget.network.arrays import Floats, Layout
from budget.network.circuits import Circuits, find_circuits
from budget.network.hydraulics import Hydraulics, flow_and_drops
from budget.network.leakage import leakages
from budget.network.media import pascals
from budget.network.results import ItemResult
from budget.network.takeup import TakeUp, take_up


@dataclass(frozen=True, eq=False)
class Computed:
    """The layout of a run, its flows and drops, its circuits, and what its devices take up."""

    layout: Layout
    drops: Hydraulics
    circuits: Circuits
    take_up: TakeUp

    @cached_property
    def leakage(self) -> Floats:
        """The greatest leakage of each leg, m3/s; NaN where it states no tightness class."""
        return leakages(self.layout, self.drops, self.circuits)

    @cached_property
    def outermost(self) -> tuple[int, ...]:
        """By zone the outermost one that it lies within: itself where it lies within none."""
        found: list[int] = []
        for number, zone in enumerate(self.layout.zones):  # the one outside comes before
            found.append(number if zone.outer < 0 else found[zone.outer])
        return tuple(found)

    @cached_property
    def zones_of(self) -> tuple[tuple[int, ...], ...]:
        """By source its outermost zones."""
        found: list[list[int]] = [[] for _ in self.layout.sources]
        for number, zone in enumerate(self.layout.zones):
            if zone.outer < 0:
                found[zone.source].append(number)
        return tuple(map(tuple, found))

    @cached_property
    def tied(self) -> dict[int, list[int]]:
        """By outermost zone the terminals that end an index circuit, where there are any."""
        found: dict[int, list[int]] = {}
        for terminal in np.flatnonzero(self.circuits.index).tolist():
            found.setdefault(self.outermost[int(self.layout.terminals.zone[terminal])], []).append(terminal)
        return found

    def item_results(self, carrier: int) -> tuple[ItemResult, ...]:
        """Return the items that a leg, terminal or source carries, in the order of the file."""
        items = self.layout.items
        return tuple(
            ItemResult(
                items.items[number].name,
                float(self.drops.item_drop[number]),
                HEADINGS[items.heading[number]],
                items.items[number].inside,
                items.items[number].control,
            )
            for number in (items.carrier == carrier).nonzero()[0].tolist()
        )

    def required_of(self, source: int) -> float:
        """Return the required pressure of a source, Pa; NaN where no circuit can be computed."""
        sides = [float(self.circuits.required[zone]) for zone in self.zones_of[source]]
        known = [side for side in sides if not math.isnan(side)]
        if not known:
            return math.nan
        items = float(self.drops.source_items[source]) if self.layout.topology.kinds[source] == "air" else 0.0
        return math.fsum([*known, items])

    def source_set_point(self, source: int) -> float | None:
        """Return the differential that a source controls, Pa; None where it controls none."""
        described = self.layout.sources[source]
        if described.controls != "differential" or described.set_point is None:
            return None
        return pascals(described.set_point, self.layout.media[source].supply.density)


def compute(layout: Layout) -> Computed:
    """Compute a run that was laid out: flows, drops, circuits, margins and take-up, on whole arrays."""
    with np.errstate(all="ignore"):  # what can't be computed is NaN on purpose
        drops = flow_and_drops(layout)
        circuits = find_circuits(layout, drops)
        return Computed(layout, drops, circuits, take_up(layout, drops, circuits))
