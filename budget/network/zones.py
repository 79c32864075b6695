"""Zones: the parts of a run with a differential of their own."""

from __future__ import annotations

import math

import numpy as np

from budget.description import Description, Finding, error
from budget.network.arrays import Ints, Zone
from budget.network.forest import Forest
from budget.network.topology import Topology


def find_zones(
    description: Description, topology: Topology, findings: list[Finding]
) -> tuple[tuple[Zone, ...], Ints, dict[str, int]]:
    """Return the zones, the zone of each leg and of each terminal.

    Every source has one zone, a fan one a side. What hangs on a section with a differential-holding device is a
    zone of its own, if all of it returns by the section's paired leg; an error where it does not.
    """
    zones: list[Zone] = []
    outside: dict[tuple[int, bool], int] = {}
    for source, kind in enumerate(topology.kinds):
        outside[source, True] = outside[source, False] = len(zones)
        zones.append(Zone(source, -1, -1, -1, -1, math.nan))
        if kind == "air":
            outside[source, False] = len(zones)
            zones.append(Zone(source, -1, -1, -1, -1, math.nan))
    holding = _holding(description, topology, findings)
    behind: dict[int, int] = {}
    zone = np.zeros(len(topology.legs), dtype=np.int64)
    for number, leg in enumerate(topology.legs):
        if leg.parent < 0:
            zone[number] = outside[leg.source, leg.outward]
        else:
            zone[number] = behind.get(leg.parent, int(zone[leg.parent]))
        if number in holding:
            first, back = holding[number]
            if number == first:
                behind[first] = behind[back] = len(zones)
                zones.append(Zone(leg.source, int(zone[number]), -1, first, back, math.nan))
    terminal_zone = {}
    for id_, source in topology.terminal_source.items():
        out = topology.outward.get(id_)
        end = out if out is not None else topology.back[id_]
        if end < 0:
            terminal_zone[id_] = outside[source, out is not None]
        else:
            terminal_zone[id_] = behind.get(end, int(zone[end]))
    return tuple(zones), zone, terminal_zone


def _holding(description: Description, topology: Topology, findings: list[Finding]) -> dict[int, tuple[int, int]]:
    """Return the legs of the sections whose device holds a differential over all that hangs on them."""
    wanted = [
        section
        for section in description.sections.values()
        if section.balance and description.devices[section.balance].holds == "differential"
    ]
    if not wanted:
        return {}
    tree = Forest.of([leg.parent for leg in topology.legs])
    ids = list(topology.terminal_source)
    out, back = (
        np.array([ends.get(id_, -1) for id_ in ids], dtype=np.int64) for ends in (topology.outward, topology.back)
    )
    found = {}
    for section in wanted:
        legs = topology.section_legs.get(section.id, ())
        if not legs:
            continue
        supplied = tree.within(out, legs[0])
        returning = tree.within(back, legs[-1]) if len(legs) == 2 else np.zeros(len(ids), dtype=np.bool_)
        if supplied.any() and np.array_equal(supplied, returning):
            found[legs[0]] = found[legs[1]] = (legs[0], legs[1])
            continue
        odd = [ids[number] for number in np.flatnonzero(supplied != returning)]
        name = min(odd, default=section.id)
        text = (
            f"{section.balance!r} holds a differential only if all on it returns by its paired leg; {name!r} does not"
        )
        findings.append(error("held-differently", text, (*section.path, "balance")))
    return found
