"""The pressure budget of a run, worked out a second time in plain loops and dicts.

Written from the description of what is computed alone, to be compared with the product. It reads a run
that is valid, with `takeoff = "none"` at every junction: no transitions, parametrised fittings, links,
cases, sizing or libraries. Air comes without humid tables: a run to be compared names a custom gas.

A leg is the pair of a section's ID and "out" (away from the source) or "back" (to it). Of a liquid
circuit these are the supply and return legs, of a gas the discharge and suction sides.
"""

import tomllib
from collections.abc import Mapping
from typing import Any

from tests.independent.legs import Table, base_drop, conduit, cross_section, item_drop, leg
from tests.independent.margins import Leg, climb, judge
from tests.independent.properties import is_gas, two_legs
from tests.independent.quantities import G, mass_flow, measure
from tests.independent.results import show

NAMES = {
    "closed": {"out": "supply", "back": "return"},
    "open": {"out": "discharge", "back": "suction"},
    "air": {"out": "discharge", "back": "suction"},
}


def evaluate(text: str, fluids: Mapping[str, Mapping[str, float]] | None = None) -> dict[str, Any]:
    """All figures of a run in SI base units, in the shape of `budget check --json`.

    `fluids` gives a source's fluid as that object prints it, in place of the formulas here: so the
    circuits of an air run are compared without comparing the properties of humid air.
    """
    net = solve(tomllib.loads(text), fluids or {})
    return show(net)


def solve(run: Table, fluids: Mapping[str, Mapping[str, float]]) -> Table:
    """The network of a parsed run with every drop, circuit and margin in it."""
    net = connect(run, fluids)
    carry(net)
    for name in net["sections"]:
        drop_section(net, name)
    for name in net["terminals"]:
        drop_terminal(net, name)
    for source in net["sources"].values():
        terms, place = source["terms"], {"density": source["fluid"]["out"]["density"]}
        source["pieces"] = [
            (item.get("heading", "plant"), item_drop(item, source["mass"], place, terms), item)
            for item in source["entry"].get("item", [])
        ]
        source["items"] = sum(drop for _, drop, _ in source["pieces"])
    judge(net)
    return net


def connect(run: Table, fluids: Mapping[str, Mapping[str, float]]) -> Table:
    """Sources, sections and terminals with the legs between them and each terminal's path."""
    units = run.get("design", {}).get("units", "SI")
    fluid = run["fluid"]
    gas = is_gas(fluid, units)
    defaults = run.get("defaults", {})
    entries = run.get("section", {})
    parent: dict[Leg, Leg | None] = {}
    net: Table = {"run": run, "units": units, "gas": gas, "parent": parent}
    net["fluid"] = two_legs(fluid, {}, units)
    net |= {"sources": {}, "sections": {}, "terminals": {}}

    def root(name: str) -> str:
        while name not in run["source"]:
            name = entries[name].get("from") or entries[name]["to"]
        return name

    for name, entry in run["source"].items():
        legs = two_legs(fluid, entry, units)
        if name in fluids:
            given = fluids[name]
            legs["out"] |= {key: given[key] for key in ("density", "viscosity", "specific_heat")}
            legs["back"] |= {key: given["return_" + key] for key in ("density", "viscosity")}
        kind = "air" if gas else "open" if entry.get("open") else "closed"
        terms = (units, gas, legs["out"]["density"])
        net["sources"][name] = {"entry": entry, "kind": kind, "fluid": legs, "terms": terms}
    for name, entry in entries.items():
        source = net["sources"][root(name)]
        main = "out" if "from" in entry else "back"
        paired = main == "out" and source["kind"] == "closed" and is_paired(entry, defaults)
        net["sections"][name] = {"entry": entry, "source": root(name), "main": main, "paired": paired}
    for name, section in net["sections"].items():
        near = section["entry"].get("from") or section["entry"]["to"]
        for side in ("out", "back") if section["paired"] else (section["main"],):
            parent[(name, side)] = None if near in net["sources"] else (near, side)
    for way, further in parent.items():
        if further is not None and further not in parent:
            raise ValueError(f"{way[0]}: {further[0]} has no {further[1]} leg")

    for name, entry in run["terminal"].items():
        source_id = root(entry.get("from") or entry["to"])
        kind = net["sources"][source_id]["kind"]
        start = entry.get("from")
        end = entry.get("to", start if kind == "closed" else None)
        out = climb(parent, None if start in net["sources"] or start is None else (start, "out"))[::-1]
        back = climb(parent, None if end in net["sources"] or end is None else (end, "back"))
        net["terminals"][name] = {
            "entry": entry,
            "source": source_id,
            "side": "back" if kind == "air" and start is None else "out",
            "out": out,
            "back": back,
            "paired": kind == "closed" and is_paired(entry, defaults),
        }
    net["order"] = {name: position for position, name in enumerate(net["terminals"])}
    net["users"] = {way: [] for way in parent}
    for name, terminal in net["terminals"].items():
        for way in (*terminal["out"], *terminal["back"]):
            net["users"][way].append(name)
    return net


def is_paired(entry: Table, defaults: Table) -> bool:
    """Whether a section or run-out of a closed circuit is its return leg too."""
    return bool(entry.get("paired", defaults.get("paired", False)))


def carry(net: Table) -> None:
    """Mass flows of terminals, legs and sources, a terminal that omits its flow last."""
    omitted = []
    for name, terminal in net["terminals"].items():
        terminal["mass"] = stated_mass(net, terminal)
        if terminal["mass"] is None:
            omitted.append(name)
    gather(net)
    for name in omitted:
        terminal = net["terminals"][name]
        other = "out" if terminal["side"] == "back" else "back"
        terminal["mass"] = net["sources"][terminal["source"]]["mass by side"][other]
    gather(net)
    for source in net["sources"].values():
        source["mass"] = source["mass by side"]["out"] or source["mass by side"]["back"]


def stated_mass(net: Table, terminal: Table) -> float | None:
    """kg/s by flow or load; None where neither is stated."""
    entry, source, units = terminal["entry"], net["sources"][terminal["source"]], net["units"]
    supply, back = source["fluid"]["out"], source["fluid"]["back"]
    if "load" in entry:
        run = net["run"]
        if "return_temperature" in entry:
            own = source["entry"] | {"return_temperature": entry["return_temperature"]}
            back = two_legs(run["fluid"], own, units)["back"]
        heat = (supply["specific_heat"] + back["specific_heat"]) / 2
        difference = abs(supply["temperature"] - back["temperature"])
        return float(measure(entry["load"], "power", units) / (heat * difference))
    if "flow" in entry:
        return mass_flow(entry["flow"], supply["density"], units, net["gas"])
    return None


def gather(net: Table) -> None:
    """Mass flow of every leg: what hangs on it, or diversity times all that it serves."""
    parent, masses = net["parent"], dict.fromkeys(net["parent"], 0.0)
    ends: dict[str, dict[str, float]] = {name: {"out": 0.0, "back": 0.0} for name in net["sources"]}
    for terminal in net["terminals"].values():
        mass = terminal["mass"] or 0.0
        nearest = {"out": terminal["out"][-1:], "back": terminal["back"][:1]}
        entry = terminal["entry"]
        for side, legs in nearest.items():
            if legs:
                masses[legs[0]] += mass
            elif entry.get({"out": "from", "back": "to"}[side]) in ends:
                ends[terminal["source"]][side] += mass
    for way in sorted(parent, key=lambda way: -len(climb(parent, way))):
        section = net["sections"][way[0]]
        if "diversity" in section["entry"]:
            served = sum(net["terminals"][name]["mass"] or 0.0 for name in net["users"][way])
            masses[way] = measure(section["entry"]["diversity"], "fraction") * served
        further = parent[way]
        if further is None:
            ends[section["source"]][way[1]] += masses[way]
        else:
            masses[further] += masses[way]
    net["masses"] = masses
    for name, source in net["sources"].items():
        source["mass by side"] = ends[name]


def drop_section(net: Table, name: str) -> None:
    """Legs, items, static and device of a section."""
    section = net["sections"][name]
    entry, source = section["entry"], net["sources"][section["source"]]
    terms = source["terms"]
    pipe = conduit(entry, net["run"], net["units"])
    legs = {
        side: leg(NAMES[source["kind"]][side], net["masses"][(name, side)], pipe, source["fluid"][side])
        for side in ("out", "back")
        if net["users"].get((name, side))
    }
    section |= {"pipe": pipe, "legs": legs, "pieces": [], "static": 0.0, "base": 0.0, "device": None}
    served = {terminal for side in ("out", "back") for terminal in net["users"].get((name, side), ())}
    section["serves"] = sorted(served, key=net["order"].__getitem__)
    place = legs.get(section["main"])
    if place is None:
        return
    mass = place["mass_flow"]
    section["pieces"] = [(heading(item), item_drop(item, mass, place, terms), item) for item in entry.get("item", [])]
    section["static"] = place["density"] * G * measure(entry.get("rise", 0), "length", net["units"])
    if "balance" in entry:
        section["device"] = net["run"]["device"][entry["balance"]]
        section["base"] = base_drop(section["device"], mass, place, terms)


def heading(item: Table) -> str:
    """The budget heading of an item in line."""
    return str(item.get("heading", "control" if "control" in item else "distribution"))


def drop_terminal(net: Table, name: str) -> None:
    """Run-out, own drop, items, static and device of a terminal."""
    terminal = net["terminals"][name]
    entry, source, units = terminal["entry"], net["sources"][terminal["source"]], net["units"]
    terms, mass = source["terms"], terminal["mass"]
    main = "out" if "from" in entry else "back"
    near = entry.get("from") or entry["to"]
    place = dict(net["sections"][near]["legs"][main]) if near in net["sections"] else {}
    place["density"] = source["fluid"][main]["density"]
    legs: dict[str, Table] = {}
    pipe: Table = {}
    if "size" in entry or "bore" in entry:
        pipe = conduit(entry, net["run"], units)
        for side in ("out", "back") if terminal["paired"] else (main,):
            legs[side] = leg(NAMES[source["kind"]][side], mass, pipe, source["fluid"][side])
        place = dict(legs[main])
    neck = 0.0
    if "neck" in entry:
        velocity = mass / place["density"] / cross_section(entry["neck"], units)["area"]
        neck = place["density"] * velocity**2 / 2
        place["velocity_pressure"] = neck
    if "static_drop" in entry:
        static_part = abs(item_drop(entry, mass, place, terms, key="static_drop"))
        own = static_part + neck if main == "out" else static_part - neck
    else:
        own = item_drop(terminal_drop(entry), mass, place, terms)
    terminal |= {"drop": own, "pipe": pipe, "legs": legs, "base": 0.0, "device": None, "place": place}
    terminal["pieces"] = [(heading(item), item_drop(item, mass, place, terms), item) for item in entry.get("item", [])]
    terminal["static"] = place["density"] * G * measure(entry.get("rise", 0), "length", units)
    at_terminal = (terms[0], terms[1], place["density"])  # a head is that of the fluid where the terminal stands
    terminal["static"] += measure(entry.get("outlet_pressure", 0), "pressure", *at_terminal)
    if "balance" in entry:
        terminal["device"] = net["run"]["device"][entry["balance"]]
        terminal["base"] = base_drop(terminal["device"], mass, place, terms)
    terminal["run_out"] = sum(way["friction"] + way["fittings"] for way in legs.values())
    terminal["own"] = terminal["run_out"] + own + sum(drop for _, drop, _ in terminal["pieces"])
    terminal["own"] += terminal["static"] + terminal["base"]


def terminal_drop(entry: Table) -> Table:
    """What a terminal states of its own drop."""
    return {key: entry[key] for key in ("drop", "at", "exponent") if key in entry}
