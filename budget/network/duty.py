"""What the pump or fan must deliver: the index circuit by heading, static, reserve, duty, powers, external pressure."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from budget.description import Source
from budget.description.schema import HEADINGS
from budget.network.arrays import DeviceUse
from budget.network.computed import Computed
from budget.network.layout import neck_area
from budget.network.leakage import source_leakage
from budget.network.media import Media, pascals
from budget.network.results import FluidResult, SourceResult
from budget.physics.power import (
    electrical_power,
    hydraulic_power,
    shaft_power,
    specific_fan_power,
    velocity_pressure,
)


@dataclass(frozen=True, slots=True)
class IndexPath:
    """The named terminal of a source's index circuit (of one side, for a gas) and the legs on its path."""

    terminal: int
    legs: tuple[int, ...]
    zone: int


def index_paths(run: Computed, source: int) -> Iterator[IndexPath]:
    """Return the index path of each outermost zone of a source: one, or one a side that carries terminals."""
    for zone in run.zones_of[source]:
        if zone in run.tied:
            first = run.tied[zone][0]
            yield IndexPath(first, tuple(path_legs(run, first)), zone)


def path_legs(run: Computed, terminal: int) -> list[int]:
    """Return the legs on a terminal's path, outward and then back, run-out included."""
    layout = run.layout
    out = layout.topology.chain(int(layout.terminals.out[terminal]))
    back = layout.topology.chain(int(layout.terminals.back[terminal]))
    return out[::-1] + back


def spent_by_heading(run: Computed, source: int) -> dict[str, float]:
    """Return what the index circuit spends under each heading, Pa; it adds up to the required pressure."""
    drops, layout = run.drops, run.layout
    spent = dict.fromkeys(HEADINGS, 0.0)
    carriers = {len(layout.legs) + len(layout.terminals) + source}
    for path in index_paths(run, source):
        legs, terminal = list(path.legs), path.terminal
        spent["distribution"] += math.fsum(
            part
            for losses in (drops.friction, drops.fittings, drops.junction, drops.transition)
            for part in losses[legs]
        )
        spent["balancing"] += math.fsum(drops.leg_base[legs]) + float(drops.terminal_base[terminal])
        spent["static"] += math.fsum(drops.leg_static[legs]) + float(drops.terminal_static[terminal])
        spent["terminal"] += float(drops.terminal_drop[terminal])
        # What a set point leaves above the largest circuit behind it is taken by the devices there.
        zone = int(layout.terminals.zone[terminal])
        while layout.zones[zone].outer >= 0:
            spent["balancing"] += float(run.circuits.required[zone] - run.circuits.largest[zone])
            zone = layout.zones[zone].outer
        carriers |= {*legs, len(layout.legs) + terminal}
    items = layout.items
    for number in np.flatnonzero(np.isin(items.carrier, list(carriers))).tolist():
        spent[HEADINGS[items.heading[number]]] += float(drops.item_drop[number])
    return spent


def fluid_result(media: Media) -> FluidResult:
    """Return the properties of a fluid on both legs."""
    return FluidResult(
        media.name,
        media.supply.density,
        media.supply.viscosity,
        media.supply.specific_heat,
        media.back.density,
        media.back.viscosity,
    )


def source_result(run: Computed, number: int) -> SourceResult:
    """Return the duty of one source and all that is reported with it."""
    layout, drops = run.layout, run.drops
    source = layout.sources[number]
    kind = layout.topology.kinds[number]
    media = layout.media[number]
    sides = [float(run.circuits.required[zone]) for zone in run.zones_of[number]]
    items = float(drops.source_items[number])
    paths = list(index_paths(run, number))
    required = run.required_of(number)
    static = sum(_static(run, path) for path in paths)
    held = held_part(run, number)
    factor = 1.0 + source.flow_reserve
    duty = static + (1.0 + source.reserve) * ((required - static - held) * factor**2 + held)
    mass = float(drops.source_mass[number])
    flow = mass / media.supply.density
    available = None if source.available is None else pascals(source.available, media.supply.density)
    hydraulic = float(hydraulic_power(flow * factor, duty))
    shaft = None if source.efficiency is None else float(shaft_power(hydraulic, source.efficiency))
    motor = source.motor_efficiency
    electrical = None if shaft is None or motor is None else float(electrical_power(shaft, motor))
    inside = _inside(run, number, paths)
    outlet_pv = _outlet_pressure(source, media.supply.density, flow * factor)
    air = kind == "air"
    return SourceResult(
        id=source.id,
        kind=kind,
        fluid=fluid_result(media),
        flow=flow,
        mass_flow=mass,
        required=required,
        static=static,
        reserve=duty - required,
        duty=duty,
        duty_flow=flow * factor,
        available=available,
        in_hand=None if available is None else available - duty,
        index=tuple(layout.terminals.ids[path.terminal] for path in paths),
        discharge_required=_or_none(sides[0]) if air else None,
        suction_required=_or_none(sides[-1]) if air else None,
        items_drop=items,
        static_pressure=None if outlet_pv is None else duty - outlet_pv,
        external_total=duty - inside if air else None,
        external_static=None if outlet_pv is None or not air else duty - inside - outlet_pv,
        hydraulic_power=hydraulic,
        shaft_power=shaft,
        electrical_power=electrical,
        leakage=source_leakage(layout, run.leakage, number),
        sfp=None if electrical is None else float(specific_fan_power(electrical, flow * factor)),
        spent=spent_by_heading(run, number),
        budget={
            heading: pascals(quantity, media.supply.density) for heading, quantity in layout.description.budget.items()
        },
        items=run.item_results(len(layout.legs) + len(layout.terminals) + number),
    )


def _or_none(value: float) -> float | None:
    return None if math.isnan(value) else value


def _static(run: Computed, path: IndexPath) -> float:
    on_legs = math.fsum(run.drops.leg_static[list(path.legs)])
    return on_legs + float(run.drops.terminal_static[path.terminal])


def held_part(run: Computed, source: int) -> float:
    """Return the part of a source's required pressure that holding devices keep constant, Pa: H of its duty."""
    return sum(_held_constant(run, path) for path in index_paths(run, source))


def _held_constant(run: Computed, path: IndexPath) -> float:
    """Return the part of an index circuit that does not grow with the flow, because a device holds it.

    That is the base drop of every holding device, with the section or terminal that carries a flow-holding one and
    all behind it; behind a differential-holding one its set point stands in the place of what it really costs.
    """
    layout, drops = run.layout, run.drops
    outer = [leg for leg in path.legs if layout.legs.zone[leg] == path.zone]
    covered: set[int] = set()
    terminal_held = False
    total = 0.0
    for number, use in enumerate(layout.devices):
        on_path = use.number == path.terminal if use.terminal else use.number in outer
        if not on_path or use.device.holds is None:
            continue
        if use.device.holds == "differential":
            if use.zone >= 0:
                total += float(run.circuits.required[use.zone])
            covered_base = float(drops.device_base[number])
            total += covered_base
            covered.add(~use.number)  # its base is counted; its section is not behind it
            continue
        terminal_held = True
        if use.terminal:
            covered |= {leg for leg in outer if layout.legs.run_out[leg]}
        else:
            covered |= set(behind(run, use, outer))
    for leg in outer:
        if leg in covered:
            counted = drops.leg_base[leg] if ~leg in covered else 0.0
            total += float(drops.leg_total[leg] - drops.leg_static[leg] - counted)
    if terminal_held and layout.terminals.zone[path.terminal] == path.zone:
        terminal = path.terminal
        total += float(drops.terminal_total[terminal] - drops.terminal_static[terminal])
    return total


def behind(run: Computed, use: DeviceUse, legs: list[int]) -> Iterator[int]:
    """Return those of a path's legs that are the device's section or hang behind it."""
    layout = run.layout
    topology = layout.topology
    own = use.number
    served = set(layout.served(own).tolist())
    for leg in legs:
        found = topology.legs[leg]
        if found.run_out or own in topology.chain(leg):
            yield leg
        elif not found.outward and not found.first:
            # The return leg of a paired section goes with its supply leg.
            if own in topology.chain(topology.section_legs[found.owner][0]):
                yield leg
        elif found.outward != topology.legs[own].outward and set(layout.served(leg).tolist()) <= served:
            yield leg


def _inside(run: Computed, source: int, paths: list[IndexPath]) -> float:
    """Return the drop of all items inside the air handling unit, on the source and along the index circuits."""
    layout = run.layout
    carriers = {len(layout.legs) + len(layout.terminals) + source}
    for path in paths:
        carriers |= {*path.legs, len(layout.legs) + path.terminal}
    chosen = layout.items.inside & np.isin(layout.items.carrier, list(carriers))
    return math.fsum(run.drops.item_drop[chosen])


def _outlet_pressure(source: Source, density: float, flow: float) -> float | None:
    if source.outlet is None:
        return None
    return float(velocity_pressure(density, flow / neck_area(source.outlet)))
