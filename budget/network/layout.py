"""From a description to arrays: `lay_out`."""

from __future__ import annotations

import dataclasses
import math
from collections import defaultdict
from collections.abc import Sequence

import numpy as np

from budget.description import (
    Basis,
    Description,
    Finding,
    Geometry,
    Level,
    Link,
    Path,
    Quantity,
    Run,
    Section,
    Terminal,
    error,
)
from budget.network.arrays import Bools, DeviceUse, Floats, Ints, Layout, Legs, Links, Loss, Terminals, Zone
from budget.network.equipment import EquipmentRows
from budget.network.junctions import find_area_changes, find_junctions
from budget.network.links import Joined, check_rings, find_ringed, join_links, uncounted
from budget.network.losses import losses_of
from budget.network.media import Media, media_of, medium_at, pascals, volume
from budget.network.topology import AT_SOURCE, Leg, Topology, connect
from budget.network.zones import find_zones
from budget.physics import shapes

Broken = dict[Path, set[str]]
"""Keys of each table that could not be read: what rests on them is NaN."""


def lay_out(description: Description) -> Layout:
    """Lay a run out as arrays: legs, terminals, items, devices and zones, in SI base units."""
    topology = connect(description)
    media, findings = media_of(description)
    findings = [*topology.findings, *findings]
    broken = _broken(description)
    zones, zone, terminal_zone = find_zones(description, topology, findings)
    legs = _legs(description, topology, topology.legs, zone, media, broken, findings)
    joined = join_links(description, topology, zones, zone, findings)
    ringed = find_ringed(topology, joined)
    terminals = _terminals(description, topology, media, broken, terminal_zone, findings)
    rows = EquipmentRows(description, topology, media, terminals, broken, findings)
    items = rows.items()
    devices, zones = _with_devices(rows.devices(), zones)
    links = _links(description, topology, joined, ringed, legs, media, broken, rows, findings)
    check_rings(description, topology, items, ringed, links.items, findings)
    order, start, end = _serving(legs, terminals)
    return Layout(
        description,
        topology,
        tuple(media),
        legs,
        uncounted(
            description,
            topology,
            find_junctions(description, topology, legs, end > start, broken, findings),
            joined,
            ringed,
            findings,
        ),
        find_area_changes(description, topology, legs, broken, findings),
        terminals,
        items,
        links,
        devices,
        zones,
        order,
        start,
        end,
        tuple(findings),
    )


def _broken(description: Description) -> Broken:
    broken: Broken = defaultdict(set)
    for finding in description.findings:
        path = finding.within or finding.path
        if finding.level is Level.ERROR and finding.code != "later" and len(path) > 1:
            broken[path[:2]].add(str(path[2]) if len(path) > 2 else "")
    return broken


_GEOMETRY_KEYS = {"pipe", "duct", "size", "bore"}
_LOSS_KEYS = {"fittings", "fitting", "fitting_method"}


def _links(
    description: Description,
    topology: Topology,
    joined: Joined,
    ringed: Bools,
    legs: Legs,
    media: list[Media],
    broken: Broken,
    rows: EquipmentRows,
    findings: list[Finding],
) -> Links:
    first = np.array(joined.first, dtype=np.int64)
    return Links(
        of=joined.of,
        found=tuple(joined.legs),
        legs=_legs(description, topology, joined.legs, legs.zone[first], media, broken, findings),
        first=first,
        second=np.array(joined.second, dtype=np.int64),
        items=rows.link_items(joined.legs),
        ringed=ringed,
    )


def _legs(
    description: Description,
    topology: Topology,
    found: Sequence[Leg],
    zone: Ints,
    media: list[Media],
    broken: Broken,
    findings: list[Finding],
) -> Legs:
    count = len(found)
    columns: dict[str, Floats] = {
        name: np.full(count, np.nan) for name in ("density", "viscosity", "length", "roughness", "diversity")
    }
    constant, per_reynolds, corrected = np.zeros(count), np.zeros(count), np.zeros(count)
    rise = np.zeros(count)
    compression = np.zeros(count)
    geometries: list[Geometry | None] = []
    losses: list[tuple[Loss, ...]] = []
    known_losses: dict[tuple[Path, bool], tuple[Loss, ...]] = {}
    for number, leg in enumerate(found):
        owner = _owner(description, topology, found, leg)
        run = owner.run or Run()
        if isinstance(owner, Section) and leg.first and owner.rise != 0.0:
            if topology.kinds[leg.source] == "open":
                rise[number] = owner.rise
            else:
                text = "rise counts in an open liquid circuit only; remove it, or open the source"
                findings.append(error("rise", text, (*owner.path, "rise")))
        bad = broken.get(owner.path, set())
        if not leg.run_out and leg.first and "rise" in bad:
            rise[number] = math.nan
        medium = media[leg.source].supply if leg.outward else media[leg.source].back
        columns["density"][number], columns["viscosity"][number] = medium.density, medium.viscosity
        columns["length"][number] = math.nan if run.length is None else run.length
        rough = run.line.roughness if run.line else None
        columns["roughness"][number] = math.nan if rough is None or "compression" in bad else rough
        if run.diversity is not None:
            columns["diversity"][number] = run.diversity
        if run.line is not None and run.line.flexible:
            compression[number] = run.compression
        geometries.append(None if bad & _GEOMETRY_KEYS else run.geometry)
        key = (owner.path, leg.run_out)
        if key not in known_losses:
            known_losses[key] = losses_of(description, run, findings)
        losses.append(known_losses[key])
        constant[number] = sum(loss.count * loss.constant for loss in losses[-1])
        per_reynolds[number] = sum(loss.count * loss.per_reynolds for loss in losses[-1])
        corrected[number] = sum(loss.count * loss.corrected for loss in losses[-1])
        if bad & _LOSS_KEYS:
            constant[number] = math.nan
    area, diameter, laminar = _cross_sections(geometries)
    stretch = np.where(compression > 0.0, shapes.flexible_factor(compression, diameter), 1.0)
    return Legs(
        parent=np.array([leg.parent for leg in found], dtype=np.int64),
        source=np.array([leg.source for leg in found], dtype=np.int64),
        zone=zone,
        first=np.array([leg.first for leg in found], dtype=np.bool_),
        outward=np.array([leg.outward for leg in found], dtype=np.bool_),
        run_out=np.array([leg.run_out for leg in found], dtype=np.bool_),
        area=area,
        diameter=diameter,
        laminar=laminar,
        stretch=stretch,
        constant=constant,
        per_reynolds=per_reynolds,
        corrected=corrected,
        rise=rise,
        losses=tuple(losses),
        **columns,
    )


def _owner(description: Description, topology: Topology, found: Sequence[Leg], leg: Leg) -> Section | Terminal | Link:
    if found is not topology.legs:
        return description.links[leg.owner]
    return description.terminals[leg.owner] if leg.run_out else description.sections[leg.owner]


def _cross_sections(geometries: list[Geometry | None]) -> tuple[Floats, Floats, Floats]:
    width = np.array([g.width if g else math.nan for g in geometries], dtype=np.float64)
    height = np.array([g.height if g else math.nan for g in geometries], dtype=np.float64)
    shape = np.array([g.shape if g else "round" for g in geometries], dtype=object)
    area, diameter, laminar = (np.full(len(geometries), np.nan) for _ in range(3))
    for name in ("round", "rectangular", "oval"):
        these = shape == name
        if not these.any():
            continue
        if name == "round":
            found = shapes.circle(width[these])
        else:
            make = shapes.rectangle if name == "rectangular" else shapes.flat_oval
            found = make(width[these], height[these])
        area[these], diameter[these] = found.area, found.hydraulic_diameter
        laminar[these] = found.laminar_constant
    return area, diameter, laminar


_TERMINAL_DROP_KEYS = {"drop", "at", "exponent", "static_drop", "neck"}
_FLOW_KEYS = {"flow", "load"}


def _terminals(
    description: Description,
    topology: Topology,
    media: list[Media],
    broken: Broken,
    zone: dict[str, int],
    findings: list[Finding],
) -> Terminals:
    ids = tuple(id_ for id_ in description.terminals if id_ in topology.terminal_source)
    rows: dict[str, list[float]] = defaultdict(list)
    flags: dict[str, list[bool]] = defaultdict(list)
    places: dict[str, list[int]] = defaultdict(list)
    sides: dict[tuple[int, bool], int] = defaultdict(int)
    """Number of terminals on each side of each source."""
    stated_sides: set[tuple[int, bool]] = set()
    for id_ in ids:
        side = topology.terminal_source[id_], id_ in topology.outward
        sides[side] += 1
        terminal = description.terminals[id_]
        if terminal.flow is not None or terminal.load is not None or broken.get(terminal.path, set()) & _FLOW_KEYS:
            stated_sides.add(side)
    for id_ in ids:
        terminal = description.terminals[id_]
        source = topology.terminal_source[id_]
        discharge = id_ in topology.outward
        supply = media[source].supply
        own = supply if discharge else media[source].back
        bad = broken.get(terminal.path, set())
        mass = _mass(description, media[source], id_, findings)
        alone = topology.kinds[source] == "air" and sides[source, discharge] == 1
        unstated = terminal.flow is None and terminal.load is None and not bad & _FLOW_KEYS
        flags["lone"].append(unstated and alone and (source, not discharge) in stated_sides)
        if unstated and not flags["lone"][-1]:
            findings.append(error("no-flow", "the terminal has no flow; state flow or load", terminal.path))
        flags["discharge"].append(discharge)
        flags["broken"].append(bool(bad & _TERMINAL_DROP_KEYS))
        places["source"].append(source)
        places["zone"].append(zone[id_])
        places["out"].append(topology.outward.get(id_, AT_SOURCE))
        places["back"].append(topology.back.get(id_, AT_SOURCE))
        rows["mass"].append(mass)
        rows["density"].append(own.density)
        rows["drop"].append(_pascals(terminal.drop, own.density, 0.0))
        rows["drop_at"].append(math.nan if terminal.at is None else volume(terminal.at, own.density))
        rows["exponent"].append(terminal.exponent)
        rows["static_drop"].append(_pascals(terminal.static_drop, own.density, math.nan))
        rows["neck"].append(neck_area(terminal.neck))
        rows["rise"].append(math.nan if "rise" in bad else terminal.rise)
        outlet = _pascals(terminal.outlet_pressure, own.density, 0.0)
        rows["outlet"].append(math.nan if "outlet_pressure" in bad else outlet)
        if topology.kinds[source] != "open":
            for key, stated in (("rise", terminal.rise != 0.0), ("outlet_pressure", terminal.outlet_pressure)):
                if stated:
                    text = f"{key} counts in an open liquid circuit only; remove it, or open the source"
                    findings.append(error("rise", text, (*terminal.path, key)))
                    rows["rise" if key == "rise" else "outlet"][-1] = 0.0

    def real(key: str) -> Floats:
        return np.array(rows[key], dtype=np.float64)

    def whole(key: str) -> Ints:
        return np.array(places[key], dtype=np.int64)

    def truth(key: str) -> Bools:
        return np.array(flags[key], dtype=np.bool_)

    return Terminals(
        ids=ids,
        source=whole("source"),
        zone=whole("zone"),
        out=whole("out"),
        back=whole("back"),
        mass=real("mass"),
        lone=truth("lone"),
        discharge=truth("discharge"),
        density=real("density"),
        drop=real("drop"),
        drop_at=real("drop_at"),
        exponent=real("exponent"),
        static_drop=real("static_drop"),
        neck=real("neck"),
        rise=real("rise"),
        outlet=real("outlet"),
        broken=truth("broken"),
    )


def _pascals(quantity: Quantity | None, density: float, otherwise: float) -> float:
    return otherwise if quantity is None else pascals(quantity, density)


def neck_area(geometry: Geometry | None) -> float:
    """Return the area of a neck or outlet, m2; NaN for none."""
    if geometry is None:
        return math.nan
    return float(_cross_sections([geometry])[0][0])


def _mass(description: Description, media: Media, id_: str, findings: list[Finding]) -> float:
    """Return a terminal's mass flow: stated, or load / (cp |dT|) with cp the mean of both legs."""
    terminal, supply = description.terminals[id_], media.supply
    if terminal.flow is not None:
        mass = terminal.flow.basis is Basis.MASS
        return terminal.flow.value if mass else terminal.flow.value * supply.density
    if terminal.load is None:
        return math.nan
    back = media.back
    if terminal.return_temperature is not None:
        back = medium_at(description.fluid, terminal.return_temperature)
    path = (*terminal.path, "load")
    difference = abs(supply.temperature - back.temperature)
    if not difference > 0.0:
        text = "a load needs a temperature difference; state return_temperature here or in the fluid"
        findings.append(error("no-difference", text, path))
        return math.nan
    heat = 0.5 * (supply.specific_heat + back.specific_heat)
    if math.isnan(heat):
        findings.append(error("fluid", "a load needs the fluid's specific heat; state specific_heat", path))
    return terminal.load / (heat * difference)


def _with_devices(
    devices: tuple[DeviceUse, ...], zones: tuple[Zone, ...]
) -> tuple[tuple[DeviceUse, ...], tuple[Zone, ...]]:
    """Tie each held zone to the device that holds it."""
    held = {zone.leg: number for number, zone in enumerate(zones) if zone.leg >= 0}
    tied = list(zones)
    uses = []
    for number, use in enumerate(devices):
        behind = held.get(use.number, -1) if not use.terminal and use.device.holds == "differential" else -1
        if behind >= 0:
            set_point = _pascals(use.device.set_point, use.density, math.nan)
            tied[behind] = dataclasses.replace(zones[behind], device=number, set_point=set_point)
        uses.append(dataclasses.replace(use, zone=behind))
    return tuple(uses), tuple(tied)


def _serving(legs: Legs, terminals: Terminals) -> tuple[Ints, Ints, Ints]:
    """Order the terminals so that those of each leg stand together (children after their parent's own)."""
    count = len(legs)
    children: list[list[int]] = [[] for _ in range(count + 1)]
    hanging: list[list[int]] = [[] for _ in range(count + 1)]
    for leg, parent in enumerate(legs.parent.tolist()):
        children[parent].append(leg)
    for ends in (terminals.out, terminals.back):
        for terminal, leg in enumerate(ends.tolist()):
            if leg >= 0:
                hanging[leg].append(terminal)
    order: list[int] = []
    start, end = [0] * count, [0] * count
    stack = [(root, False) for root in reversed(children[-1])]
    while stack:
        leg, done = stack.pop()
        if done:
            end[leg] = len(order)
            continue
        start[leg] = len(order)
        order += hanging[leg]
        stack.append((leg, True))
        stack += [(child, False) for child in reversed(children[leg])]
    return (np.array(values, dtype=np.int64) for values in (order, start, end))  # type: ignore[return-value]
