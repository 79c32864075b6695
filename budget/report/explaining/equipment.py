"""What stands in line as calculations: items, balancing devices, control items and their authority."""

from __future__ import annotations

import dataclasses
import math
from collections.abc import Iterator
from itertools import pairwise

from budget.description import Item
from budget.network import DeviceResult
from budget.network.arrays import DeviceUse
from budget.network.authority import held_differential, only_its_flow
from budget.network.equipment import DROP, KV, K
from budget.network.media import pascals
from budget.report.explaining.scene import Scene
from budget.report.explaining.writing import Step, calculation, number, said
from budget.report.plain import plain
from budget.units import Dimension

KV_SOURCE = "IEC 60534-2-1; Kv in m3/h at 1 bar and 1000 kg/m3"
_LOG_STEP = "on the logarithm, as setting tables bend"


def item_steps(scene: Scene, carrier: int) -> Iterator[Step]:
    """Return the drop of every item that a leg, terminal or source carries, and their sum."""
    numbers = scene.items_of(carrier)
    for place in numbers:
        step = _item(scene, place)
        if step.numbers and _carried(scene, carrier) < 0.0:  # what flows the other way loses the other way
            step = dataclasses.replace(step, formula=f"-{step.formula}", numbers=f"-{step.numbers}")
        yield step
    if len(numbers) > 1:
        drops = [float(scene.drops.item_drop[place]) for place in numbers]
        formula = " + ".join(plain(scene.layout.items.items[place].name) for place in numbers)
        yield scene.write.total("items", formula, drops, math.fsum(drops))


def _item(scene: Scene, place: int) -> Step:
    items, write = scene.layout.items, scene.write
    item, density = items.items[place], float(items.density[place])
    mass = abs(_carried(scene, int(items.carrier[place])))
    drop, form, value = write.pressure(float(scene.drops.item_drop[place])), int(items.form[place]), items.value[place]
    flow, rho = write.of(mass / density, Dimension.FLOW), write.of(density, Dimension.DENSITY)
    count = int(items.parallel[place])
    shared = flow if count == 1 else f"{flow} / {count}"
    source = said(f"counts as {_heading(scene, place)}", f"{count} in parallel" if count > 1 else "")
    name = plain(item.name)
    if math.isnan(value):
        return calculation(name, "", "", "?")
    if form == KV:
        numbers = f"1 bar x ({shared} / {number(value)} m3/h)^2 x {rho} / 1000 kg/m3"
        formula = f"1 bar x (q{_each(count)} / Kv)^2 x rho / 1000 kg/m3"
        return calculation(name, formula, numbers, drop, said(KV_SOURCE, source))
    if form == DROP:
        return _stated_drop(scene, place, shared, source)
    if form == K:
        pv, said_of = _reference(scene, int(items.reference[place]), float(items.neck[place]), flow, rho)
        numbers = f"{number(value)} x {pv}" + (f" / {count}^2" if count > 1 else "")
        return calculation(name, f"k x pv{_square(count)}", numbers, drop, said("as stated", said_of, source))
    reference = int(items.reference[place])
    gradient = write.of(float(scene.drops.gradient[reference]) if reference >= 0 else math.nan, Dimension.GRADIENT)
    numbers = f"{write.of(value, Dimension.LENGTH)} x {gradient}" + (f" / {count}^2" if count > 1 else "")
    said_of = f"equivalent length in {scene.name(reference)}" if reference >= 0 else ""
    return calculation(name, f"L x R{_square(count)}", numbers, drop, said("as stated", said_of, source))


def _each(count: int) -> str:
    return "" if count == 1 else " / n"


def _square(count: int) -> str:
    return "" if count == 1 else " / n^2"


def _carried(scene: Scene, carrier: int) -> float:
    """Return the mass flow through a leg, terminal or source in the one numbering of carriers, kg/s."""
    legs, terminals = len(scene.layout.legs), len(scene.layout.terminals)
    drops = scene.drops
    if carrier < legs:
        return float(drops.leg_mass[carrier])
    if carrier < legs + terminals:
        return float(drops.terminal_mass[carrier - legs])
    return float(drops.source_mass[carrier - legs - terminals])


def _heading(scene: Scene, place: int) -> str:
    results = scene.run.item_results(int(scene.layout.items.carrier[place]))
    return results[scene.items_of(int(scene.layout.items.carrier[place])).index(place)].heading


def _reference(scene: Scene, leg: int, neck: float, flow: str, density: str) -> tuple[str, str]:
    """Return the velocity pressure that a coefficient refers to as numbers, and what it is that of."""
    if not math.isnan(neck):
        return f"({density} x ({flow} / {scene.write.area(neck)})^2 / 2)", "on the velocity in the neck"
    if leg < 0:
        return "?", ""
    pressure = scene.write.pressure(float(scene.drops.velocity_pressure[leg]))
    return pressure, f"on the velocity in {scene.name(leg)}"


def _stated_drop(scene: Scene, place: int, shared: str, source: str) -> Step:
    """Return a drop that is stated, or that of a filter; scaled by the flow and the density that it was measured at."""
    items, write = scene.layout.items, scene.write
    item, density = items.items[place], float(items.density[place])
    numbers, formula = _nominal(scene, item, density)
    if item.tested_density is not None:
        of = (write.of(rho, Dimension.DENSITY) for rho in (density, item.tested_density))
        numbers += " x " + " / ".join(of)
        formula += " x rho / tested density"
    at = float(items.at[place])
    if not math.isnan(at):
        numbers += f" x ({shared} / {write.of(at, Dimension.FLOW)})^{number(float(items.exponent[place]))}"
        formula += f" x (q{_each(int(items.parallel[place]))} / at)^exponent"
    else:
        source = said("at design flow", source)
    drop = write.pressure(float(scene.drops.item_drop[place]))
    if formula == "drop":
        formula = numbers = ""
    return calculation(plain(item.name), formula, numbers, drop, said("as stated", source))


def _nominal(scene: Scene, item: Item, density: float) -> tuple[str, str]:
    """Return the stated drop of an item as numbers and as a formula."""
    pressure = scene.write.pressure
    if item.clean is not None and item.final is not None:
        clean, final = (pressure(pascals(one, density)) for one in (item.clean, item.final))
        if item.state == "mean":
            return f"({clean} + {final}) / 2", "(clean + final) / 2"
        return (clean, "clean drop") if item.state == "clean" else (final, "final drop")
    return pressure(None if item.drop is None else pascals(item.drop, density)), "drop"


def device_steps(scene: Scene, carrier: int, result: DeviceResult | None) -> Iterator[Step]:
    """Return what a balancing device costs fully open, what it takes up, and where it is set."""
    use = next((one for one in scene.layout.devices if one.carrier == carrier), None)
    if use is None or result is None:
        return
    write = scene.write
    yield Step(f"device {plain(result.name)}")
    where = said(use.device.source, f"from {use.device.origin}" if use.device.origin else "stated in the run")
    flow = write.of(_carried(scene, carrier) / use.density, Dimension.FLOW)
    rho = write.of(use.density, Dimension.DENSITY)
    opened = float(scene.drops.device_open[scene.layout.devices.index(use)])
    terms = [write.pressure(use.least_drop)]
    if use.device.kv:
        numbers = f"1 bar x ({flow} / {number(use.open_kv)} m3/h)^2 x {rho} / 1000 kg/m3"
        formula = "1 bar x (q / Kv)^2 x rho / 1000 kg/m3"
        yield calculation("fully open", formula, numbers, write.pressure(opened), said(where, KV_SOURCE))
        terms.insert(0, write.pressure(opened))
    elif use.device.k:
        pv, said_of = _reference(scene, use.reference, use.neck, flow, rho)
        yield calculation(
            "fully open", "k x pv", f"{number(use.open_k)} x {pv}", write.pressure(opened), said(where, said_of)
        )
        terms.insert(0, write.pressure(opened))
    base = write.pressure(result.base)
    if len(terms) == 2:
        yield calculation("base drop", "max(fully open, least drop)", f"max({', '.join(terms)})", base)
    else:
        yield calculation("base drop", "least drop", "", base, where)
    yield Step("take-up", "", "", write.pressure(result.take_up), _takes(use))
    yield write.total("drop as set", "base drop + take-up", [result.base, result.take_up], result.drop)
    yield from _setting(scene, use, result, flow, rho)
    if result.set_point is not None:
        stated = use.device.set_point is not None
        source = where if stated else "the largest circuit behind it, as none is stated"
        yield calculation("set point", "", "", write.pressure(result.set_point), source)


def _takes(use: DeviceUse) -> str:
    if use.device.holds == "differential":
        return "what remains of the margin of all that is behind it, which counts as one terminal"
    if use.device.holds == "flow":
        return "what remains of the margin, up to its greatest drop"
    return "the least that remains of the margins of the terminals that it serves; devices that serve more come first"


def _setting(scene: Scene, use: DeviceUse, result: DeviceResult, flow: str, rho: str) -> Iterator[Step]:
    """Return the opening that the drop needs, the setting there, and the measuring signal."""
    write, drop = scene.write, scene.write.pressure(result.drop)
    if result.kv is not None and math.isfinite(result.kv):
        numbers = f"{flow} x sqrt(1 bar / {drop} x {rho} / 1000 kg/m3)"
        formula = "Kv = q x sqrt(1 bar / drop x rho / 1000 kg/m3)"
        yield calculation("Kv as set", formula, numbers, f"{number(result.kv)} m3/h", KV_SOURCE)
        yield from _interpolated(use.device.kv, result.kv, result.setting, "Kv", " m3/h")
    if result.k is not None:
        pv, said_of = _reference(scene, use.reference, use.neck, flow, rho)
        yield calculation("k as set", "k = drop / pv", f"{drop} / {pv}", number(result.k), said_of)
        yield from _interpolated(use.device.k, result.k, result.setting, "k", "")
    if result.signal is not None and use.device.signal_kv is not None:
        numbers = f"1 bar x ({flow} / {number(use.device.signal_kv)} m3/h)^2 x {rho} / 1000 kg/m3"
        formula = "1 bar x (q / signal Kv)^2 x rho / 1000 kg/m3"
        yield calculation("signal", formula, numbers, write.pressure(result.signal), KV_SOURCE)
    elif result.signal is not None:
        yield calculation("signal", "that across the device", "", write.pressure(result.signal))


def _interpolated(
    table: tuple[tuple[float, float], ...], wanted: float, setting: float | None, symbol: str, unit: str
) -> Iterator[Step]:
    """Return a setting, read between two lines of its table."""
    if setting is None:
        yield Step("setting", "", "", "-", f"its table has no {symbol} of {number(wanted)}")
        return
    points = sorted((value, at) for at, value in table)
    (low, first), (high, second) = next(
        ((one, other) for one, other in pairwise(points) if wanted <= other[0]), (points[-1], points[-1])
    )
    if high == low:
        yield Step("setting", "", "", number(setting), "the end of its table")
        return
    formula = f"s = s1 + (s2 - s1) x log10({symbol} / {symbol}1) / log10({symbol}2 / {symbol}1)"
    a, b, c = (f"{number(one)}{unit}" for one in (wanted, low, high))
    numbers = f"{number(first)} + ({number(second)} - {number(first)}) x log10({a} / {b}) / log10({c} / {b})"
    yield calculation("setting", formula, numbers, number(setting), f"its table between two lines, {_LOG_STEP}")


def authority_steps(scene: Scene, carrier: int, authority: float | None, low: float | None) -> Iterator[Step]:
    """Return the authority of the control item that a leg or terminal carries."""
    layout, write = scene.layout, scene.write
    places = [place for place in scene.items_of(carrier) if layout.items.items[place].control]
    if not places:
        return
    item = layout.items.items[places[0]]
    if any(use.carrier == carrier and use.device.holds == "flow" for use in layout.devices):
        yield Step("authority", "", "", "-", "a device holds the flow here, whatever the control item does")
        return
    drop = float(scene.drops.item_drop[places[0]])
    three_port = item.control == "three-port"
    whole = only_its_flow(scene.run, carrier, three_port)
    what = "its drop + the terminal's" if three_port else "all that carries only its flow, devices as set"
    numbers = f"{write.pressure(drop)} / {write.pressure(whole)}"
    yield calculation("authority", f"drop of {plain(item.name)} / ({what})", numbers, number(authority))
    held = held_differential(scene.run, carrier)
    numbers = f"{write.pressure(drop)} / {write.pressure(held)}"
    formula = "its drop / the differential that is held when all others are shut"
    yield calculation("low authority", formula, numbers, number(low))
