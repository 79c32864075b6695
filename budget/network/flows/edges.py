"""A run as nodes and edges: a leg, terminal, source, differential-holding device and link's leg is an edge each."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from budget.network.arrays import Layout
from budget.network.hydraulics import Hydraulics
from budget.physics.arrays import Array, Indices


@dataclass(frozen=True, slots=True, eq=False)
class Edges:
    """The edges of a run in the numbering of carriers (legs, terminals, sources), then its holders, then its links.

    Flow is positive in the direction of design: outward from the source, through the terminal and back.
    """

    nodes: int
    start: Indices
    end: Indices
    source: Indices
    """Source that each edge belongs to."""
    holders: Indices
    """Device uses that hold a differential, one for each edge after the carriers."""
    links: Indices
    """Edges of the legs of links."""
    behind: Indices
    """Node behind each holder."""
    back: Indices
    """Node by which what is behind each holder returns."""
    outlet: Indices
    inlet: Indices
    """Nodes on either side of each source."""


def find_edges(layout: Layout) -> Edges:
    """Join the legs, terminals and sources of a run at their nodes.

    Each source has a node at its outlet and one at its inlet. A fan's terminals give to or take from the room, which is
    one more; a fan without ducts on one side has the room there. What an open circuit discharges returns to the inlet,
    or by the suction pipework that the terminal names.
    """
    legs, terminals, links = layout.legs, layout.terminals, layout.links
    count, sources = len(legs), len(layout.media)
    kinds = layout.topology.kinds
    holders = [number for number, use in enumerate(layout.devices) if use.zone >= 0]
    first = count + len(holders)
    outlet = first + 3 * np.arange(sources)
    inlet, room = outlet + 1, outlet + 2
    for number in range(sources):
        if kinds[number] != "air":
            room[number] = inlet[number]
            continue
        sides = terminals.discharge[terminals.source == number]
        if not sides.any():
            outlet[number] = room[number]
        if sides.all():
            inlet[number] = room[number]
    leg_node = np.arange(count)
    root = np.where(legs.outward, outlet[legs.source], inlet[legs.source])
    above = np.where(legs.parent >= 0, leg_node[legs.parent], root) if count else root
    start = np.where(legs.outward, above, leg_node)
    end = np.where(legs.outward, leg_node, above)
    # A holder stands at the end of its section: its leg ends before it, what hangs on the section is behind.
    holding = np.array([layout.devices[number].number for number in holders], dtype=np.int64)
    before = count + np.arange(len(holders))
    end[holding] = before
    backs = np.array([layout.zones[layout.devices[number].zone].back for number in holders], dtype=np.int64)
    out = np.where(terminals.out >= 0, _at(leg_node, terminals.out), outlet[terminals.source])
    back = np.where(terminals.back >= 0, _at(leg_node, terminals.back), inlet[terminals.source])
    gas = np.array([kind == "air" for kind in kinds], dtype=np.bool_)[terminals.source]
    out = np.where(gas & ~terminals.discharge, room[terminals.source], out)
    back = np.where(gas & terminals.discharge, room[terminals.source], back)
    return Edges(
        nodes=first + 3 * sources,
        start=np.concatenate([start, out, inlet, before, links.first]).astype(np.int64),
        end=np.concatenate([end, back, outlet, holding, links.second]).astype(np.int64),
        source=np.concatenate(
            [legs.source, terminals.source, np.arange(sources), legs.source[holding], links.legs.source]
        ),
        holders=np.array(holders, dtype=np.int64),
        links=count + len(terminals) + sources + len(holders) + np.arange(len(links)),
        behind=holding,
        back=backs,
        outlet=outlet,
        inlet=inlet,
    )


def _at(values: Indices, places: Indices) -> Indices:
    return values[np.maximum(places, 0)] if len(values) else np.zeros(len(places), dtype=np.int64)


def design_flows(edges: Edges, drops: Hydraulics) -> Array:
    """Return the design flow of every edge, kg/s."""
    mass = drops.leg_mass
    return np.concatenate([mass, drops.terminal_mass, drops.source_mass, mass[edges.behind], drops.links.mass])
