"""A terminal as calculations: its flow, its drop, its run-out, and its circuit as the sum along its path."""

from __future__ import annotations

import math
from collections.abc import Iterator

from budget.description import Basis, Terminal
from budget.network import TerminalResult
from budget.network.arrays import DeviceUse
from budget.network.duty import path_legs
from budget.network.layout import neck_area
from budget.network.media import GRAVITY, medium_at, pascals
from budget.report.explaining.equipment import authority_steps, device_steps, item_steps
from budget.report.explaining.legs import fluid_source
from budget.report.explaining.scene import Scene
from budget.report.explaining.sections import drop_step, run_steps, static_steps
from budget.report.explaining.writing import Step, calculation, number, said
from budget.report.plain import plain
from budget.units import Dimension


def terminal_steps(scene: Scene, id_: str) -> Iterator[Step]:
    """Return every figure of a terminal."""
    terminal, result = scene.description.terminals[id_], scene.budget.terminals[id_]
    place = scene.layout.terminals.ids.index(id_)
    carrier = len(scene.layout.legs) + place
    yield Step("flow")
    yield from _flow(scene, terminal, result, place)
    yield Step("the terminal itself")
    yield from _own_drop(scene, terminal, result, place)
    yield from item_steps(scene, carrier)
    yield from device_steps(scene, carrier, result.device)
    if terminal.run is not None and result.run_out is not None:
        yield Step("run-out")
        legs = scene.layout.topology.run_out_legs[id_]
        yield from run_steps(scene, legs, terminal.run, result.run_out)
        yield drop_step(scene, result.run_out, terminal.run)
    yield from _circuit(scene, result, place)
    yield from _judged(scene, result, place)
    yield from authority_steps(scene, carrier, result.authority, result.authority_low)


def _flow(scene: Scene, terminal: Terminal, result: TerminalResult, place: int) -> Iterator[Step]:
    write = scene.write
    media = scene.layout.media[int(scene.layout.terminals.source[place])]
    supply, mass = media.supply, write.mass(result.mass_flow)
    rho = write.of(supply.density, Dimension.DENSITY)
    volume = write.of(result.flow, Dimension.FLOW)
    density = calculation("density", "rho", "", rho, fluid_source(scene, supply, "density"))
    if scene.layout.terminals.lone[place]:
        yield Step("mass flow", "that of the other side", "", mass, "it is alone on its side and states no flow")
    elif terminal.flow is not None and terminal.flow.basis is Basis.MASS:
        yield Step("mass flow", "m", "", mass, "as stated")
    elif terminal.flow is not None:
        yield density
        yield Step("flow", "q", "", volume, "as stated, at the supply temperature")
        yield calculation("mass flow", "m = rho x q", f"{rho} x {volume}", mass)
        return
    elif terminal.load is not None:
        back = media.back
        if terminal.return_temperature is not None:
            back = medium_at(scene.description.fluid, terminal.return_temperature)
        heats = [write.of(one.specific_heat, Dimension.SPECIFIC_HEAT) for one in (supply, back)]
        heat = write.of(0.5 * (supply.specific_heat + back.specific_heat), Dimension.SPECIFIC_HEAT)
        yield calculation(
            "specific heat",
            "cp = (cp supply + cp return) / 2",
            f"({heats[0]} + {heats[1]}) / 2",
            heat,
            fluid_source(scene, supply, "specific_heat"),
        )
        difference = write.of(abs(supply.temperature - back.temperature), Dimension.DIFFERENCE)
        load = write.of(terminal.load, Dimension.POWER)
        formula = "m = load / (cp x |supply - return|)"
        yield calculation("mass flow", formula, f"{load} / ({heat} x {difference})", mass, "load as stated")
    else:
        yield calculation("mass flow", "m", "", mass)
    yield density
    yield calculation("flow", "q = m / rho", f"{mass} / {rho}", volume, "at the supply temperature")


def _own_drop(scene: Scene, terminal: Terminal, result: TerminalResult, place: int) -> Iterator[Step]:
    """Return the total-pressure drop of the terminal itself, and its static part."""
    write, rows = scene.write, scene.layout.terminals
    density = float(rows.density[place])
    rho, flow = write.of(density, Dimension.DENSITY), write.of(result.mass_flow / density, Dimension.FLOW)
    scaled, ratio = "", ""
    if not math.isnan(rows.drop_at[place]):
        at = write.of(float(rows.drop_at[place]), Dimension.FLOW)
        scaled = f" x ({flow} / {at})^{number(float(rows.exponent[place]))}"
        ratio = " x (q / at)^exponent"
    drop = write.pressure(result.drop)
    if terminal.static_drop is not None:
        area = neck_area(terminal.neck)
        pv = 0.5 * density * (result.mass_flow / density / area) ** 2
        numbers = f"{rho} x ({flow} / {write.area(area) if math.isfinite(area) else '?'})^2 / 2"
        title = "velocity pressure in the neck"
        yield calculation(title, "pv = rho x (q / A)^2 / 2", numbers, write.pressure(pv), "at design flow")
        part = f"{write.pressure(float(rows.static_drop[place]))}{scaled}"
        discharge = bool(rows.discharge[place])
        numbers = f"{part} + {write.pressure(pv)}" if discharge else f"|{part}| - {write.pressure(pv)}"
        formula = f"static drop{ratio} + pv" if discharge else f"|static drop{ratio}| - pv"
        yield calculation("drop", formula, numbers, drop, "total from the static drop that makers print")
    elif terminal.drop is not None:
        numbers = f"{write.pressure(float(rows.drop[place]))}{scaled}" if scaled else ""
        formula = f"drop{ratio}" if scaled else ""
        yield calculation("drop", formula, numbers, drop, "as stated" if scaled else "as stated, at design flow")
    else:
        yield calculation("drop", "", "", drop, "none is stated")
    yield from static_steps(scene, float(rows.rise[place]), density)
    if terminal.outlet_pressure is not None and result.static:
        outlet = pascals(terminal.outlet_pressure, density)
        yield Step("outlet pressure", "", "", write.pressure(outlet), "as stated, gauge")
        terms = [density * GRAVITY * float(rows.rise[place]), outlet]
        yield write.total("static part", "rho x g x rise + outlet pressure", terms, result.static)


def _circuit(scene: Scene, result: TerminalResult, place: int) -> Iterator[Step]:
    """Return what each leg of the path adds to the circuit, and the sum."""
    write, layout, drops = scene.write, scene.layout, scene.drops
    yield Step("circuit")
    parts: list[tuple[str, float]] = []
    source = int(layout.terminals.source[place])
    items = 0.0 if layout.topology.kinds[source] == "air" else float(drops.source_items[source])
    if items or math.isnan(items):
        parts.append((f"items of {plain(result.source)}", items))
    for leg in path_legs(scene.run, place):
        own = [("loss of the leg", scene.leg_sum(leg))]
        own += [("items", float(drops.leg_items[leg]))] if drops.leg_items[leg] != 0.0 else []
        own += [("device at base drop", float(drops.leg_base[leg]))] if drops.leg_base[leg] != 0.0 else []
        own += [("static", float(drops.leg_static[leg]))] if drops.leg_static[leg] != 0.0 else []
        formula = " + ".join(name for name, _ in own)
        total = float(drops.leg_total[leg])
        yield write.total(scene.name(leg), formula, [value for _, value in own], total)
        parts.append((scene.name(leg), total))
    own = [("drop", result.drop)]
    own += [("items", result.items_drop)] if result.items else []
    own += [("device at base drop", result.device.base)] if result.device else []
    own += [("static", result.static)] if result.static else []
    total = float(drops.terminal_total[place])
    formula = " + ".join(name for name, _ in own)
    yield write.total(f"{plain(result.id)} itself", formula, [value for _, value in own], total)
    parts.append((f"{plain(result.id)} itself", total))
    formula = " + ".join(name for name, _ in parts)
    density = result.mass_flow / result.flow if result.flow else None
    yield write.total("circuit", formula, [value for _, value in parts], result.circuit, density=density)


def _judged(scene: Scene, result: TerminalResult, place: int) -> Iterator[Step]:
    """Return required, margin, excess and differential."""
    write, layout, circuits = scene.write, scene.layout, scene.run.circuits
    zone = int(layout.terminals.zone[place])
    required, within = float(circuits.required[zone]), float(circuits.in_zone[place])
    name = scene.zone_name(zone)
    yield calculation(name, "", "", write.pressure(required), said(_why(scene, zone)))
    if layout.zones[zone].outer >= 0:
        outside = result.circuit - within
        formula = "circuit - all outside the device that holds the differential"
        yield write.total("circuit behind the device", formula, [result.circuit, -outside], within)
    source = "on the index circuit" if result.index else ""
    yield write.total("margin", f"{name} - circuit", [required, -within], result.margin, source=source)
    path = set(path_legs(scene.run, place))
    taken = [
        (plain(use.device.name), float(scene.run.take_up.taken[number]))
        for number, use in enumerate(layout.devices)
        if _takes(scene, use, place, path)
    ]
    formula = " - ".join(["margin", *(f"take-up of {device}" for device, _ in taken)])
    terms = [result.margin, *(-value for _, value in taken)]
    yield write.total("excess", formula, terms, result.excess, source="what no device takes up")
    parts = [(name, required)]
    items = scene.zone_items(zone)
    if items:
        parts.append((f"items of {plain(result.source)}", -items))
    for end, side in ((int(layout.terminals.out[place]), "way out"), (int(layout.terminals.back[place]), "way back")):
        if end < 0:
            continue
        if layout.legs.run_out[end]:
            parts.append((side, -float(circuits.leg_outside[end])))
        elif int(layout.legs.zone[end]) == zone:
            parts.append((side, -float(circuits.along[end])))
    formula = " - ".join(part for part, _ in parts)
    source = "at its connection, where its run-out begins"
    yield write.total("differential", formula, [value for _, value in parts], result.differential, source=source)


def _why(scene: Scene, zone: int) -> str:
    if scene.layout.zones[zone].outer >= 0:
        return "it takes the place of required behind the device"
    return "the largest circuit of that side" if "," in scene.zone_name(zone) else "the largest circuit"


def _takes(scene: Scene, use: DeviceUse, place: int, path: set[int]) -> bool:
    """Whether a device's take-up comes off the margin of a terminal: it stands on its path within its zone."""
    if use.terminal:
        return use.number == place
    zones = scene.layout.legs.zone, scene.layout.terminals.zone
    return use.number in path and use.zone < 0 and bool(zones[0][use.number] == zones[1][place])
