"""From a run that was worked out to the network as it is installed: every drop as a law of the real flow."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from budget.network.circuits import path_sums
from budget.network.computed import Computed
from budget.network.equipment import DROP, KV, LENGTH, K
from budget.network.flows.cases import Setup
from budget.network.flows.edges import Edges, design_flows, find_edges
from budget.network.flows.graph import Controls, Law, Network
from budget.network.flows.laws import HOLDING, STEEP, Constant, Friction, HeldFlow, JunctionLaw, Power, Quadratic
from budget.network.flows.sources import Gains, Running
from budget.network.rings import leg_laws
from budget.physics.arrays import Array, Flags
from budget.physics.fittings import valve_drop
from budget.physics.power import velocity_pressure


@dataclass(frozen=True, slots=True, eq=False)
class Installed:
    """The network of a run, and what its controls stand for."""

    edges: Edges
    network: Network
    sources: tuple[Running, ...]
    unknown: Flags
    """Sources with anything on them that can't be computed: they are left out."""
    pumps: dict[int, int]
    """Source number of each control that is a source with a set point."""


def install(run: Computed, setup: Setup) -> Installed:
    """Build the network of a run with its devices set and its sources running as `setup` says."""
    layout, drops = run.layout, run.drops
    edges = find_edges(layout)
    design = design_flows(edges, drops)
    constant = np.zeros(len(design))
    static = np.concatenate([drops.leg_static, drops.terminal_static])
    constant[: len(static)] = static
    constant[edges.links] = _heights(run)
    quadratic = _quadratic(run, edges, setup)
    links = layout.links
    quadratic[edges.links], of_links = leg_laws(links.legs, links.items, np.arange(len(links)), edges.links)
    fixed = Constant(constant), Quadratic(quadratic)
    laws: list[Law] = [*fixed, _friction(run), _powers(run, setup), *of_links, Gains(setup.running)]
    junctions = _junctions(run)
    unknown = _unknown(run, edges, [*laws, junctions], design)
    shut = unknown[edges.source]
    shut[list(setup.shut)] = True
    pumps, controls = _controls(run, edges, setup, unknown)
    # A part that carries nothing in design (a spare leg) is taken for as large as the least that carries something.
    least = np.min(np.abs(design[design != 0.0]), initial=np.inf)
    typical = np.where(design != 0.0, design, least if np.isfinite(least) else 1.0)
    network = Network(
        nodes=edges.nodes,
        start=edges.start,
        end=edges.end,
        laws=tuple(laws),
        typical=typical,
        junctions=(junctions,),
        shut=shut,
        controls=controls,
        held=_held_flows(run, setup),
    )
    return Installed(edges, network, setup.running, unknown, pumps)


def _heights(run: Computed) -> Array:
    """Return the static part of each link's leg: the height between the sections that it joins."""
    legs, links = run.layout.legs, run.layout.links
    # Outward, what rises from the source to a leg's far end; on the way back, what rises from there to the source.
    along = path_sums(run.drops.leg_static, legs.parent)
    sign = np.where(legs.outward[links.first], 1.0, -1.0)
    return np.asarray(sign * (along[links.second] - along[links.first]), dtype=np.float64)


def _quadratic(run: Computed, edges: Edges, setup: Setup) -> Array:
    """Return what each edge drops over the square of its flow: all losses with a fixed coefficient."""
    layout, drops = run.layout, run.drops
    legs, items, terminals = layout.legs, layout.items, layout.terminals
    carried = np.concatenate([drops.leg_mass, drops.terminal_mass, drops.source_mass])
    found = np.zeros(len(edges.start))
    change = layout.area_changes
    # velocity_pressure(rho, 1/(rho A)) is the velocity pressure at 1 kg/s.
    found[: len(legs)] = legs.constant * velocity_pressure(legs.density, 1.0 / (legs.density * legs.area))
    found[: len(legs)] += change.k * velocity_pressure(legs.density, 1.0 / (legs.density * change.area))
    opening = setup.openings
    for number in np.flatnonzero((items.form == K) | (items.form == KV)).tolist():
        carrier, form = int(items.carrier[number]), items.form[number]
        if form == KV:
            one = float(valve_drop(1.0 / items.density[number], items.value[number], items.density[number]))
            one /= float(items.parallel[number]) ** 2
        else:
            one = abs(float(drops.item_drop[number])) / float(carried[carrier]) ** 2 if carried[carrier] != 0.0 else 0.0
        found[carrier] += one / opening[number] ** 2
    static = ~np.isnan(terminals.static_drop)
    neck = velocity_pressure(terminals.density, 1.0 / (terminals.density * terminals.neck))
    sign = np.where(terminals.discharge, 1.0, -1.0)
    found[len(legs) : len(legs) + len(terminals)] += np.where(static, sign * neck, 0.0)
    holders = {number: len(carried) + place for place, number in enumerate(edges.holders.tolist())}
    for number, use in enumerate(layout.devices):
        found[holders.get(number, use.carrier)] += setup.coefficients[number]
    return found


def _friction(run: Computed) -> Friction:
    """Return the friction of every leg, and of items stated as an equivalent length."""
    layout, legs, items = run.layout, run.layout.legs, run.layout.items
    carried = np.concatenate([run.drops.leg_mass, run.drops.terminal_mass, run.drops.source_mass])
    extra = np.flatnonzero((items.form == LENGTH) & (items.reference >= 0))
    leg = np.concatenate([np.arange(len(legs)), items.reference[extra]])
    edge = np.concatenate([np.arange(len(legs)), items.carrier[extra]])
    own = np.zeros(len(extra))
    length = np.concatenate([legs.length, items.value[extra] / items.parallel[extra] ** 2])
    with np.errstate(all="ignore"):
        share = np.where(edge == leg, 1.0, carried[edge] / run.drops.leg_mass[leg])
    return Friction(
        edge=edge,
        share=share,
        density=legs.density[leg],
        viscosity=legs.viscosity[leg],
        area=legs.area[leg],
        diameter=legs.diameter[leg],
        roughness=legs.roughness[leg],
        laminar=legs.laminar[leg],
        length=length * legs.stretch[leg],
        per_reynolds=np.concatenate([layout.legs.per_reynolds, own]),
        corrected=np.concatenate([layout.legs.corrected, own]),
    )


def _powers(run: Computed, setup: Setup) -> Power:
    """Return the drops with an exponent of their own: terminals, and items whose drop is stated."""
    layout, terminals, items = run.layout, run.layout.terminals, run.layout.items
    count = len(layout.legs)
    carried = np.concatenate([run.drops.leg_mass, run.drops.terminal_mass, run.drops.source_mass])
    these = np.flatnonzero(items.form == DROP)
    carrier = items.carrier[these]
    item_at = items.parallel[these] * items.at[these] * items.density[these]
    at = np.concatenate([terminals.drop_at * terminals.density, item_at])
    edge = np.concatenate([count + np.arange(len(terminals)), carrier])
    at = np.where(np.isnan(at), np.abs(carried[edge]), at)
    static = np.where(terminals.discharge, terminals.static_drop, np.abs(terminals.static_drop))
    own = np.where(np.isnan(terminals.static_drop), terminals.drop, static)
    own = np.where(terminals.broken, np.nan, own)
    # A part-open valve whose drop is stated loses by the square of its opening too.
    value = np.concatenate([own, items.value[these] / setup.openings[these] ** 2])
    return Power(edge, value, np.where(at == 0.0, 1.0, at), np.concatenate([terminals.exponent, items.exponent[these]]))


def _junctions(run: Computed) -> JunctionLaw:
    junctions, legs = run.layout.junctions, run.layout.legs
    combined = junctions.combined
    scale = velocity_pressure(legs.density[combined], 1.0 / (legs.density[combined] * legs.area[combined]))
    return JunctionLaw(
        branch=junctions.branch,
        straight=junctions.straight,
        counts=(junctions.branch_counts, junctions.straight_counts),
        family=junctions.family,
        converging=junctions.converging,
        area_ratio=junctions.area_ratio,
        angle=junctions.angle,
        scale=scale,
    )


def _held_flows(run: Computed, setup: Setup) -> HeldFlow | None:
    """Return what the flow-holding devices do, each on its leg or terminal."""
    layout, drops = run.layout, run.drops
    uses = [(number, use) for number, use in enumerate(layout.devices) if use.device.holds == "flow"]
    carried = np.concatenate([drops.leg_mass, drops.terminal_mass])
    rows = []
    for number, use in uses:
        flow = float(carried[use.carrier]) * setup.shares.get(use.carrier, 1.0)
        if flow > 0.0:
            least = float(drops.device_base[number]) / float(carried[use.carrier]) ** 2
            rows.append((use.carrier, flow, least, use.greatest_drop))
    if not rows:
        return None
    edge, flow_, least_, greatest = (np.array(column, dtype=np.float64) for column in zip(*rows, strict=True))
    pressure = max([run.required_of(number) for number in range(len(layout.media))], default=1.0, key=_or_nothing)
    steep = max(_or_nothing(pressure), 1.0) / (STEEP * flow_)
    return HeldFlow(edge.astype(np.int64), flow_, least_, greatest, steep, np.full(len(rows), HOLDING))


def _or_nothing(value: float) -> float:
    return value if np.isfinite(value) else 0.0


def _unknown(run: Computed, edges: Edges, laws: list[Law], design: Array) -> Flags:
    """Find the sources with a flow or a drop that can't be computed."""
    drop, slope = np.zeros(len(design)), np.zeros(len(design))
    with np.errstate(all="ignore"):
        for law in laws:
            law.add(design, drop, slope)
    lost = ~np.isfinite(design) | ~np.isfinite(drop)
    lost[run.layout.junctions.unknown] = True
    found = np.zeros(len(run.layout.media), dtype=np.bool_)
    found[edges.source[lost]] = True
    busy = np.zeros(len(found), dtype=np.bool_)
    busy[run.layout.terminals.source] = True
    return found | ~busy


def _controls(run: Computed, edges: Edges, setup: Setup, unknown: Flags) -> tuple[dict[int, int], Controls]:
    """Return what holds a pressure difference elsewhere: devices that do, and sources with a set point."""
    layout = run.layout
    count = len(layout.legs) + len(layout.terminals)
    rows: list[tuple[int, int, int, float]] = []
    for place, number in enumerate(edges.holders.tolist()):
        zone = layout.devices[number].zone
        edge = count + len(layout.media) + place
        if not unknown[edges.source[edge]]:
            point = float(run.circuits.required[zone])
            rows.append((edge, int(edges.behind[place]), int(edges.back[place]), point))
    pumps = {}
    for number, source in enumerate(setup.running):
        if source.set_point is not None and source.units > 0 and not unknown[number]:
            pumps[len(rows)] = number
            high, low = _sensed(run, edges, number)
            rows.append((source.edge, high, low, source.set_point))
    if not rows:
        return pumps, Controls.none()
    edge_, high_, low_, points = zip(*rows, strict=True)
    whole = [np.array(column, dtype=np.int64) for column in (edge_, high_, low_)]
    return pumps, Controls(whole[0], whole[1], whole[2], np.array(points), np.ones(len(rows), dtype=np.bool_))


def _sensed(run: Computed, edges: Edges, number: int) -> tuple[int, int]:
    """Return the nodes between which a source holds its set point: where its sensor is connected, else its own.

    That is where the section or the terminal's run-out begins and where it returns. Where it does not return by a
    leg of its own, the other node is the inlet of the source; on a fan's suction side it is the outlet.
    """
    topology, terminals = run.layout.topology, run.layout.terminals
    sensor = run.layout.sources[number].sensor
    high, low = int(edges.outlet[number]), int(edges.inlet[number])
    legs = topology.section_legs.get(sensor or "", topology.run_out_legs.get(sensor or "", ()))
    if legs and topology.legs[legs[0]].source == number:
        for leg in legs:
            if topology.legs[leg].outward:
                high = int(edges.start[leg])
            else:
                low = int(edges.end[leg])
        if topology.kinds[number] == "air" and topology.legs[legs[0]].outward:
            low = _room(run, edges, number)
        elif topology.kinds[number] == "air":
            high = _room(run, edges, number)
    place = terminals.ids.index(sensor) if sensor in terminals.ids else -1
    if place >= 0 and terminals.source[place] == number:
        edge = len(run.layout.legs) + place
        if not any(topology.legs[leg].outward for leg in legs):
            high = int(edges.start[edge])
        if all(topology.legs[leg].outward for leg in legs):
            low = int(edges.end[edge])
    return high, low


def _room(run: Computed, edges: Edges, number: int) -> int:
    """Return the node of the room of a fan: where its first terminal gives or takes."""
    terminal = int(np.flatnonzero(run.layout.terminals.source == number)[0])
    edge = len(run.layout.legs) + terminal
    return int(edges.end[edge] if run.layout.terminals.discharge[terminal] else edges.start[edge])
