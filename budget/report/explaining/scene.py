"""What the calculations of one run are read from: its description, its results, and the arrays behind them."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from budget.description import Description
from budget.network import Budget
from budget.network.arrays import Layout
from budget.network.computed import Computed
from budget.network.hydraulics import Hydraulics
from budget.report.explaining.writing import Writer
from budget.report.plain import plain


@dataclass(frozen=True, slots=True)
class Scene:
    """A run with how its numbers are written."""

    description: Description
    budget: Budget
    write: Writer

    @property
    def run(self) -> Computed:
        """The arrays behind the results."""
        return self.budget.run

    @property
    def layout(self) -> Layout:
        """The run as it was laid out."""
        return self.budget.run.layout

    @property
    def drops(self) -> Hydraulics:
        """What flows and what it costs."""
        return self.budget.run.drops

    def name(self, leg: int) -> str:
        """Name a leg: `M1, supply`, `run-out of R1, return`."""
        found = self.layout.topology.legs[leg]
        owner = plain(found.owner)
        return f"{f'run-out of {owner}' if found.run_out else owner}, {found.side}"

    def hanging(self, leg: int) -> Iterator[tuple[str, float]]:
        """Return what hangs on a leg and carries flow, by ID, with its mass flow, kg/s; of a source: -1 - number."""
        layout, drops = self.layout, self.drops
        terminals = layout.terminals
        for number, found in enumerate(layout.topology.legs):
            joins = found.parent == leg if leg >= 0 else self._at_source(number, -1 - leg)
            if joins and (layout.end[number] > layout.start[number] or layout.links.ringed[number]):
                yield found.owner, float(drops.leg_mass[number])
        for number, id_ in enumerate(terminals.ids):
            if leg >= 0:
                joins = leg in (int(terminals.out[number]), int(terminals.back[number]))
            else:
                outward = self._outward(-1 - leg)
                end = int((terminals.out if outward else terminals.back)[number])
                own = int(terminals.source[number]) == -1 - leg and bool(terminals.discharge[number]) == outward
                joins = end < 0 and own
            if joins:
                yield id_, float(drops.terminal_mass[number])

    def _at_source(self, leg: int, source: int) -> bool:
        found = self.layout.topology.legs[leg]
        return found.parent < 0 and found.source == source and found.outward == self._outward(source)

    def _outward(self, source: int) -> bool:
        """Whether a source's flow is that of its discharge side; where nothing stands there it is the other side's."""
        terminals = self.layout.terminals
        return bool(np.any(terminals.discharge & (terminals.source == source)))

    def leg_sum(self, leg: int) -> float:
        """Return friction, fittings, junction and change of area of a leg, Pa."""
        drops = self.drops
        return float(drops.friction[leg] + drops.fittings[leg] + drops.junction[leg] + drops.transition[leg])

    def items_of(self, carrier: int) -> list[int]:
        """Return the numbers of the items that a leg, terminal or source carries."""
        return [int(number) for number in np.flatnonzero(self.layout.items.carrier == carrier)]

    def zone_items(self, zone: int) -> float:
        """Return the source's items where they are part of a zone's circuits, Pa: those of a liquid source."""
        found = self.layout.zones[zone]
        own = found.outer < 0 and self.layout.topology.kinds[found.source] != "air"
        return float(self.drops.source_items[found.source]) if own else 0.0

    def zone_name(self, zone: int) -> str:
        """Name what gives a zone its pressure: a source, one side of a fan, or a device that holds a differential."""
        found, layout = self.layout.zones[zone], self.layout
        if found.outer >= 0:
            return f"set point of {plain(layout.devices[found.device].device.name)}"
        source = plain(list(self.description.sources)[found.source])
        if layout.topology.kinds[found.source] != "air":
            return f"required of {source}"
        first = next(number for number, one in enumerate(layout.zones) if one.source == found.source)
        return f"required of {source}, {'discharge' if zone == first else 'suction'}"
