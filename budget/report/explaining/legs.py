"""A leg as calculations: its flow, its fluid, its friction, its fittings, its junction, its change of area."""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np

from budget.catalogue import duct_line, fluid, pipe_line
from budget.catalogue.provenance import how_known
from budget.description import Geometry, Line, Run
from budget.network import LegResult, LossResult
from budget.network.media import Medium
from budget.physics.elbows import reynolds_factor
from budget.physics.friction import LAMINAR_LIMIT, TURBULENT_LIMIT, colebrook, laminar_factor
from budget.physics.shapes import heyt_diaz, huebscher
from budget.physics.smooth import smooth_step
from budget.report.explaining.scene import Scene
from budget.report.explaining.writing import Step, Writer, calculation, factor, names, number, product, said
from budget.report.plain import plain
from budget.units import Dimension

MOST_TERMS = 12
"""Flows that a diversified sum lists one by one."""

DARCY = "Darcy-Weisbach"
COLEBROOK = "Colebrook-White law: Colebrook (1939), J. Inst. Civ. Eng. 11"
HAGEN = "laminar flow: Hagen-Poiseuille in a round leg; others Shah and London (1978), flat ovals numerical"
BLEND = "between the two laws, as no published law is reliable there; common practice"
FLEXIBLE = "Abushakra, Walker and Sherman (2004), ASHRAE Transactions 110"


def cross_section(write: Writer, geometry: Geometry | None, line: Line | None) -> Iterator[Step]:
    """Return the area and the hydraulic diameter of a section or run-out."""
    if geometry is None:
        yield Step("size", result="-", source="not known: a finding says why")
        return
    width, height = geometry.width, geometry.height
    small, large = sorted((width, height))
    w, h, a, b = (write.of(side, Dimension.LENGTH, small=True) for side in (width, height, small, large))
    source = said(geometry.label, bore_source(line) if geometry.shape == "round" else "clear sides as stated")
    if geometry.shape == "round":
        area = math.pi / 4.0 * width**2
        yield Step("bore", "D", "", w, source)
        yield calculation("area", "A = pi / 4 x D^2", f"pi / 4 x ({w})^2", write.area(area))
        return
    if geometry.shape == "rectangular":
        area, perimeter = width * height, 2.0 * (width + height)
        yield calculation("area", "A = W x H", f"{w} x {h}", write.area(area), source)
        formula, numbers = "D = 2 x W x H / (W + H)", f"2 x {w} x {h} / ({w} + {h})"
    else:
        area = math.pi / 4.0 * small**2 + small * (large - small)
        perimeter = math.pi * small + 2.0 * (large - small)
        formula = "A = pi / 4 x a^2 + a x (b - a)"
        yield calculation("area", formula, f"pi / 4 x ({a})^2 + {a} x ({b} - {a})", write.area(area), source)
        formula = "D = 4 x A / (pi x a + 2 x (b - a))"
        numbers = f"4 x {write.area(area)} / (pi x {a} + 2 x ({b} - {a}))"
    diameter = write.of(4.0 * area / perimeter, Dimension.LENGTH, small=True)
    yield calculation("hydraulic diameter", formula, numbers, diameter)
    equal = huebscher(width, height) if geometry.shape == "rectangular" else heyt_diaz(width, height)
    source = "Huebscher (1948)" if geometry.shape == "rectangular" else "Heyt and Diaz (1975)"
    shown = write.of(float(equal), Dimension.LENGTH, small=True)
    yield Step("round duct of equal friction", result=shown, source=f"for information, no drop rests on it; {source}")


def bore_source(line: Line | None) -> str:
    """Say where the bores of a line come from."""
    listed = pipe_line(line.catalogue) if line is not None and line.kind == "pipe" and line.catalogue else None
    if listed is None:
        return stated_in(line)
    return f"{listed.name}: {listed.source}, {how_known(listed.known_from)}"


def stated_in(line: Line | None) -> str:
    """Say where what a line states of its own stands."""
    if line is None:
        return "as stated"
    where = f"stated in [{line.kind}.{line.name}]"
    return where + (f" of {line.origin}" if line.origin else "")


def roughness_source(line: Line | None) -> str:
    """Say where the roughness of a line comes from."""
    if line is None or line.catalogue is None:
        return said(stated_in(line), line.source if line else "")
    if line.kind == "pipe":
        pipe = pipe_line(line.catalogue)
        if pipe is not None and pipe.roughness == line.roughness:
            known = how_known(pipe.roughness_known_from or pipe.known_from)
            return f"{pipe.name}: {pipe.roughness_source or pipe.source}, {known}"
    else:
        duct = duct_line(line.catalogue)
        if duct is not None and duct.roughness == line.roughness:
            return f"{duct.name}: {duct.source}, {how_known(duct.known_from)}"
    return stated_in(line)


def leg_steps(scene: Scene, leg: int, run: Run, result: LegResult) -> Iterator[Step]:
    """Return every figure of one leg, from its flow to what it loses."""
    yield Step(f"{scene.name(leg)} leg")
    yield from _flow(scene, leg)
    yield from _friction(scene, leg, run, result)
    yield from _fittings(scene, leg, result)
    yield from _joints(scene, leg, result)
    drops = scene.drops
    parts = {"friction": drops.friction, "fittings": drops.fittings, "junction": drops.junction}
    parts["change of area"] = drops.transition
    kept = [(name, float(values[leg])) for name, values in parts.items() if values[leg] != 0.0] or [("friction", 0.0)]
    formula = " + ".join(name for name, _ in kept)
    yield scene.write.total("loss of the leg", formula, [value for _, value in kept], scene.leg_sum(leg))


def _flow(scene: Scene, leg: int) -> Iterator[Step]:
    write, layout, legs = scene.write, scene.layout, scene.layout.legs
    mass = float(scene.drops.leg_mass[leg])
    diversity = float(legs.diversity[leg])
    if scene.layout.links.ringed[leg]:
        source = "from solving its ring: the pressures balance around every loop"
        yield Step("mass flow", "m", "", write.mass(mass), source)
    elif math.isnan(diversity):
        hanging = list(scene.hanging(leg))
        formula = f"m = {names((id_ for id_, _ in hanging), 'm({})')}" if hanging else "m: nothing hangs on it"
        yield write.total("mass flow", formula, [flow for _, flow in hanging], mass, mass=True)
    else:
        served = [(layout.terminals.ids[n], float(scene.drops.terminal_mass[n])) for n in layout.served(leg).tolist()]
        whole = math.fsum(flow for _, flow in served)
        if len(served) <= MOST_TERMS:
            formula = f"M = {names((id_ for id_, _ in served), 'm({})')}"
            yield write.total("undiversified flow", formula, [flow for _, flow in served], whole, mass=True)
        else:
            source = f"that of the {len(served)} terminals that it serves"
            yield Step("undiversified flow", "M", "", write.mass(whole), source)
        numbers = f"{number(diversity)} x {write.mass(whole)}"
        yield calculation("mass flow", "m = diversity x M", numbers, write.mass(mass))
    medium = _medium(scene, leg)
    yield calculation(
        "density", "rho", "", write.of(medium.density, Dimension.DENSITY), fluid_source(scene, medium, "density")
    )
    yield calculation(
        "viscosity", "mu", "", write.of(medium.viscosity, Dimension.VISCOSITY), fluid_source(scene, medium, "viscosity")
    )
    density, area = write.of(medium.density, Dimension.DENSITY), float(legs.area[leg])
    flow = write.of(mass / medium.density, Dimension.FLOW)
    yield calculation("volume flow", "q = m / rho", f"{write.mass(mass)} / {density}", flow)
    velocity = write.of(float(scene.drops.velocity[leg]), Dimension.VELOCITY)
    shown = write.area(area) if math.isfinite(area) else "?"
    if mass < 0.0:
        yield calculation("velocity", "v = |q| / A", f"|{flow}| / {shown}", velocity)
    else:
        yield calculation("velocity", "v = q / A", f"{flow} / {shown}", velocity)
    pressure = write.pressure(float(scene.drops.velocity_pressure[leg]))
    yield calculation("velocity pressure", "pv = rho x v^2 / 2", f"{density} x ({velocity})^2 / 2", pressure)


def _back(scene: Scene, leg: int) -> str:
    """Return the sign of what flows the other way, for formula and numbers: its losses are negative."""
    return "-" if scene.drops.leg_mass[leg] < 0.0 else ""


def _medium(scene: Scene, leg: int) -> Medium:
    media = scene.layout.media[int(scene.layout.legs.source[leg])]
    return media.supply if scene.layout.legs.outward[leg] else media.back


def fluid_source(scene: Scene, medium: Medium, wanted: str) -> str:
    """Say of which fluid at which temperature a property is, by which correlation and from where."""
    stated = scene.description.fluid
    listed = fluid(stated.name) if stated.name else None
    if listed is None:
        return "the fluid is not stated"
    at = "" if math.isnan(medium.temperature) else f" at {scene.write.of(medium.temperature, Dimension.TEMPERATURE)}"
    kept = (wanted.replace("_", " "), f"by {stated.concentration_by}", "all")
    found = next((one for one in listed.properties if one.name in kept), None)
    glycol = f" {number((stated.concentration or 0.0) * 100.0)} % by {stated.concentration_by}"
    what = f"{listed.name}{glycol if stated.concentration_by else ''}{at}"
    return what if found is None else f"{what}; {found.correlation}: {found.source}, {how_known(found.known_from)}"


def _friction(scene: Scene, leg: int, run: Run, result: LegResult) -> Iterator[Step]:
    write, legs, drops = scene.write, scene.layout.legs, scene.drops
    re, f = float(drops.reynolds[leg]), float(drops.factor[leg])
    density = write.of(float(legs.density[leg]), Dimension.DENSITY)
    velocity = write.of(float(drops.velocity[leg]), Dimension.VELOCITY)
    diameter = write.of(float(legs.diameter[leg]), Dimension.LENGTH, small=True)
    viscosity = write.of(float(legs.viscosity[leg]), Dimension.VISCOSITY)
    numbers = f"{density} x {velocity} x {diameter} / {viscosity}"
    yield calculation("Reynolds number", "Re = rho x v x D / mu", numbers, number(re))
    yield Step("regime", "", "", result.regime, "laminar below Re 2300, turbulent above 4000")
    roughness = float(legs.roughness[leg])
    relative = roughness / float(legs.diameter[leg])
    rough = write.of(roughness, Dimension.LENGTH, small=True)
    source = plain(roughness_source(run.line))
    yield calculation("relative roughness", "e = roughness / D", f"{rough} / {diameter}", number(relative), source)
    yield from _factor(re, relative, float(legs.laminar[leg]), f)
    stretch = float(legs.stretch[leg])
    if stretch != 1.0:
        millimetres = number(float(legs.diameter[leg]) * 1000.0)
        numbers = f"1 + 0.58 x {number(run.compression * 100.0)} x exp(-0.00496 x {millimetres})"
        formula = "F = 1 + 0.58 x r x exp(-0.00496 x D), r in %, D in mm"
        yield calculation("factor of flexible duct", formula, numbers, number(stretch), FLEXIBLE)
    gradient = write.of(float(drops.gradient[leg]), Dimension.GRADIENT)
    numbers = f"{product(number(stretch), number(f))} x {density} x ({velocity})^2 / (2 x {diameter})"
    formula = f"R = {'F x ' if stretch != 1.0 else ''}f x rho x v^2 / (2 x D)"
    yield calculation("gradient", formula, numbers, gradient, DARCY)
    length = write.of(float(legs.length[leg]), Dimension.LENGTH)
    back, friction = _back(scene, leg), write.pressure(float(drops.friction[leg]))
    yield calculation("friction", f"{back}R x L", f"{back}{gradient} x {length}", friction)


def _factor(re: float, relative: float, constant: float, f: float) -> Iterator[Step]:
    """Return the friction factor by the law of its regime; between the two laws, both and their blend."""
    if re == 0.0:
        yield Step("friction factor", "nothing flows", "", number(f))
        return
    low, high = "friction factor", "friction factor"
    between = LAMINAR_LIMIT <= re <= TURBULENT_LIMIT
    if between:
        low, high = "laminar factor", "turbulent factor"
    laminar = float(laminar_factor(re, constant))
    turbulent = float(colebrook(re, relative)) if re >= LAMINAR_LIMIT else math.nan
    if re <= TURBULENT_LIMIT:
        yield calculation(low, "f = C / Re", f"{number(constant)} / {number(re)}", number(laminar), HAGEN)
    if not re < LAMINAR_LIMIT:
        inner = f"{number(relative)} / 3.7 + 2.51 / ({number(re)} x sqrt({number(turbulent)}))"
        formula = "1 / sqrt(f) = -2 x log10(e / 3.7 + 2.51 / (Re x sqrt(f)))"
        yield calculation(high, formula, f"1 / (2 x log10({inner}))^2", number(turbulent), COLEBROOK)
    if not between:
        return
    share = (re - LAMINAR_LIMIT) / (TURBULENT_LIMIT - LAMINAR_LIMIT)
    weight = float(smooth_step(re, LAMINAR_LIMIT, TURBULENT_LIMIT))
    numbers = f"({number(re)} - 2300) / (4000 - 2300)"
    yield calculation("place between the laws", "s = (Re - 2300) / (4000 - 2300)", numbers, number(share))
    numbers = f"({number(share)})^2 x (3 - 2 x {number(share)})"
    yield calculation("weight of the turbulent law", "w = s^2 x (3 - 2 x s)", numbers, number(weight))
    numbers = f"{number(laminar)} + {number(weight)} x ({number(turbulent)} - {number(laminar)})"
    formula = "f = laminar + w x (turbulent - laminar)"
    yield calculation("friction factor", formula, numbers, number(f), BLEND)


def _fittings(scene: Scene, leg: int, result: LegResult) -> Iterator[Step]:
    """Return the loss of each fitting of a leg, and their sum."""
    write = scene.write
    pressure = write.pressure(result.velocity_pressure)
    for place, loss in enumerate(result.losses):
        behind = scene.layout.legs.losses[leg][place]
        title, source = f"{loss.count} {plain(loss.name)}", _loss_source(loss)
        if (behind.per_reynolds or behind.corrected) and result.reynolds > 0.0:
            yield _coefficient(f"K of {plain(loss.name)}", loss, behind.constant, behind.per_reynolds, behind.corrected,
                               result.reynolds)  # fmt: skip
        back = _back(scene, leg)
        numbers = f"{back}{loss.count} x {factor(number(loss.k))} x {pressure}"
        yield calculation(title, f"{back}n x K x pv", numbers, write.pressure(loss.drop), source)
    total = float(scene.drops.fittings[leg])
    if len(result.losses) > 1:
        formula = " + ".join(plain(loss.name) for loss in result.losses)
        yield write.total("fittings", formula, [loss.drop for loss in result.losses], total)
    elif math.isnan(total) and not result.losses:
        yield calculation("fittings", "", "", "?")


def _coefficient(
    title: str, loss: LossResult, constant: float, per_reynolds: float, corrected: float, re: float
) -> Step:
    """Return a coefficient that depends on the Reynolds number."""
    numbers, formula = number(constant), "K = constant"
    if per_reynolds:
        formula += " + K1 / Re"
        numbers += f" + {factor(number(per_reynolds))} / {number(re)}"
    if corrected:
        formula += " + K90 x factor of Re"
        numbers += f" + {factor(number(corrected))} x {number(float(reynolds_factor(re)))}"
    return calculation(title, formula, numbers, number(loss.k), _loss_source(loss))


def _loss_source(loss: LossResult) -> str:
    known = how_known(loss.known_from) if loss.known_from else ""
    return said(loss.method, ", ".join(filter(None, (loss.source, known))), f"on the {loss.reference}")


def _joints(scene: Scene, leg: int, result: LegResult) -> Iterator[Step]:
    """Return the leg's part of the junction that it hangs on, and its change of area."""
    joints = list(result.joints)
    change = joints.pop() if joints and scene.layout.area_changes.k[leg] != 0.0 else None
    if joints:
        yield from _junction(scene, leg, joints[0])
    if change is not None:
        yield from _area_change(scene, leg, change)


def _junction(scene: Scene, leg: int, loss: LossResult) -> Iterator[Step]:
    write, legs, junctions, drops = scene.write, scene.layout.legs, scene.layout.junctions, scene.drops
    is_branch, is_straight = junctions.branch == leg, junctions.straight == leg
    at = np.flatnonzero((is_branch & junctions.branch_counts) | (is_straight & junctions.straight_counts))
    if not len(at):
        yield calculation("junction", plain(loss.name), "", write.pressure(loss.drop), _loss_source(loss))
        return
    place = int(at[0])
    branch, straight, combined = (
        int(ends[place]) for ends in (junctions.branch, junctions.straight, junctions.combined)
    )
    owners = [plain(scene.layout.topology.legs[one].owner) for one in (branch, straight)]
    first, second = (float(drops.leg_mass[one]) for one in (branch, straight))
    both = f"{write.mass(first)} + {write.mass(second)}"
    whole = first + second
    ratio = first / whole if whole > 0.0 else 0.0
    formula = f"m({owners[0]}) / (m({owners[0]}) + m({owners[1]}))"
    if whole > 0.0:
        yield calculation("flow ratio of the junction", formula, f"{write.mass(first)} / ({both})", number(ratio))
    areas = write.area(float(legs.area[branch])), write.area(float(legs.area[combined]))
    name = plain(scene.layout.topology.legs[combined].owner)
    area_ratio = number(float(junctions.area_ratio[place]))
    formula = f"A({owners[0]}) / A({name})"
    yield calculation("area ratio of the junction", formula, f"{areas[0]} / {areas[1]}", area_ratio)
    density = write.of(float(legs.density[combined]), Dimension.DENSITY)
    velocity = write.of(loss.reference_velocity, Dimension.VELOCITY)
    numbers = f"({both}) / ({density} x {areas[1]})"
    formula = f"vc = (m({owners[0]}) + m({owners[1]})) / (rho x A({name}))"
    yield calculation("velocity of the combined flow", formula, numbers, velocity)
    source = said(f"{loss.method} at flow ratio {number(ratio)}, area ratio {area_ratio}", _loss_source(loss))
    yield calculation("coefficient of the junction", plain(loss.name), "", number(loss.k), source)
    numbers = f"{factor(number(loss.k))} x {density} x ({velocity})^2 / 2"
    yield calculation("junction", "K x rho x vc^2 / 2", numbers, write.pressure(loss.drop))


def _area_change(scene: Scene, leg: int, loss: LossResult) -> Iterator[Step]:
    write, legs = scene.write, scene.layout.legs
    area = write.area(float(scene.layout.area_changes.area[leg]))
    density = write.of(float(legs.density[leg]), Dimension.DENSITY)
    mass, velocity = write.mass(float(scene.drops.leg_mass[leg])), write.of(loss.reference_velocity, Dimension.VELOCITY)
    back = _back(scene, leg)
    size, symbol = (f"|{mass}|", "|m|") if back else (mass, "m")
    numbers = f"{size} / ({density} x {area})"
    yield calculation("velocity in the smaller area", f"vs = {symbol} / (rho x As)", numbers, velocity)
    parent = scene.layout.topology.legs[leg].parent
    sizes = ""
    if parent >= 0:
        wide = (legs.area[leg] > legs.area[parent]) == bool(legs.outward[leg])
        sizes = f"{'enlargement' if wide else 'contraction'} between {scene.name(parent)} and {scene.name(leg)}"
    yield calculation("coefficient of the change", "K", "", number(loss.k), said(sizes, _loss_source(loss)))
    numbers = f"{back}{factor(number(loss.k))} x {density} x ({velocity})^2 / 2"
    yield calculation("change of area", f"{back}K x rho x vs^2 / 2", numbers, write.pressure(loss.drop))
