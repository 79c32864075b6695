"""Authority of control items at design flow."""

from __future__ import annotations

import math

import numpy as np

from budget.network.computed import Computed
from budget.network.duty import path_legs


def authorities(run: Computed) -> dict[int, tuple[float | None, float | None]]:
    """Return authority and low authority of each control item, by the number of its carrier (leg or terminal).

    Authority = drop fully open at design flow / (that + everything that carries only its flow, devices at setting);
    three-port: over (that + the terminal's drop). Low authority = the drop / the differential held when all others are
    shut. Both None where the carrier has a flow-holding device.
    """
    layout = run.layout
    found: dict[int, tuple[float | None, float | None]] = {}
    for number, item in enumerate(layout.items.items):
        carrier = int(layout.items.carrier[number])
        if not item.control or carrier >= len(layout.legs) + len(layout.terminals):
            continue
        if _held_flow(run, carrier):
            found[carrier] = (None, None)
            continue
        drop = float(run.drops.item_drop[number])
        rest = only_its_flow(run, carrier, item.control == "three-port") - drop
        whole = drop + rest
        authority = drop / whole if whole > 0 else math.nan
        held = held_differential(run, carrier)
        found[carrier] = (_finite(authority), _finite(drop / held if held > 0 else math.nan))
    return found


def _finite(value: float) -> float | None:
    return value if math.isfinite(value) else None


def _held_flow(run: Computed, carrier: int) -> bool:
    return any(use.carrier == carrier and use.device.holds == "flow" for use in run.layout.devices)


def only_its_flow(run: Computed, carrier: int, three_port: bool) -> float:
    """Return all that carries only the item's flow, the item included, on the largest circuit through it, Pa."""
    layout, drops, legs = run.layout, run.drops, run.layout.legs
    if carrier >= len(legs):
        terminal = carrier - len(legs)
        if three_port:
            control = sum(
                float(drops.item_drop[number])
                for number in np.flatnonzero(layout.items.carrier == carrier).tolist()
                if layout.items.items[number].control
            )
            return control + float(drops.terminal_drop[terminal])
        served = {terminal}
    else:
        numbers = layout.served(carrier)
        served = set(numbers.tolist())
        circuits = run.circuits.circuit[numbers]
        if np.isnan(circuits).all():
            return math.nan
        terminal = int(numbers[np.nanargmax(circuits)])
    taken = np.zeros(len(legs) + len(layout.terminals))
    for number, use in enumerate(layout.devices):
        taken[use.carrier] = run.take_up.taken[number]
    own_zone = int(legs.zone[carrier]) if carrier < len(legs) else int(layout.terminals.zone[terminal])
    total = _at_source(run, own_zone, terminal, served)
    for leg in path_legs(run, terminal):
        if int(legs.zone[leg]) == own_zone and set(layout.served(leg).tolist()) <= served:
            total += float(drops.leg_total[leg] - drops.leg_static[leg]) + float(taken[leg])
    if int(layout.terminals.zone[terminal]) == own_zone:
        total += float(drops.terminal_total[terminal] - drops.terminal_static[terminal])
        return total + float(taken[len(legs) + terminal])
    inner = int(layout.terminals.zone[terminal])
    while layout.zones[inner].outer != own_zone and layout.zones[inner].outer >= 0:
        inner = layout.zones[inner].outer
    return total + float(run.circuits.required[inner])


def _at_source(run: Computed, zone: int, terminal: int, served: set[int]) -> float:
    """Return what the whole flow of a source costs where all of it goes through the item: plant, a fan's other side."""
    layout, terminals = run.layout, run.layout.terminals
    source = layout.zones[zone].source
    air = layout.topology.kinds[source] == "air"
    whole = terminals.source == source
    if air:
        whole = whole & (terminals.discharge == terminals.discharge[terminal])
    if layout.zones[zone].outer >= 0 or set(np.flatnonzero(whole).tolist()) != served:
        return 0.0
    if not air:
        return float(run.drops.source_items[source])
    return run.required_of(source) - float(run.circuits.required[zone])


def held_differential(run: Computed, carrier: int) -> float:
    """Return the differential over the carrier's circuit when all others are shut, Pa."""
    layout = run.layout
    legs = layout.legs
    on_leg = carrier < len(legs)
    zone = int(legs.zone[carrier] if on_leg else layout.terminals.zone[carrier - len(legs)])
    if layout.zones[zone].outer >= 0:
        return float(run.circuits.required[zone])
    source = layout.zones[zone].source
    if (set_point := run.source_set_point(source)) is not None:
        return set_point
    return run.required_of(source)
