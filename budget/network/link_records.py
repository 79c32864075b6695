"""One record a link, read from the arrays."""

from __future__ import annotations

import math

from budget.description.schema import HEADINGS
from budget.network.arrays import Loss
from budget.network.computed import Computed
from budget.network.results import ItemResult, LegResult, LinkResult, LossResult, RunResult
from budget.physics.elbows import reynolds_factor
from budget.physics.friction import REGIMES


def link_result(run: Computed, id_: str) -> LinkResult:
    """Return the result of one link."""
    links, legs = run.layout.links, run.layout.links.legs
    numbers, link = list(links.of[id_]), run.layout.description.links[id_]
    first, source = numbers[0], links.found[numbers[0]].source
    mass, geometry = float(run.drops.links.mass[first]), link.run.geometry
    items = tuple(
        ItemResult(item.name, float(run.drops.link_items[number]), HEADINGS[heading], item.inside, item.control)
        for number, (item, heading) in enumerate(zip(links.items.items, links.items.heading.tolist(), strict=True))
        if links.items.carrier[number] == first
    )
    flowing, items_drop = run.drops.links, math.fsum(item.drop for item in items)
    friction, fittings = math.fsum(flowing.friction[numbers]), math.fsum(flowing.fittings[numbers])
    records = tuple(_leg(run, number) for number in numbers)
    return LinkResult(
        id=id_,
        source=list(run.layout.description.sources)[source],
        run=RunResult(
            flow=mass / run.layout.media[source].supply.density,
            mass_flow=mass,
            bore=geometry.bore if geometry else None,
            width=geometry.width if geometry and geometry.shape != "round" else None,
            height=geometry.height if geometry and geometry.shape != "round" else None,
            hydraulic_diameter=float(legs.diameter[first]),
            area=float(legs.area[first]),
            k_total=math.fsum(loss.count * loss.k for loss in records[0].losses),
            friction=friction,
            fittings=fittings,
            junction=0.0,
            transition=0.0,
            items=items_drop,
            static=0.0,
            drop=friction + fittings + items_drop,
            leakage=None,
            legs=records,
        ),
        items=items,
    )


def _leg(run: Computed, number: int) -> LegResult:
    links, flowing = run.layout.links, run.drops.links
    speed, pv, re = (float(part[number]) for part in (flowing.velocity, flowing.velocity_pressure, flowing.reynolds))
    sign = -1.0 if flowing.mass[number] < 0.0 else 1.0
    return LegResult(
        leg=links.found[number].side,
        mass_flow=float(flowing.mass[number]),
        velocity=speed,
        velocity_pressure=pv,
        reynolds=re,
        regime=REGIMES[flowing.regime[number]],
        friction_factor=float(flowing.factor[number]),
        gradient=float(flowing.gradient[number]),
        friction=float(flowing.friction[number]),
        junction=0.0,
        losses=losses_at(links.legs.losses[number], re, sign * pv, speed),
    )


def losses_at(losses: tuple[Loss, ...], re: float, pv: float, velocity: float) -> tuple[LossResult, ...]:
    """Return the fittings of a leg at its Reynolds number and velocity pressure, which has the sign of the flow."""
    found = []
    for loss in losses:
        k = loss.constant + (loss.per_reynolds / re if re > 0 and loss.per_reynolds else 0.0)
        if loss.corrected:
            k += loss.corrected * float(reynolds_factor(re))
        drop, origin = loss.count * k * pv, (loss.method, loss.source, loss.known_from, loss.reference)
        found.append(LossResult(loss.name, loss.count, k, drop, *origin, velocity))
    return tuple(found)
