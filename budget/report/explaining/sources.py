"""A source as calculations: its flow, its items, what it must deliver, its powers, and where the pressure goes."""

from __future__ import annotations

import math
from collections.abc import Iterator

from budget.description import Source
from budget.network import SourceResult
from budget.network.duty import held_part, index_paths
from budget.network.layout import neck_area
from budget.report.explaining.equipment import item_steps
from budget.report.explaining.legs import fluid_source
from budget.report.explaining.scene import Scene
from budget.report.explaining.writing import SPECIFIC_POWER, Step, calculation, factor, names, number
from budget.report.plain import plain
from budget.units import Dimension


def source_steps(scene: Scene, id_: str) -> Iterator[Step]:
    """Return every figure of a source."""
    source, result = scene.description.sources[id_], scene.budget.sources[id_]
    place = list(scene.description.sources).index(id_)
    carrier = len(scene.layout.legs) + len(scene.layout.terminals) + place
    yield Step("flow")
    yield from _flow(scene, result, place)
    if result.items:
        yield Step("items")
        yield from item_steps(scene, carrier)
    yield Step("required pressure")
    yield from _required(scene, result, place)
    yield Step("duty")
    yield from _duty(scene, source, result, place)
    yield Step("powers")
    yield from _powers(scene, source, result)
    if result.kind == "air":
        yield Step("external pressure")
        yield from _external(scene, source, result)
    yield Step("spent")
    kept = [(heading, value) for heading, value in result.spent.items() if value != 0.0]
    for heading, value in kept:
        allowed = result.budget.get(heading)
        source_text = "" if allowed is None else f"of a budget of {scene.write.pressure(allowed)}"
        yield calculation(heading, "", "", scene.write.pressure(value), source_text)
    formula = " + ".join(heading for heading, _ in kept)
    terms = [value for _, value in kept] or [0.0]
    yield scene.write.total("required", formula, terms, result.required, source="by heading, along the index circuit")


def _flow(scene: Scene, result: SourceResult, place: int) -> Iterator[Step]:
    write, supply = scene.write, scene.layout.media[place].supply
    hanging = list(scene.hanging(-1 - place))
    formula = f"m = {names((id_ for id_, _ in hanging), 'm({})')}" if hanging else "m: nothing hangs on it"
    flows = [flow for _, flow in hanging]
    yield write.total("mass flow", formula, flows, result.mass_flow, mass=True)
    rho = write.of(supply.density, Dimension.DENSITY)
    yield calculation("density", "rho", "", rho, fluid_source(scene, supply, "density"))
    numbers = f"{write.mass(result.mass_flow)} / {rho}"
    yield calculation("flow", "q = m / rho", numbers, write.of(result.flow, Dimension.FLOW), "at supply density")


def _required(scene: Scene, result: SourceResult, place: int) -> Iterator[Step]:
    """Return the largest circuits, of each side for a gas, what they have in static pressure, and required."""
    write, layout, circuits = scene.write, scene.layout, scene.run.circuits
    parts: list[tuple[str, float]] = []
    for path in index_paths(scene.run, place):
        name = plain(layout.terminals.ids[path.terminal])
        own = [(f"circuit({name})", float(circuits.circuit[path.terminal]))]
        zone = int(layout.terminals.zone[path.terminal])
        while layout.zones[zone].outer >= 0:
            own.append((scene.zone_name(zone), float(circuits.required[zone])))
            own.append(("largest circuit behind it", -float(circuits.largest[zone])))
            zone = layout.zones[zone].outer
        formula = " + ".join(text for text, _ in own).replace("+ largest", "- largest")
        title = scene.zone_name(path.zone) if result.kind == "air" else "largest circuit"
        total = float(circuits.required[path.zone])
        source = f"index terminal {name}, the largest circuit"
        yield write.total(title, formula, [value for _, value in own], total, source=source)
        parts.append((title, total))
    if result.kind == "air" and (result.items or not parts):
        parts.append(("items", result.items_drop))
    if result.kind == "air":
        formula = " + ".join(text for text, _ in parts)
        yield write.total("required", formula, [value for _, value in parts], result.required)
    else:
        yield calculation("required", "the largest circuit", "", write.pressure(result.required))


def _duty(scene: Scene, source: Source, result: SourceResult, place: int) -> Iterator[Step]:
    write, layout, drops = scene.write, scene.layout, scene.drops
    statics = [
        (plain(layout.topology.legs[leg].owner), float(drops.leg_static[leg]))
        for path in index_paths(scene.run, place)
        for leg in path.legs
        if drops.leg_static[leg] != 0.0
    ]
    statics += [
        (plain(layout.terminals.ids[path.terminal]), float(drops.terminal_static[path.terminal]))
        for path in index_paths(scene.run, place)
        if drops.terminal_static[path.terminal] != 0.0
    ]
    if statics:
        formula = " + ".join(f"static({name})" for name, _ in statics)
        yield write.total("static", formula, [value for _, value in statics], result.static)
    held = held_part(scene.run, place)
    rest = result.required - result.static - held
    if held:
        source_text = "base drops of holding devices on the index circuit and what is behind them"
        yield calculation("held constant", "H", "", write.pressure(held), source_text)
    formula = f"N = required{' - static' if statics else ''}{' - H' if held else ''}"
    terms = [result.required, *([-result.static] if statics else []), *([-held] if held else [])]
    yield write.total("that grows with the flow", formula, terms, rest)
    growth = 1.0 + source.flow_reserve
    numbers = f"1 + {number(source.flow_reserve)}"
    yield calculation("flow factor", "f = 1 + flow reserve", numbers, number(growth))
    inner, formula = f"{factor(write.pressure(rest))} x ({number(growth)})^2", "N x f^2"
    if held:
        inner, formula = f"({inner} + {write.pressure(held)})", f"({formula} + H)"
    numbers, formula = f"(1 + {number(source.reserve)}) x {inner}", f"(1 + reserve) x {formula}"
    if statics:
        static = write.pressure(result.static)
        numbers, formula = f"{static} + {numbers}", f"static + {formula}"
    duty = write.pressure(result.duty) + write.head(result.duty, result.fluid.density)
    yield calculation("duty", formula, numbers, duty)
    yield write.total("reserve", "duty - required", [result.duty, -result.required], result.reserve)
    flow = write.of(result.flow, Dimension.FLOW)
    duty_flow = write.of(result.duty_flow, Dimension.FLOW)
    yield calculation("duty flow", "q x f", f"{flow} x {number(growth)}", duty_flow)
    if result.available is not None:
        yield calculation("available", "", "", write.pressure(result.available), "as stated")
        yield write.total("in hand", "available - duty", [result.available, -result.duty], result.in_hand)
    if result.leakage is not None:
        yield Step("leakage", "", "", write.of(result.leakage, Dimension.FLOW), "of all ducts that state a class")


def _powers(scene: Scene, source: Source, result: SourceResult) -> Iterator[Step]:
    write = scene.write
    flow, duty = write.of(result.duty_flow, Dimension.FLOW), write.pressure(result.duty)
    hydraulic = write.power(result.hydraulic_power)
    yield calculation("hydraulic power", "duty flow x duty", f"{flow} x {duty}", hydraulic)
    if source.efficiency is None or result.shaft_power is None:
        return
    shaft = write.power(result.shaft_power)
    numbers = f"{hydraulic} / {number(source.efficiency)}"
    yield calculation("shaft power", "hydraulic power / efficiency", numbers, shaft)
    if source.motor_efficiency is None or result.electrical_power is None:
        return
    electrical = write.power(result.electrical_power)
    numbers = f"{shaft} / {number(source.motor_efficiency)}"
    yield calculation("electrical power", "shaft power / motor efficiency", numbers, electrical)
    shown = f"{number(result.sfp)} {SPECIFIC_POWER}"
    formula = "electrical power / duty flow"
    yield calculation("specific power", formula, f"{electrical} / {flow}", shown, "EN 16798-3:2017")


def _external(scene: Scene, source: Source, result: SourceResult) -> Iterator[Step]:
    write = scene.write
    if result.external_total is not None:
        inside = result.duty - result.external_total
        yield calculation("items inside the unit", "", "", write.pressure(inside), "those that state inside = true")
        formula = "duty - items inside the unit"
        yield write.total("external total", formula, [result.duty, -inside], result.external_total)
    if source.outlet is None or result.static_pressure is None or result.external_static is None:
        return
    area, density = neck_area(source.outlet), result.fluid.density
    outlet = result.duty - result.static_pressure
    flow, rho = write.of(result.duty_flow, Dimension.FLOW), write.of(density, Dimension.DENSITY)
    numbers = f"{rho} x ({flow} / {write.area(area) if math.isfinite(area) else '?'})^2 / 2"
    title = "velocity pressure at the outlet"
    formula = "pv = rho x (duty flow / A)^2 / 2"
    yield calculation(title, formula, numbers, write.pressure(outlet), plain(source.outlet.label))
    terms = [result.external_total or 0.0, -outlet]
    yield write.total("external static", "external total - pv", terms, result.external_static)
    terms = [result.duty, -outlet]
    yield write.total("fan static pressure", "duty - pv", terms, result.static_pressure, source="ISO 5801")
