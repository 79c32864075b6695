"""Circuits, the required pressure of each zone, margins, differentials and the index circuit."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from budget.network.arrays import Bools, Floats, Ints, Layout
from budget.network.hydraulics import Hydraulics, least_served

TIE = 1e-9
"""Circuits that come within this fraction of the largest are equally large."""


@dataclass(frozen=True, slots=True, eq=False)
class Circuits:
    """What every path needs; Pa, one element a leg, terminal or zone."""

    circuit: Floats
    """Of each terminal, from the source and back: the plain sum."""
    in_zone: Floats
    """Of each terminal within its zone, from the holding device on."""
    largest: Floats
    """Largest circuit of each zone."""
    required: Floats
    """Of each zone: its largest circuit, or the set point where a device holds one."""
    held: Floats
    """Circuit of each held zone within the zone outside it, where it counts as one terminal."""
    along: Floats
    """Sum from the zone's start to the downstream end of each leg, the leg included."""
    margin: Floats
    zone_margin: Floats
    """Margin of a held zone, as one terminal of the zone outside it."""
    leg_margin: Floats
    differential: Floats
    leg_outside: Floats
    """Sum along the path outside each leg, within its zone."""
    index: Bools
    leg_index: Bools


def find_circuits(layout: Layout, drops: Hydraulics) -> Circuits:
    """Add up every circuit, and take required pressures, margins and differentials from them."""
    legs, terminals, zones = layout.legs, layout.terminals, layout.zones
    inner = inner_parent(layout)
    along = path_sums(drops.leg_total, inner)
    own = at_leg(along, terminals.out, terminals.zone, legs.zone)
    own += at_leg(along, terminals.back, terminals.zone, legs.zone)
    start = np.array([drops.source_items[z.source] if _takes_items(layout, n) else 0.0 for n, z in enumerate(zones)])
    in_zone = start[terminals.zone] + own + drops.terminal_total
    largest = np.full(len(zones), np.nan)
    np.fmax.at(largest, terminals.zone, in_zone)
    held = np.full(len(zones), np.nan)
    required = largest.copy()
    offset = start.copy()
    for number in range(len(zones) - 1, -1, -1):
        zone = zones[number]
        if zone.outer < 0:
            required[number] = largest[number]
            continue
        required[number] = largest[number] if math.isnan(zone.set_point) else zone.set_point
        around = along[zone.leg] + along[zone.back]
        held[number] = start[zone.outer] + around + required[number]
        largest[zone.outer] = np.fmax(largest[zone.outer], held[number])
    for number, zone in enumerate(zones):
        if zone.outer >= 0:
            offset[number] = offset[zone.outer] + along[zone.leg] + along[zone.back]
    circuit = offset[terminals.zone] + own + drops.terminal_total
    margin = required[terminals.zone] - in_zone
    outer = np.array([zone.outer for zone in zones], dtype=np.int64)
    zone_margin = np.where(outer >= 0, required[outer] - held, np.nan)
    outside = _outside(along, inner)
    index, leg_index = _index(layout, in_zone, largest, held)
    return Circuits(
        circuit=circuit,
        in_zone=in_zone,
        largest=largest,
        required=required,
        held=held,
        along=along,
        margin=margin,
        zone_margin=zone_margin,
        leg_margin=_leg_margins(layout, margin, zone_margin),
        differential=_differentials(layout, required, start, along, outside),
        leg_outside=outside,
        index=index,
        leg_index=leg_index,
    )


def path_sums(values: Floats, parent: Ints) -> Floats:
    """Return for each leg the sum of a value over it and all legs between it and its root.

    Every pass doubles the stretch that is summed, so a chain of n legs takes log2(n) passes.
    """
    total, above = values.copy(), parent.copy()
    while (inner := np.flatnonzero(above >= 0)).size:
        upper = above[inner]
        total[inner] = total[inner] + total[upper]
        above[inner] = above[upper]
    return total


def inner_parent(layout: Layout) -> Ints:
    """Return each leg's parent within its zone, -1 at the zone's start."""
    legs = layout.legs
    if len(layout.zones) == len(layout.media):
        return legs.parent
    parent = legs.parent
    same = (parent >= 0) & (legs.zone[parent] == legs.zone)
    return np.asarray(np.where(same, parent, -1), dtype=np.int64)


def at_leg(values: Floats, legs: Ints, zone: Ints, leg_zone: Ints) -> Floats:
    """Return a leg's value for each terminal, 0 where it has no leg or the leg is outside its zone."""
    if not len(values):
        return np.zeros(len(legs))
    inside = (legs >= 0) & (leg_zone[legs] == zone)
    return np.asarray(np.where(inside, values[legs], 0.0), dtype=np.float64)


def _takes_items(layout: Layout, zone: int) -> bool:
    """Whether a zone's circuits hold the source's items: those of a liquid source do."""
    return layout.zones[zone].outer < 0 and layout.topology.kinds[layout.zones[zone].source] != "air"


def _outside(along: Floats, parent: Ints) -> Floats:
    if not len(along):
        return along
    return np.asarray(np.where(parent >= 0, along[parent], 0.0), dtype=np.float64)


def _leg_margins(layout: Layout, margin: Floats, zone_margin: Floats) -> Floats:
    """Return the least margin that each leg serves; a held zone counts as one terminal outside."""
    if not any(zone.outer >= 0 for zone in layout.zones):
        return least_served(margin, layout.order, layout.start, layout.end)
    found = np.full(len(layout.legs), np.inf)
    for number in sorted(set(layout.legs.zone.tolist())):
        these = layout.legs.zone == number
        seen = margins_within(layout, number, margin, zone_margin)
        found[these] = least_served(seen, layout.order, layout.start[these], layout.end[these])
    return found


def margins_within(layout: Layout, zone: int, margin: Floats, zone_margin: Floats) -> Floats:
    """Return each terminal's margin as seen in a zone: that of the held zone it is in, infinite outside."""
    towards = layout.zone_tree.child_towards(zone, layout.terminals.zone)
    inner = np.where(towards >= 0, zone_margin[towards], np.inf)
    return np.where(layout.terminals.zone == zone, margin, inner)


def _differentials(layout: Layout, required: Floats, start: Floats, along: Floats, outside: Floats) -> Floats:
    """Return what is available where each terminal (or its run-out) is connected."""
    legs, terminals = layout.legs, layout.terminals
    found = required[terminals.zone] - start[terminals.zone]
    for ends in (terminals.out, terminals.back):
        if not len(along):
            break
        on_run_out = (ends >= 0) & legs.run_out[ends]
        found -= np.where(
            on_run_out,
            outside[ends],
            at_leg(along, ends, terminals.zone, legs.zone),
        )
    return np.asarray(found, dtype=np.float64)


def _index(layout: Layout, in_zone: Floats, largest: Floats, held: Floats) -> tuple[Bools, Bools]:
    """Mark the terminals and legs of the index circuit of every source (and side); ties are all marked."""
    zones = layout.zones
    marked = np.zeros(len(zones), dtype=np.bool_)
    for number, zone in enumerate(zones):
        if zone.outer < 0:
            marked[number] = True
        elif marked[zone.outer]:
            marked[number] = held[number] >= largest[zone.outer] - TIE * abs(largest[zone.outer])
    terminals = layout.terminals
    with np.errstate(invalid="ignore"):
        tied = in_zone >= largest[terminals.zone] - TIE * np.abs(largest[terminals.zone])
    index = marked[terminals.zone] & tied
    leg_index = np.zeros(len(layout.legs), dtype=np.bool_)
    for terminal in np.flatnonzero(index).tolist():
        for end in (int(terminals.out[terminal]), int(terminals.back[terminal])):
            while end >= 0 and not leg_index[end]:
                leg_index[end] = True
                end = int(layout.legs.parent[end])
    return index, leg_index
