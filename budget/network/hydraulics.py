"""Flows and pressure drops of every leg, item and terminal, on whole arrays."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from budget.network.arrays import Bools, Floats, Ints, Items, Layout, Legs
from budget.network.equipment import DROP, KV, K
from budget.network.equipment import LENGTH as EQUIVALENT
from budget.network.media import GRAVITY
from budget.network.rings import circulate
from budget.physics.arrays import SmallIndices
from budget.physics.elbows import reynolds_factor
from budget.physics.fittings import valve_drop
from budget.physics.friction import friction_factor, pressure_gradient, regime, reynolds
from budget.physics.junctions import junction_coefficients
from budget.physics.power import velocity_pressure
from budget.physics.terminals import extract_total, supply_total


@dataclass(frozen=True, slots=True, eq=False)
class Flowing:
    """What flows in legs and what it costs along the way. Speeds have no sign; drops have that of the flow."""

    mass: Floats
    velocity: Floats
    velocity_pressure: Floats
    reynolds: Floats
    regime: SmallIndices
    factor: Floats
    gradient: Floats
    friction: Floats
    fittings: Floats


@dataclass(frozen=True, slots=True, eq=False)
class Hydraulics:
    """What flows and what it costs: kg/s, m/s, Pa, Pa/m; one element a leg, terminal, item or device."""

    terminal_mass: Floats
    leg_mass: Floats
    source_mass: Floats
    too_diverse: Bools
    """Legs whose diversity makes their flow less than that of their largest branch."""
    velocity: Floats
    velocity_pressure: Floats
    reynolds: Floats
    regime: SmallIndices
    factor: Floats
    gradient: Floats
    friction: Floats
    fittings: Floats
    junction: Floats
    """Loss of the junction that each leg hangs on, in its part of it; negative where it gains."""
    junction_k: Floats
    """Coefficients behind them, on the combined flow."""
    transition: Floats
    """Loss of the change of area at the leg's end toward the source."""
    item_drop: Floats
    leg_items: Floats
    leg_static: Floats
    leg_base: Floats
    """Base drop of the device that stands on the leg."""
    leg_total: Floats
    """Friction, fittings, junction, transition, items, device at base drop and static of a leg."""
    device_base: Floats
    device_open: Floats
    terminal_drop: Floats
    terminal_items: Floats
    terminal_static: Floats
    terminal_base: Floats
    terminal_total: Floats
    source_items: Floats
    links: Flowing
    """Legs of links."""
    link_items: Floats
    """Drop of each item on a link."""
    settled: bool
    """Whether the flows of the rings were found."""


def flow_and_drops(layout: Layout) -> Hydraulics:
    """Compute design flows and every drop of a run that was laid out."""
    legs, terminals, items = layout.legs, layout.terminals, layout.items
    mass, leg_mass, source_mass, too_diverse = _flows(layout)
    leg_mass, link_mass, settled = circulate(layout, leg_mass)
    flowing = flow_in(legs, leg_mass)
    pv, gradient, friction, fittings = flowing.velocity_pressure, flowing.gradient, flowing.friction, flowing.fittings
    links = flow_in(layout.links.legs, link_mass)
    link_items = _item_drops(layout.links.items, link_mass, links.velocity_pressure, links.gradient)
    junction, junction_k = _junction_drops(layout, leg_mass)
    change = layout.area_changes
    transition = _signs(leg_mass) * change.k * velocity_pressure(legs.density, leg_mass / (legs.density * change.area))
    static = legs.density * GRAVITY * legs.rise

    carried = np.concatenate([leg_mass, mass, source_mass])
    item_drop = _item_drops(items, carried, pv, gradient)
    owners = _sums(items.carrier, item_drop, len(carried))
    leg_count, terminal_count = len(legs), len(terminals)
    device_open, device_base = _device_drops(layout, carried, pv)
    base = np.zeros(len(carried))
    for use, drop in zip(layout.devices, device_base.tolist(), strict=True):
        base[use.carrier] = drop
    leg_items, leg_base = owners[:leg_count], base[:leg_count]
    terminal_items = owners[leg_count : leg_count + terminal_count]
    terminal_base = base[leg_count : leg_count + terminal_count]
    terminal_drop = _terminal_drops(layout, mass)
    terminal_static = terminals.density * GRAVITY * terminals.rise + terminals.outlet
    return Hydraulics(
        terminal_mass=mass,
        leg_mass=leg_mass,
        source_mass=source_mass,
        too_diverse=too_diverse,
        velocity=flowing.velocity,
        velocity_pressure=pv,
        reynolds=flowing.reynolds,
        regime=flowing.regime,
        factor=flowing.factor,
        gradient=gradient,
        friction=friction,
        fittings=fittings,
        junction=junction,
        junction_k=junction_k,
        transition=transition,
        item_drop=item_drop,
        leg_items=leg_items,
        leg_static=static,
        leg_base=leg_base,
        leg_total=friction + fittings + junction + transition + leg_items + leg_base + static,
        device_base=device_base,
        device_open=device_open,
        terminal_drop=terminal_drop,
        terminal_items=terminal_items,
        terminal_static=terminal_static,
        terminal_base=terminal_base,
        terminal_total=terminal_drop + terminal_items + terminal_static + terminal_base,
        source_items=owners[leg_count + terminal_count :],
        links=links,
        link_items=link_items,
        settled=settled,
    )


def flow_in(legs: Legs, mass: Floats) -> Flowing:
    """Compute what a mass flow costs along legs; a negative one flows the other way and loses as much."""
    velocity = np.abs(mass) / (legs.density * legs.area)
    re = reynolds(legs.density, velocity, legs.diameter, legs.viscosity)
    factor = friction_factor(re, legs.roughness / legs.diameter, legs.laminar)
    gradient = legs.stretch * pressure_gradient(factor, legs.density, velocity, legs.diameter)
    pv = velocity_pressure(legs.density, velocity)
    sign = _signs(mass)
    return Flowing(
        mass=mass,
        velocity=velocity,
        velocity_pressure=pv,
        reynolds=re,
        regime=regime(re),
        factor=factor,
        gradient=gradient,
        friction=sign * gradient * legs.length,
        fittings=sign * _coefficients(legs, re) * pv,
    )


def _signs(flow: Floats) -> Floats:
    return np.where(flow < 0.0, -1.0, 1.0)


def _coefficients(legs: Legs, re: Floats) -> Floats:
    """Return the loss coefficient of all fittings of each leg at its Reynolds number; 0 where nothing flows."""
    k = legs.constant
    if legs.per_reynolds.any():
        k = k + np.divide(legs.per_reynolds, re, out=np.zeros_like(re), where=re > 0.0)
    if legs.corrected.any():
        k = k + legs.corrected * reynolds_factor(re)
    return k


def _junction_drops(layout: Layout, leg_mass: Floats) -> tuple[Floats, Floats]:
    """Return the junction loss of each leg, Pa, and its coefficient; the ratios are those of the legs that meet."""
    junctions, legs = layout.junctions, layout.legs
    drop, k = np.zeros(len(legs)), np.zeros(len(legs))
    branch, straight, combined = junctions.branch, junctions.straight, junctions.combined
    whole = leg_mass[branch] + leg_mass[straight]
    ratio = np.divide(leg_mass[branch], whole, out=np.zeros_like(whole), where=whole > 0.0)
    of_branch, of_straight = junction_coefficients(
        junctions.family, junctions.converging, ratio, junctions.area_ratio, junctions.angle
    )
    density = legs.density[combined]
    pv = velocity_pressure(density, whole / (density * legs.area[combined]))
    for leg, coefficient, counts in (
        (branch, of_branch, junctions.branch_counts),
        (straight, of_straight, junctions.straight_counts),
    ):
        k[leg] = np.where(counts, coefficient, 0.0)
        drop[leg] = k[leg] * pv
    drop[junctions.unknown] = k[junctions.unknown] = np.nan
    return drop, k


def sum_served(values: Floats, order: Ints, start: Ints, end: Ints) -> Floats:
    """Return for each leg the sum of a value over the terminals that it serves; 0 where it serves none."""
    return _reduce_served(np.add, values, order, start, end, 0.0)


def least_served(values: Floats, order: Ints, start: Ints, end: Ints) -> Floats:
    """Return for each leg the least value among the terminals that it serves; infinite where it serves none."""
    return _reduce_served(np.minimum, values, order, start, end, np.inf)


def _reduce_served(reduce: np.ufunc, values: Floats, order: Ints, start: Ints, end: Ints, none: float) -> Floats:
    if not len(start):
        return np.zeros(0)
    padded = np.append(values[order], none)
    ends = np.empty(2 * len(start), dtype=np.int64)
    ends[0::2], ends[1::2] = start, end
    found = reduce.reduceat(padded, ends)[0::2]
    return np.asarray(np.where(end > start, found, none), dtype=np.float64)


def _flows(layout: Layout) -> tuple[Floats, Floats, Floats, Bools]:
    terminals = layout.terminals
    mass = terminals.mass.copy()
    lone = np.flatnonzero(terminals.lone)
    if len(lone):
        mass[lone] = 0.0
        other = _source_flows(layout, mass, _leg_flows(layout, mass)[0])
        for terminal in lone.tolist():
            mass[terminal] = other[0 if not terminals.discharge[terminal] else 1][terminals.source[terminal]]
    leg_mass, too_diverse = _leg_flows(layout, mass)
    discharge, suction = _source_flows(layout, mass, leg_mass)
    alone = ~np.isin(np.arange(len(layout.media)), terminals.source[terminals.discharge])
    return mass, leg_mass, np.where(alone, suction, discharge), too_diverse


def _sums(owners: Ints, values: Floats, count: int) -> Floats:
    return np.bincount(owners, weights=values, minlength=count).astype(np.float64)


def _source_flows(layout: Layout, mass: Floats, leg_mass: Floats) -> tuple[Floats, Floats]:
    """Return the flow of each source on its discharge and on its suction (or return) side."""
    legs, terminals, count = layout.legs, layout.terminals, len(layout.media)
    found = []
    for outward, ends in ((True, terminals.out), (False, terminals.back)):
        roots = (legs.parent < 0) & (legs.outward == outward)
        total = _sums(legs.source[roots], leg_mass[roots], count)
        direct = (ends < 0) & (terminals.discharge == outward)
        total += _sums(terminals.source[direct], mass[direct], count)
        found.append(total)
    return found[0], found[1]


def _leg_flows(layout: Layout, mass: Floats) -> tuple[Floats, Bools]:
    """Return the design flow of each leg: what hangs on it, or its diversity times all terminals that it serves."""
    legs = layout.legs
    whole = sum_served(mass, layout.order, layout.start, layout.end)
    diversity = legs.diversity
    nowhere = np.zeros(len(legs), dtype=np.bool_)
    if np.isnan(diversity).all():
        return whole, nowhere
    flow = np.zeros(len(legs))
    largest = np.zeros(len(legs))
    for ends in (layout.terminals.out, layout.terminals.back):
        on_leg = ends >= 0
        np.add.at(flow, ends[on_leg], mass[on_leg])
        np.maximum.at(largest, ends[on_leg], mass[on_leg])
    for level in _levels(legs.parent):
        shared = level[~np.isnan(diversity[level])]
        flow[shared] = diversity[shared] * whole[shared]
        inner = level[legs.parent[level] >= 0]
        np.add.at(flow, legs.parent[inner], flow[inner])
        np.maximum.at(largest, legs.parent[inner], flow[inner])
    return flow, flow < largest * (1.0 - 1e-9)


def _levels(parent: Ints) -> list[Ints]:
    """Return the legs by distance from their source, the furthest first."""
    depth = np.zeros(len(parent), dtype=np.int64)
    above = parent.copy()
    while (inner := above >= 0).any():
        depth[inner] += 1
        above[inner] = parent[above[inner]]
    order = np.argsort(-depth, kind="stable")
    cuts = np.flatnonzero(np.diff(depth[order])) + 1
    return [np.asarray(level, dtype=np.int64) for level in np.split(order, cuts)]


def _item_drops(items: Items, carried: Floats, pv: Floats, gradient: Floats) -> Floats:
    mass = carried[items.carrier]
    flow = np.abs(mass) / items.density
    each = flow / items.parallel
    drop = np.full(len(items), np.nan)
    at_neck = ~np.isnan(items.neck)
    reference = np.maximum(items.reference, 0)
    has_leg = items.reference >= 0
    form = items.form

    these = form == K
    if these.any():
        neck_pv = velocity_pressure(items.density, flow / items.neck)
        leg_pv = np.where(has_leg, pv[reference], np.nan) if len(pv) else np.nan
        both = items.value * np.where(at_neck, neck_pv, leg_pv) / items.parallel**2
        drop[these] = both[these]
    these = form == KV
    if these.any():
        drop[these] = valve_drop(each[these], items.value[these], items.density[these])
    these = form == DROP
    if these.any():
        ratio = np.where(np.isnan(items.at), 1.0, each / items.at)
        drop[these] = (items.value * ratio**items.exponent)[these]
    these = form == EQUIVALENT
    if these.any():
        along = np.where(has_leg, gradient[reference], np.nan) if len(gradient) else np.full(len(items), np.nan)
        drop[these] = (items.value * along / items.parallel**2)[these]
    return np.asarray(_signs(mass) * drop, dtype=np.float64)


def _device_drops(layout: Layout, carried: Floats, pv: Floats) -> tuple[Floats, Floats]:
    """Return each device's drop fully open (0 where it has no table), and its base drop."""
    uses = layout.devices
    mass = carried[np.array([use.carrier for use in uses], dtype=np.int64)]
    density, open_kv, open_k, neck, least = (
        np.array([getattr(use, name) for use in uses], dtype=np.float64)
        for name in ("density", "open_kv", "open_k", "neck", "least_drop")
    )
    flow = np.abs(mass) / density
    reference = np.array([use.reference for use in uses], dtype=np.int64)
    leg_pv = np.array([pv[number] if number >= 0 else np.nan for number in reference.tolist()])
    damper = open_k * np.where(np.isnan(neck), leg_pv, velocity_pressure(density, flow / neck))
    opened = np.where(~np.isnan(open_kv), valve_drop(flow, open_kv, density), np.where(np.isnan(open_k), 0.0, damper))
    return opened, np.maximum(opened, least)


def _terminal_drops(layout: Layout, mass: Floats) -> Floats:
    """Return the total-pressure drop of each terminal at design flow."""
    terminals = layout.terminals
    flow = mass / terminals.density
    ratio = np.where(np.isnan(terminals.drop_at), 1.0, flow / terminals.drop_at) ** terminals.exponent
    drop = terminals.drop * ratio
    static = ~np.isnan(terminals.static_drop)
    if static.any():
        neck_pv = velocity_pressure(terminals.density, flow / terminals.neck)
        part = terminals.static_drop * ratio
        total = np.where(terminals.discharge, supply_total(part, neck_pv), extract_total(part, neck_pv))
        drop = np.where(static, total, drop)
    drop = np.where(terminals.broken, np.nan, drop)
    return np.asarray(np.where(np.isnan(mass), np.nan, drop), dtype=np.float64)
