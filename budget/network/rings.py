"""The flows in rings: what circulates so that the pressures balance around every loop that a link closes."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from budget.network.arrays import Floats, Ints, Items, Layout, Legs
from budget.network.equipment import DROP, KV, LENGTH, K
from budget.physics.fittings import valve_drop
from budget.physics.power import velocity_pressure

if TYPE_CHECKING:
    from budget.network.flows.graph import Law


def circulate(layout: Layout, mass: Floats) -> tuple[Floats, Floats, bool]:
    """Return the design flow of every leg and of every link's leg, kg/s, and whether they were found.

    `mass` is what each leg carries along the trees. What hangs on the ring keeps its flow; the legs of the ring and
    the links share it. Where anything of a ring is unknown, all flows in the rings of its source are NaN.
    """
    links, legs = layout.links, layout.legs
    if not len(links):
        return mass, np.zeros(0), True
    # SciPy, behind the solver, is slow to import, and few runs have links.
    from budget.network.flows.graph import Network  # noqa: PLC0415
    from budget.network.flows.laws import Quadratic  # noqa: PLC0415
    from budget.network.flows.solve import solve  # noqa: PLC0415

    ringed = np.flatnonzero(links.ringed)
    count, edges = len(legs), len(ringed) + len(links)
    root = count + 2 * legs.source[ringed] + legs.outward[ringed]
    above = np.where(legs.parent[ringed] >= 0, legs.parent[ringed], root)
    outward = legs.outward[ringed]
    start = np.concatenate([np.where(outward, above, ringed), links.first])
    end = np.concatenate([np.where(outward, ringed, above), links.second])
    nodes, place = np.unique(np.concatenate([start, end]), return_inverse=True)
    start, end = place[:edges], place[edges:]
    along_trees = np.concatenate([mass[ringed], np.zeros(len(links))])
    coefficient = np.zeros(edges)
    laws: list[Law] = [Quadratic(coefficient)]
    change = layout.area_changes
    own = change.k * velocity_pressure(legs.density, 1.0 / (legs.density * change.area))
    for these_legs, items, numbers, first in (
        (legs, layout.items, ringed, 0),
        (links.legs, links.items, np.arange(len(links)), len(ringed)),
    ):
        part, more = leg_laws(these_legs, items, numbers, first + np.arange(len(numbers)))
        coefficient[first : first + len(numbers)] += part
        laws += more
    coefficient[: len(ringed)] += own[ringed]
    source = np.concatenate([legs.source[ringed], links.legs.source])
    drop, slope = np.zeros(edges), np.zeros(edges)
    typical = np.abs(along_trees)
    size = np.array([typical[source == one].max(initial=0.0) for one in range(len(layout.media))])
    typical = np.where(typical > 0.0, typical, 0.5 * size[source])
    typical = np.where(typical > 0.0, typical, 1.0)
    for law in laws:
        law.add(typical, drop, slope)
    lost = np.unique(source[~np.isfinite(drop) | ~np.isfinite(along_trees)])
    shut = np.isin(source, lost)
    kept = np.where(shut, 0.0, along_trees)
    network = Network(
        nodes=len(nodes),
        start=start,
        end=end,
        laws=laws,
        typical=np.where(np.isfinite(typical), typical, 1.0),
        inflow=_sums(start, kept, len(nodes)) - _sums(end, kept, len(nodes)),
        shut=shut,
    )
    found = solve(network, kept)
    flow = np.where(shut, np.nan, found.flow)
    circulating = mass.copy()
    circulating[ringed] = flow[: len(ringed)]
    return circulating, flow[len(ringed) :], found.converged


def _sums(owners: Ints, values: Floats, count: int) -> Floats:
    return np.bincount(owners, weights=values, minlength=count).astype(np.float64)


def leg_laws(legs: Legs, items: Items, numbers: Ints, edge: Ints) -> tuple[Floats, list[Law]]:
    """Return what legs drop over the square of their flow in kg/s, and their other laws, as those of edges.

    Pipe or duct with its fittings and items; neither devices nor junctions nor changes of area. The items are those on
    the legs themselves.
    """
    from budget.network.flows.laws import Friction, Power  # noqa: PLC0415

    place = np.full(len(legs), -1)
    place[numbers] = np.arange(len(numbers))
    on_leg = np.flatnonzero(items.carrier < len(legs))
    on_leg = on_leg[place[items.carrier[on_leg]] >= 0]
    one = velocity_pressure(legs.density, 1.0 / (legs.density * legs.area))  # velocity pressure at 1 kg/s
    coefficient = (legs.constant * one)[numbers]
    length = legs.length[numbers].copy()
    for number in on_leg.tolist():
        carrier, form = int(items.carrier[number]), int(items.form[number])
        value, each = float(items.value[number]), float(items.parallel[number])
        density = float(items.density[number])
        if form == K:
            coefficient[place[carrier]] += value * one[carrier] / each**2
        elif form == KV:
            coefficient[place[carrier]] += float(valve_drop(1.0 / density, value, density)) / each**2
        elif form == LENGTH:
            length[place[carrier]] += value / each**2
    friction = Friction(
        edge=edge,
        share=np.ones(len(numbers)),
        density=legs.density[numbers],
        viscosity=legs.viscosity[numbers],
        area=legs.area[numbers],
        diameter=legs.diameter[numbers],
        roughness=legs.roughness[numbers],
        laminar=legs.laminar[numbers],
        length=length * legs.stretch[numbers],
        per_reynolds=legs.per_reynolds[numbers],
        corrected=legs.corrected[numbers],
    )
    # A drop without the flow that it was stated at has a finding of its own.
    stated = on_leg[(items.form[on_leg] == DROP) & ~np.isnan(items.at[on_leg])]
    power = Power(
        edge[place[items.carrier[stated]]],
        items.value[stated],
        items.parallel[stated] * items.at[stated] * items.density[stated],
        items.exponent[stated],
    )
    return coefficient, [friction, power]
