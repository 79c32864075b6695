"""Connections of random plants: which section hangs on which, and the terminals with their flows."""

import random
from typing import Any

from tests.independent.writing import Pen

Entry = dict[str, Any]
AREAS = ("North", "Süd", "Hall 2", "L1.b", "roof", "E-7", "K_4")


class Plant:
    """A growing run: sources, sections and terminals, and what it already contains."""

    def __init__(self, rng: random.Random, pen: Pen, paired_default: bool, unequal: bool) -> None:
        self.rng, self.pen = rng, pen
        self.paired_default, self.unequal = paired_default, unequal
        self.sources: dict[str, Entry] = {}
        self.sections: dict[str, Entry] = {}
        self.terminals: dict[str, Entry] = {}
        self.tags: set[str] = set()
        self.mean_flow = 1e-4

    def name(self, letter: str) -> str:
        """An ID that is not taken yet, now and then one that needs quotes."""
        number = len(self.sources) + len(self.sections) + len(self.terminals) + 1
        if self.rng.random() < 0.1:
            self.tags.add("quoted ID")
            return f"{letter}{number} {self.rng.choice(AREAS)}"
        return f"{letter}{self.rng.choice(('', '-', '_'))}{number}"

    def section(self, way: str, near: str, paired: bool | None = None) -> str:
        """A section from or to its neighbour; `paired` is stated where the default says otherwise."""
        name = self.name("S")
        entry: Entry = {way: near}
        if paired is not None and (paired != self.paired_default or self.rng.random() < 0.1):
            entry["paired"] = paired
        self.sections[name] = entry
        return name

    def flow(self) -> float:
        """m3/s of one terminal."""
        usual = self.rng.choice((0.3, 0.5, 0.7, 1, 1, 1.2, 1.6, 2.5))
        return self.mean_flow * usual * self.rng.uniform(0.8, 1.2)

    def terminal(self, **ends: str) -> str:
        """A terminal with a flow or, where the legs differ in temperature, now and then a load."""
        name = self.name("T")
        entry: Entry = {key.rstrip("_"): value for key, value in ends.items()}
        volume = self.flow()
        if self.unequal and self.rng.random() < 0.4:
            entry["load"] = self.pen.write(volume * 1000 * 4000 * 15, "power")
            self.tags.add("load")
        else:
            entry["flow"] = self.pen.write(volume, "flow")
        self.terminals[name] = entry
        return name

    def ends_of(self, section: str, most: int = 3) -> None:
        """One to `most` terminals on a section."""
        for _ in range(self.rng.randint(1, most)):
            self.terminal(from_=section)


def grow_closed(plant: Plant, parent: str, count: int, depth: int = 0) -> None:
    """Hang `count` sections on a source or a paired section, by blocks picked at random."""
    rng = plant.rng
    if depth == 0 and rng.random() < 0.3:
        plant.terminal(from_=parent)
        plant.tags.add("terminal on the source")
    while count > 0:
        block = rng.random()
        if count >= 5 and block < 0.3 and depth < 12:
            floors = rng.randint(1, min(12, (count - 1) // 2))
            reverse_return(plant, parent, floors)
            count -= 1 + 2 * floors
        elif count >= 4 and block < 0.4 and depth < 12:
            joined_risers(plant, parent)
            count -= 4
        elif count >= 3 and block < 0.9 and depth < 12:
            section = plant.section("from", parent, True)
            plant.tags.add("paired")
            below = rng.randint(1, min(count - 1, max(2, count // 2)))
            if rng.random() < 0.25:
                plant.terminal(from_=section)
            hold = rng.random()
            if hold < 0.15:
                plant.sections[section]["balance"] = "differential"
            elif hold < 0.22:
                plant.sections[section]["balance"] = "flow"
            grow_closed(plant, section, below, depth + 1)
            count -= 1 + below
        else:
            section = plant.section("from", parent, True)
            plant.tags.add("paired")
            plant.ends_of(section)
            count -= 1


def reverse_return(plant: Plant, parent: str, floors: int) -> None:
    """A paired riser with a floor whose return runs the same way as its supply and joins the riser's."""
    plant.tags.add("reverse return")
    on_source = parent in plant.sources
    riser = parent if on_source and plant.rng.random() < 0.3 else plant.section("from", parent, True)
    supplies, near = [], riser
    for _ in range(floors):
        near = plant.section("from", near, False)
        supplies.append(near)
    returns: list[str] = []
    near = riser
    for _ in range(floors):
        near = plant.section("to", near)
        returns.append(near)
    for supply, back in zip(supplies, reversed(returns), strict=True):
        for _ in range(plant.rng.choice((1, 1, 1, 2))):
            plant.terminal(from_=supply, to=back)


def joined_risers(plant: Plant, parent: str) -> None:
    """Two paired risers, with terminals that leave the one and return by the other."""
    plant.tags.add("joined risers")
    rng = plant.rng
    first, second = plant.section("from", parent, True), plant.section("from", parent, True)
    upper = plant.section("from", first, True)
    plant.terminal(from_=first, to=second)
    plant.terminal(from_=upper, to=second)
    for riser in (first, second, upper):
        plant.ends_of(riser, 2)
    gather = plant.section("to", rng.choice((second, upper)))
    for _ in range(rng.randint(1, 2)):
        plant.terminal(from_=rng.choice((first, upper)), to=gather)


def grow_tree(plant: Plant, parent: str, count: int, way: str, leaves: list[str], depth: int = 0) -> None:
    """Hang `count` unpaired sections on `parent`, `way` from_ or to; the outermost are added to leaves."""
    while count > 0:
        section = plant.section(way.rstrip("_"), parent)
        count -= 1
        if count and plant.rng.random() < 0.75 and depth < 40:
            below = plant.rng.randint(1, max(1, min(count, (count + 1) // 2)))
            grow_tree(plant, section, below, way, leaves, depth + 1)
            count -= below
            if plant.rng.random() < 0.2:
                leaves.append(section)
        else:
            leaves.append(section)


def grow_open(plant: Plant, source: str, count: int) -> None:
    """A lift from a tank, or a pump with pressure at its inlet, to outlets at their heights."""
    rng = plant.rng
    plant.sources[source]["open"] = True
    ends: list[str] = []
    if rng.random() < 0.7:
        plant.tags.add("suction from a tank")
        ends = [plant.section("to", source)]
        for _ in range(min(rng.randint(0, 2), count - 4)):
            ends.append(plant.section("to", ends[-1]))
        count -= len(ends)
    leaves: list[str] = []
    grow_tree(plant, source, max(count, 1), "from_", leaves)
    for leaf in leaves:
        for _ in range(rng.randint(1, 3)):
            name = plant.terminal(from_=leaf, **({"to": ends[-1]} if ends else {}))
            if rng.random() < 0.7:
                plant.terminals[name]["rise"] = plant.pen.write(rng.uniform(-1, 3), "length")
            if rng.random() < 0.6:
                needed = plant.pen.write(rng.uniform(5e3, 1.5e5), "pressure")
                plant.terminals[name]["outlet_pressure"] = needed
    for entry in plant.sections.values():
        if rng.random() < 0.4:
            entry["rise"] = plant.pen.write(rng.uniform(-2, 6), "length")


def grow_gas(plant: Plant, source: str, count: int) -> None:
    """A fan with ducts on its discharge side, its suction side, or both."""
    rng = plant.rng
    shape = rng.choice(("supply", "extract", "both", "both", "lone", "lone"))
    if shape == "supply":
        plant.tags.add("discharge side alone")
        fill_side(plant, source, count, "from_")
    elif shape == "extract":
        plant.tags.add("suction side alone")
        fill_side(plant, source, count, "to")
    elif shape == "both":
        plant.tags.add("both sides")
        first = rng.randint(2, count - 2)
        supplies = fill_side(plant, source, first, "from_")
        extracts = fill_side(plant, source, count - first, "to")
        total = sum(flow for _, flow in supplies)
        weights = [flow for _, flow in extracts]
        for (name, _), weight in zip(extracts, weights, strict=True):
            plant.terminals[name]["flow"] = plant.pen.write(total * weight / sum(weights), "flow")
    else:
        plant.tags.add("lone terminal omits its flow")
        way, other = rng.sample(("from_", "to"), 2)
        chain = rng.randint(1, min(3, count - 2))
        fill_side(plant, source, count - chain, way)
        near = source
        for _ in range(chain):
            near = plant.section(other.rstrip("_"), near)
        name = plant.terminal(**{other: near})
        del plant.terminals[name]["flow"]


def fill_side(plant: Plant, source: str, count: int, way: str) -> list[tuple[str, float]]:
    """One side of a fan; its terminals with their flows in m3/s."""
    leaves: list[str] = []
    grow_tree(plant, source, count, way, leaves)
    made = []
    for leaf in leaves:
        for _ in range(plant.rng.randint(1, 3)):
            name, flow = plant.terminal(**{way: leaf}), plant.flow()
            plant.terminals[name]["flow"] = plant.pen.write(flow, "flow")
            made.append((name, flow))
    if len(made) == 1:
        name, flow = plant.terminal(**{way: leaves[0]}), plant.flow()
        plant.terminals[name]["flow"] = plant.pen.write(flow, "flow")
        made.append((name, flow))
    return made
