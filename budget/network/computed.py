"""A run laid out and computed: the arrays that every result is read from."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from budget.description.schema import HEADINGS
from budget.network.arrays import Layout
from budget.network.circuits import Circuits, find_circuits
from budget.network.hydraulics import Hydraulics, flow_and_drops
from budget.network.media import pascals
from budget.network.results import ItemResult
from budget.network.takeup import TakeUp, take_up


@dataclass(frozen=True, slots=True, eq=False)
class Computed:
    """The layout of a run, its flows and drops, its circuits, and what its devices take up."""

    layout: Layout
    drops: Hydraulics
    circuits: Circuits
    take_up: TakeUp

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
        sides = [
            float(self.circuits.required[number])
            for number, zone in enumerate(self.layout.zones)
            if zone.source == source and zone.outer < 0
        ]
        known = [side for side in sides if not math.isnan(side)]
        if not known:
            return math.nan
        items = float(self.drops.source_items[source]) if self.layout.topology.kinds[source] == "air" else 0.0
        return math.fsum([*known, items])

    def source_set_point(self, source: int) -> float | None:
        """Return the differential that a source controls, Pa; None where it controls none."""
        described = list(self.layout.description.sources.values())[source]
        if described.controls != "differential" or described.set_point is None:
            return None
        return pascals(described.set_point, self.layout.media[source].supply.density)


def compute(layout: Layout) -> Computed:
    """Compute a run that was laid out: flows, drops, circuits, margins and take-up, on whole arrays."""
    with np.errstate(all="ignore"):  # what can't be computed is NaN on purpose
        drops = flow_and_drops(layout)
        circuits = find_circuits(layout, drops)
        return Computed(layout, drops, circuits, take_up(layout, drops, circuits))
