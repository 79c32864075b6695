"""Leakage of the ducts that state a tightness class, at their mean static pressure."""

from __future__ import annotations

import numpy as np

from budget.network.arrays import Floats, Layout
from budget.network.circuits import Circuits
from budget.network.hydraulics import Hydraulics
from budget.physics.leakage import LEAKAGE_CLASSES, leakage_flow


def leakages(layout: Layout, drops: Hydraulics, circuits: Circuits) -> Floats:
    """Return the greatest leakage of each leg, m3/s; NaN where it states no class.

    The mean total pressure against the room is that between the ends of the leg: what is available where it starts,
    less half its own drop. Static pressure is lower by the velocity pressure; on the suction side, below that of the
    room, lower still.
    """
    legs = layout.legs
    factor = np.full(len(legs), np.nan)
    length = legs.length
    for number, leg in enumerate(layout.topology.legs):
        owner = layout.description.terminals[leg.owner] if leg.run_out else layout.description.sections[leg.owner]
        stated = owner.run.leakage if owner.run else None
        if stated is not None:
            factor[number] = LEAKAGE_CLASSES[stated]
    available = circuits.required[legs.zone] - circuits.leg_outside
    total = available - 0.5 * drops.leg_total
    static = np.where(legs.outward, total - drops.velocity_pressure, -total - drops.velocity_pressure)
    perimeter = 4.0 * legs.area / legs.diameter
    return leakage_flow(factor, static, perimeter * length)


def source_leakage(layout: Layout, found: Floats, source: int) -> float | None:
    """Return the leakage of all ducts of a fan that state a class, m3/s; None where none does."""
    stated = found[(layout.legs.source == source) & ~np.isnan(found)]
    return float(stated.sum()) if len(stated) else None
