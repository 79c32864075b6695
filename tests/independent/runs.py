"""Random valid runs as text, made to reach every rule of the loops that a run can meet.

`generate` writes one run for a seed; its first line is a comment that lists what the run contains, and
`features` reads that list back. Sections are sized for the flow that they carry, so most velocities are
what a designer would choose; a slow run has laminar and transitional legs.
"""

import random
from math import exp, log
from typing import Any

from tests.independent.dressing import Dresser
from tests.independent.loops import carry, connect, solve
from tests.independent.plants import Plant, grow_closed, grow_gas, grow_open
from tests.independent.writing import Pen, document

Entry = dict[str, Any]
LEAST, MOST = 5, 500  # sections


def features(text: str) -> frozenset[str]:
    """What a generated run says in its first line that it contains."""
    first = text.partition("\n")[0]
    return frozenset(first.partition(": ")[2].split("; "))


def generate(seed: int) -> str:
    """A valid run of 5 to 500 sections as text, the same one for the same seed."""
    rng = random.Random(seed)
    kind = rng.choices(("closed", "open", "air"), (5, 2, 3))[0]
    units = rng.choices(("SI", "IP"), (65, 35))[0]
    count = min(MOST, max(LEAST, round(exp(rng.uniform(log(LEAST), log(MOST))))))
    gas = kind == "air"
    density = 1.2 if gas else 1000.0
    pen = Pen(rng, units, gas, density)
    unequal = kind == "closed" and rng.random() < 0.5
    fluid, tags = pick_fluid(rng, pen, kind, unequal)
    slow = rng.random() < 0.25
    paired_default = kind == "closed" and rng.random() < 0.5
    plant = Plant(rng, pen, paired_default, unequal)
    systems = 1 if count < 20 or rng.random() < 0.7 else rng.choice((2, 3))
    plant.mean_flow = (0.05 if gas else min(2e-4, 0.06 / count)) * rng.uniform(0.6, 1.6)
    for _ in range(systems):
        source = plant.name("P")
        plant.sources[source] = {}
        if kind == "closed":
            grow_closed(plant, source, count // systems)
        elif kind == "open":
            grow_open(plant, source, count // systems)
        else:
            grow_gas(plant, source, count // systems)

    defaults: Entry = {"takeoff": "none", "duct" if gas else "pipe": "main"}
    if paired_default:
        defaults["paired"] = True
    design: Entry = {"title": f"Invented run {seed}"}
    if units == "IP" or rng.random() < 0.3:
        design["units"] = units
    run: Entry = {"design": design, "fluid": fluid, "defaults": defaults}
    run |= {"pipe": {}, "duct": {}, "fitting": {}, "device": {}}
    run |= {"source": plant.sources, "section": plant.sections, "terminal": plant.terminals}
    if rng.random() < 0.3:
        shuffled = list(plant.sections.items())
        rng.shuffle(shuffled)
        run["section"] = dict(shuffled)
        tags.add("sections in any order")
    if systems > 1:
        tags.add("several sources")
        if unequal and fluid["name"] != "custom":
            supply = connect(run, {})["fluid"]["out"]["temperature"]
            next(iter(plant.sources.values()))["temperature"] = pen.temperature(supply + rng.uniform(1, 5))
            tags.add("source with a temperature of its own")
    diversify(run, rng, tags, plant)
    net = connect(run, {})
    carry(net)
    Dresser(rng, pen, run, net, slow, tags).dress()
    set_points(run, rng, tags)
    extras(run, pen, tags)
    tags |= {kind, units} | plant.tags | pen.used | ({"slow"} if slow else set())
    for name in ("pipe", "duct", "fitting", "device"):
        if not run[name]:
            del run[name]
    return document(run, f"run {seed}: " + "; ".join(sorted(tags)), rng)


def pick_fluid(rng: random.Random, pen: Pen, kind: str, unequal: bool) -> tuple[Entry, set[str]]:
    """A fluid table; a gas is a custom one."""
    if kind == "air":
        density, thick = rng.uniform(0.9, 1.35), rng.random() < 0.25
        viscosity = rng.uniform(2e-4, 8e-4) if thick else 1.8e-5
        pen.density = density
        fluid = {
            "name": "custom",
            "density": pen.write(density, "density"),
            "viscosity": pen.write(viscosity, "viscosity"),
        }
        return fluid, {"custom gas"}
    name = rng.choice(("water", "water", "propylene glycol", "ethylene glycol", "custom"))
    tags = {name if name != "custom" else "custom liquid"}
    fluid = {"name": name}
    if name == "custom":
        pen.density = rng.uniform(850, 1150)
        fluid["density"] = pen.write(pen.density, "density")
        fluid["viscosity"] = pen.write(exp(rng.uniform(log(5e-4), log(2e-2))), "viscosity")
        if unequal:
            fluid["specific_heat"] = rng.choice(("3.9 kJ/(kg K)", "3900 J/(kg K)", "0.93 Btu/(lb degF)"))
    warm = rng.uniform(45, 90) if name == "water" else rng.uniform(15, 35)
    if name != "custom" or unequal:
        fluid["temperature"] = pen.temperature(warm)
    if unequal:
        fluid["return_temperature"] = pen.temperature(warm - (rng.uniform(5, 25) if name == "water" else 10))
        tags.add("unequal legs")
    if name.endswith("glycol"):
        fluid["concentration"] = f"{rng.randint(25, 40)} %"
        fluid["concentration_by"] = rng.choice(("mass", "volume"))
    return fluid, tags


def diversify(run: Entry, rng: random.Random, tags: set[str], plant: Plant) -> None:
    """Give a few sections a diversity that leaves none of their legs less than its largest child."""
    if rng.random() < 0.55 or "both sides" in plant.tags:
        return
    for name in rng.sample(list(run["section"]), min(4, len(run["section"]))):
        entry = run["section"][name]
        net = connect(run, {})
        carry(net)
        ways = [way for way in net["parent"] if way[0] == name and net["users"][way]]
        if min(len(net["users"][way]) for way in ways) < 4:
            continue
        least = max(largest_child(net, way) / served_mass(net, way) for way in ways)
        if least > 0.95:
            continue
        entry["diversity"] = round(min(1.0, rng.uniform(max(0.6, least), 1.0) + 0.01), 2)
        net = connect(run, {})
        carry(net)
        if all(
            net["masses"][way] >= largest_child(net, way) * (1 + 1e-9)
            for way in net["parent"]
            if "diversity" in run["section"][way[0]] and net["users"][way]
        ):
            tags.add("diversity")
        else:
            del entry["diversity"]


def served_mass(net: Entry, way: tuple[str, str]) -> float:
    """Undiversified kg/s of all terminals that a leg serves."""
    return float(sum(net["terminals"][name]["mass"] for name in net["users"][way]))


def largest_child(net: Entry, way: tuple[str, str]) -> float:
    """The largest flow that hangs on a leg."""
    children = [net["masses"][other] for other, further in net["parent"].items() if further == way]
    ends = [
        terminal["mass"]
        for terminal in (net["terminals"][name] for name in net["users"][way])
        if way in (*terminal["out"][-1:], *terminal["back"][:1])
    ]
    return float(max([*children, *ends]))


def set_points(run: Entry, rng: random.Random, tags: set[str]) -> None:
    """State the set point of some differential-holding devices, inner ones first, above what is behind."""
    held = [name for name, entry in run["section"].items() if "DPV" in entry.get("balance", "")]
    if not held:
        return
    net = solve(run, {})
    depths = {name: len(net["paths"][name][0]) for name in held}
    for depth in sorted(set(depths.values()), reverse=True):
        stated = [name for name in held if depths[name] == depth and rng.random() < 0.5]
        tags.add("stated set point" if stated else "default set point")
        for name in stated:
            kilopascals = round(net["largest"][name] / 1000 * rng.uniform(1.05, 1.6) + 0.5, 1)
            run["device"][run["section"][name]["balance"]]["set_point"] = f"{kilopascals} kPa"
        if stated and depth > min(depths.values()):
            net = solve(run, {})


def extras(run: Entry, pen: Pen, tags: set[str]) -> None:
    """What a run states beside its hydraulics."""
    rng = pen.rng
    if rng.random() < 0.3:
        run["limits"] = {"velocity": "1.5 m/s" if not pen.gas else "9 m/s", "tolerance": "10 %"}
        tags.add("limits")
    if rng.random() < 0.3:
        run["budget"] = {"distribution": pen.write(200.0 if pen.gas else 3e4, "pressure")}
        tags.add("budget")
    if rng.random() < 0.2:
        run["display"] = {"flow": "m3/h"}
    for entry in run["section"].values():
        if rng.random() < 0.03:
            entry["accept"] = {"velocity": "short, agreed with the client"}
            tags.add("accept")
        if rng.random() < 0.05:
            entry["title"] = 'Main at "grid" 4'
        if rng.random() < 0.05:
            entry["note"] = "above the ceiling, 2.7 m # not a comment"
