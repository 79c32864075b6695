"""A section as calculations: its legs, what stands on it, its drop, and its place in the system."""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np

from budget.description import Run
from budget.network import DeviceResult, RunResult, SectionResult
from budget.network.circuits import margins_within
from budget.network.media import GRAVITY
from budget.physics.leakage import LEAKAGE_CLASSES
from budget.report.explaining.equipment import authority_steps, device_steps, item_steps
from budget.report.explaining.legs import cross_section, leg_steps
from budget.report.explaining.scene import Scene
from budget.report.explaining.writing import Step, calculation, number
from budget.report.plain import plain
from budget.units import Dimension

LEAKAGE_SOURCE = "EN 12237:2003, EN 1507:2006, by the classes of EN 16798-3:2017; f in L/(s m2), p in Pa, S in m2"


def section_steps(scene: Scene, id_: str) -> Iterator[Step]:
    """Return every figure of a section."""
    section, result = scene.description.sections[id_], scene.budget.sections[id_]
    legs = scene.layout.topology.section_legs[id_]
    yield from run_steps(scene, legs, section.run, result.run)
    if result.items:
        yield Step("items")
        yield from item_steps(scene, legs[0])
    yield from device_steps(scene, legs[0], result.device)
    yield Step("the section")
    yield from static_steps(scene, float(scene.layout.legs.rise[legs[0]]), float(scene.layout.legs.density[legs[0]]))
    yield drop_step(scene, result.run, section.run)
    yield from _sum_so_far(scene, result, legs)
    yield from _differential(scene, result, legs)
    yield _margin(scene, result, legs)
    served = f"the largest circuit of {plain(result.source)} runs through it" if result.index else "not on it"
    yield Step("index circuit", "", "", "yes" if result.index else "no", served)
    yield from authority_steps(scene, legs[0], result.authority, result.authority_low)


def run_steps(scene: Scene, legs: tuple[int, ...], run: Run, result: RunResult) -> Iterator[Step]:
    """Return the figures of the legs of a section or run-out."""
    yield Step("cross-section")
    yield from cross_section(scene.write, run.geometry, run.line)
    for leg, found in zip(legs, result.legs, strict=True):
        yield from leg_steps(scene, leg, run, found)
        yield from _leakage(scene, leg, run, result)


def _leakage(scene: Scene, leg: int, run: Run, result: RunResult) -> Iterator[Step]:
    """Return the leakage of a duct that states a class, at the mean static pressure in it."""
    if run.leakage is None or result.leakage is None:
        return
    write, layout, drops = scene.write, scene.layout, scene.drops
    outward = bool(layout.legs.outward[leg])
    there = float(scene.run.circuits.required[layout.legs.zone[leg]] - scene.run.circuits.leg_outside[leg])
    lost, pv = float(drops.leg_total[leg]), float(drops.velocity_pressure[leg])
    mean = there - 0.5 * lost
    static = mean - pv if outward else -mean - pv
    sign = "" if outward else "-"
    numbers = f"{sign}({write.pressure(there)} - {write.pressure(lost)} / 2) - {write.pressure(pv)}"
    formula = f"ps = {sign}(available at its start - its loss / 2) - pv"
    yield calculation("mean static pressure", formula, numbers, write.pressure(static))
    surface = 4.0 * float(layout.legs.area[leg]) / float(layout.legs.diameter[leg]) * float(layout.legs.length[leg])
    length = write.of(float(layout.legs.length[leg]), Dimension.LENGTH)
    diameter = write.of(float(layout.legs.diameter[leg]), Dimension.LENGTH, small=True)
    numbers = f"4 x {write.area(float(layout.legs.area[leg]))} / {diameter} x {length}"
    yield calculation("surface", "S = 4 x A / D x L", numbers, write.area(surface))
    numbers = f"1 L/s x {number(LEAKAGE_CLASSES[run.leakage])} x |{number(static)}|^0.65 x {number(surface)}"
    leakage = write.of(result.leakage, Dimension.FLOW)
    yield calculation(f"leakage, {run.leakage}", "f x |ps|^0.65 x S", numbers, leakage, LEAKAGE_SOURCE)


def static_steps(scene: Scene, rise: float, density: float) -> Iterator[Step]:
    """Return the static pressure of a rise; nothing where there is none."""
    if rise == 0.0:
        return
    write = scene.write
    rho, height = write.of(density, Dimension.DENSITY), write.of(rise, Dimension.LENGTH)
    shown = f"({height})" if height.startswith("-") else height
    numbers = f"{rho} x {write.gravity()} x {shown}"
    static = write.pressure(density * GRAVITY * rise)
    yield calculation("static", "rho x g x rise", numbers, static)


def drop_step(scene: Scene, result: RunResult, run: Run) -> Step:
    """Return the drop of a section or run-out as its sum."""
    both = " of both legs" if len(result.legs) > 1 else ""
    parts = [(f"friction{both}", result.friction)]
    if run.fittings or run.uses:
        parts.append((f"fittings{both}", result.fittings))
    parts += [("junctions", result.junction)] if result.junction != 0.0 else []
    parts += [("changes of area", result.transition)] if result.transition != 0.0 else []
    parts += [("items", result.items)] if result.items != 0.0 else []
    formula = " + ".join(name for name, _ in parts)
    density = result.mass_flow / result.flow if result.flow else None
    return scene.write.total("drop", formula, [value for _, value in parts], result.drop, density=density)


def _base(device: DeviceResult | None) -> list[tuple[str, float]]:
    return [] if device is None else [("device at base drop", device.base)]


def _sum_so_far(scene: Scene, result: SectionResult, legs: tuple[int, ...]) -> Iterator[Step]:
    """Return the sum along the largest circuit through a section, up to its downstream end."""
    layout = scene.layout
    title = "sum so far"
    parent = layout.topology.legs[legs[0]].parent
    if layout.legs.outward[legs[0]]:
        parts = []
        if parent >= 0:
            before = layout.topology.legs[parent].owner
            parts.append((f"sum({plain(before)})", scene.budget.sections[before].cumulative))
        parts += [("drop", result.run.drop), *_base(result.device)]
        parts += [("static", result.run.static)] if result.run.static != 0.0 else []
        formula = " + ".join(name for name, _ in parts)
        yield scene.write.total(title, formula, [value for _, value in parts], result.cumulative)
        return
    served = layout.served(legs[0])
    source = int(layout.legs.source[legs[0]])
    items = 0.0 if layout.topology.kinds[source] == "air" else float(scene.drops.source_items[source])
    circuits = scene.run.circuits.circuit[served]
    if not len(served) or np.isnan(circuits).all():
        yield calculation(title, "", "", "?")
        return
    largest = int(served[np.nanargmax(circuits)])
    formula = f"circuit({plain(layout.terminals.ids[largest])})"
    terms = [float(scene.run.circuits.circuit[largest])]
    if items:
        formula, terms = f"{formula} - items of {plain(result.source)}", [*terms, -items]
    for leg in layout.topology.chain(parent):
        if layout.topology.legs[leg].first:
            formula += f" - {plain(layout.topology.legs[leg].owner)}"
            terms.append(-float(scene.drops.leg_total[leg]))
    source_text = "along the largest circuit through it; what follows towards the source is taken off"
    yield scene.write.total(title, formula, terms, result.cumulative, source=source_text)


def _differential(scene: Scene, result: SectionResult, legs: tuple[int, ...]) -> Iterator[Step]:
    """Return what is available where a section is connected."""
    if result.differential is None:
        air = scene.layout.topology.kinds[int(scene.layout.legs.source[legs[0]])] == "air"
        why = "" if air else "one leg alone of a liquid circuit has none"
        yield Step("differential", "", "", "-", why or "can't be computed: a finding says why")
        return
    zone = int(scene.layout.legs.zone[legs[0]])
    parts = [(scene.zone_name(zone), float(scene.run.circuits.required[zone]))]
    items = scene.zone_items(zone)
    if items:
        parts.append((f"items of {plain(result.source)}", -items))
    for leg in legs:
        outside = float(scene.run.circuits.leg_outside[leg])
        if outside or math.isnan(outside):
            parts.append((f"{scene.layout.topology.legs[leg].side} legs outside it", -outside))
    formula = " - ".join(name for name, _ in parts)
    yield scene.write.total("differential", formula, [value for _, value in parts], result.differential)


def _margin(scene: Scene, result: SectionResult, legs: tuple[int, ...]) -> Step:
    """Return the least margin among the terminals that a section serves."""
    layout, circuits = scene.layout, scene.run.circuits
    least, found = math.inf, (-1, -1)
    for leg in legs:
        zone, served = int(layout.legs.zone[leg]), layout.served(leg)
        seen = margins_within(layout, zone, circuits.margin, circuits.zone_margin)[served]
        if len(seen) and not np.isnan(seen).any() and float(seen.min()) < least:
            least, found = float(seen.min()), (zone, int(served[int(np.argmin(seen))]))
    zone, terminal = found
    if terminal < 0 or math.isnan(result.margin):
        return calculation("margin", "", "", "?")
    required = float(circuits.required[zone])
    source = "the least of the margins of what it serves; none on the index circuit"
    inner = int(layout.terminals.zone[terminal])
    if inner == zone:
        name = plain(layout.terminals.ids[terminal])
        formula, held = f"{scene.zone_name(zone)} - circuit({name})", float(circuits.in_zone[terminal])
    else:
        while layout.zones[inner].outer != zone:
            inner = layout.zones[inner].outer
        formula = f"{scene.zone_name(zone)} - circuit up to the {scene.zone_name(inner)}, with it"
        held = float(circuits.held[inner])
    return scene.write.total("margin", formula, [required, -held], result.margin, source=source)
