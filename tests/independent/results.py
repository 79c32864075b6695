"""The computed network as the printed object: names as in the results of a check, SI base units."""

from typing import Any

from tests.independent.legs import Table, device_at
from tests.independent.margins import climb, margin, plant, served, system_of, within
from tests.independent.properties import Properties
from tests.independent.quantities import measure

HEADINGS = ("plant", "distribution", "terminal", "control", "balancing", "static")
LEG_KEYS = (
    "leg", "mass_flow", "velocity", "velocity_pressure", "reynolds", "regime", "friction_factor", "gradient",
    "friction",
)  # fmt: skip


def show(net: Table) -> dict[str, Any]:
    """Sources, sections and terminals of a computed network."""
    return {
        "format": 1,
        "fluid": {"name": net["run"]["fluid"]["name"], **show_fluid(net["fluid"])},
        "sources": {name: show_source(net, source) for name, source in net["sources"].items()},
        "sections": {name: show_section(net, name) for name in net["sections"]},
        "terminals": {name: show_terminal(net, name) for name in net["terminals"]},
    }


def show_source(net: Table, source: Table) -> Table:
    """A source with its fluid, required pressure, duty, powers and spending."""
    entry, density = source["entry"], source["fluid"]["out"]["density"]
    hydraulic = source["duty_flow"] * source["duty"]
    shaft = hydraulic / measure(entry["efficiency"], "fraction") if "efficiency" in entry else None
    electrical = None
    if shaft is not None and "motor_efficiency" in entry:
        electrical = shaft / measure(entry["motor_efficiency"], "fraction")
    available = source["available"]
    return {
        "kind": source["kind"],
        "fluid": show_fluid(source["fluid"]),
        "flow": source["mass"] / density,
        "mass_flow": source["mass"],
        "required": source["required"],
        "static": source["static"],
        "reserve": source["duty"] - source["required"],
        "duty": source["duty"],
        "duty_flow": source["duty_flow"],
        "available": available,
        "in_hand": None if available is None else available - source["duty"],
        "index": source["index"],
        "discharge_required": source["sides"].get("out") if net["gas"] else None,
        "suction_required": source["sides"].get("back") if net["gas"] else None,
        "items": source["items"],
        "static_pressure": source["static_pressure"],
        "external_total": source["external_total"],
        "external_static": source["external_static"],
        "hydraulic_power": hydraulic,
        "shaft_power": shaft,
        "electrical_power": electrical,
        "spent": {key: source["spent"].get(key, 0.0) for key in dict.fromkeys((*HEADINGS, *source["spent"]))},
    }


def show_fluid(legs: dict[str, Properties]) -> Table:
    """The fluid of both legs."""
    supply = {key: legs["out"][key] for key in ("density", "viscosity", "specific_heat")}
    return supply | {f"return_{key}": legs["back"][key] for key in ("density", "viscosity")}


def show_conduit(owner: Table, density: float) -> Table:
    """The pipe or duct of a section or run-out with its legs."""
    pipe, legs = owner["pipe"], owner["legs"]
    first = next(iter(legs.values()))
    return {
        "flow": first["mass_flow"] / density,
        "mass_flow": first["mass_flow"],
        "bore": pipe.get("bore"),
        "width": pipe.get("width"),
        "height": pipe.get("height"),
        "hydraulic_diameter": pipe["hydraulic_diameter"],
        "area": pipe["area"],
        "k_total": pipe["k_total"],
        "friction": sum(leg["friction"] for leg in legs.values()),
        "fittings": sum(leg["fittings"] for leg in legs.values()),
        "junction": 0.0,
        "transition": 0.0,
        "legs": [{key: leg[key] for key in LEG_KEYS} | {"junction": 0.0} for leg in legs.values()],
    }


def section_drop(section: Table) -> float:
    """Friction and fittings of every leg, and items; not the device."""
    legs = sum(leg["friction"] + leg["fittings"] for leg in section["legs"].values())
    return float(legs + sum(drop for _, drop, _ in section["pieces"]))


def show_section(net: Table, name: str) -> Table:
    """A section with its drops, and what it means to the circuits through it."""
    section = net["sections"][name]
    source = net["sources"][section["source"]]
    system = system_of(net, name)
    on_index = any(name in {way[0] for side in net["paths"][terminal] for way in side} for terminal in source["marked"])
    return show_conduit(section, source["fluid"]["out"]["density"]) | {
        "items": sum(drop for _, drop, _ in section["pieces"]),
        "static": section["static"],
        "drop": section_drop(section),
        "cumulative": cumulative(net, name),
        "differential": differential(net, name),
        "margin": min(margin(net, member) for member in served(net, section["serves"], system)),
        "index": on_index,
        "serves": section["serves"],
        "device": show_device(section, section["entry"], section["legs"].get(section["main"]))
        | ({"set_point": net["level"][name]} if name in net["groups"] else {})
        if section["device"] is not None
        else None,
    }


def show_run_out(terminal: Table, density: float) -> Table | None:
    """The run-out of a terminal; None where it has none."""
    if not terminal["legs"]:
        return None
    return show_conduit(terminal, density) | {"items": 0.0, "static": 0.0, "drop": terminal["run_out"]}


def show_device(owner: Table, entry: Table, place: Table | None) -> Table:
    """The device of a section or terminal with its take-up."""
    place = place or {}
    mass = owner["mass"] if "mass" in owner else place["mass_flow"]
    return device_at(entry["balance"], owner["device"], mass, place, owner["base"], owner["take_up"])


def cumulative(net: Table, name: str) -> float:
    """Pressure spent from the source's outlet to the downstream end of a section, by its largest circuit."""
    sections = net["sections"]

    def whole(section: Table) -> float:
        return section_drop(section) + float(section["static"] + section["base"])

    section = sections[name]
    if section["main"] == "out":
        return sum(whole(sections[way[0]]) for way in climb(net["parent"], (name, "out")))
    source = net["sources"][section["source"]]
    largest = max(net["terminals"][terminal]["circuit"] for terminal in section["serves"])
    after = [sections[way[0]] for way in climb(net["parent"], (name, "back"))[1:]]
    nearer = sum(whole(other) for other in after if other["main"] == "back")
    return float(largest - (0.0 if net["gas"] else source["items"]) - nearer)


def differential(net: Table, name: str) -> float | None:
    """What is available where a section is connected; None for an unpaired one of a liquid."""
    section = net["sections"][name]
    if not net["gas"] and not section["paired"]:
        return None
    system = system_of(net, name)
    total = net["level"][system] - plant(net, system)
    for side in ("out", "back") if section["paired"] else (section["main"],):
        for way in climb(net["parent"], (name, side))[1:]:
            if way[0] == system:
                break
            total -= net["weight"][way]
    return float(total)


def show_terminal(net: Table, name: str) -> Table:
    """A terminal with its circuit and what is left in it."""
    terminal = net["terminals"][name]
    source = net["sources"][terminal["source"]]
    out, back = within(net, name)
    home = net["home"][name]
    outside = plant(net, home) + sum(net["weight"][way] for way in (*out, *back))
    density = source["fluid"]["out"]["density"]
    return {
        "flow": terminal["mass"] / density,
        "mass_flow": terminal["mass"],
        "circuit": terminal["circuit"],
        "drop": terminal["drop"],
        "items": sum(drop for _, drop, _ in terminal["pieces"]),
        "static": terminal["static"],
        "run_out": show_run_out(terminal, density),
        "differential": net["level"][home] - outside,
        "margin": margin(net, name),
        "excess": terminal["excess"],
        "index": name in source["marked"],
        "path": [way[0] for side in net["paths"][name] for way in side],
        "device": show_device(terminal, terminal["entry"], terminal["place"])
        if terminal["device"] is not None
        else None,
    }
