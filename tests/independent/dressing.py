"""Sizes, fittings, items and devices for a connected run whose flows are known."""

import random
from math import pi, sqrt
from typing import Any

from tests.independent.legs import CATALOGUE, NPS
from tests.independent.writing import Pen, plain

Entry = dict[str, Any]
PIPES = {
    "main": "steel EN 10255 medium",
    "steel-40": "steel ASME B36.10 schedule 40",
    "copper X": "copper EN 1057 table X",
}
OWN_SIZES = (15, 20, 25, 32, 40, 50, 80, 100, 150, 200)
VALVE = ((0.5, 0.02), (1, 0.09), (2.5, 0.4), (4, 1.0))  # setting, share of the largest Kv
COARSE = ((1, 0.35), (2, 0.6), (3, 1.0))  # cannot take up much
ROUNDS = (63, 80, 100, 125, 160, 200, 250, 315, 400, 500, 630, 800, 1000, 1250)
SIDES = (100, 150, 200, 250, 300, 400, 500, 600, 800, 1000, 1200)
INCHES = (4, 5, 6, 8, 10, 12, 14, 16, 20, 24, 28, 32, 36, 42, 48)


class Dresser:
    """Fills the tables of one run in place."""

    def __init__(self, rng: random.Random, pen: Pen, run: Entry, net: Entry, slow: bool, tags: set[str]) -> None:
        self.rng, self.pen, self.run, self.net, self.slow, self.tags = rng, pen, run, net, slow, tags

    def dress(self) -> None:
        """Sections, terminals and sources, each with what it may carry."""
        run, rng = self.run, self.rng
        if self.pen.gas:
            run["duct"]["main"] = {"catalogue": "galvanised steel"}
        else:
            run["pipe"]["main"] = {"catalogue": PIPES["main"]}
        run["fitting"]["swing joint"] = {"k": 0.75, "source": "maker's sheet"}
        run["fitting"]["bend"] = {"k": round(rng.uniform(0.1, 0.9), 3)}
        self.single = self.serving_one_group()
        for name, entry in run["section"].items():
            self.section(name, entry)
        for name, entry in run["terminal"].items():
            self.terminal(name, entry)
        for name, entry in run["source"].items():
            self.source(name, entry)

    def serving_one_group(self) -> set[str]:
        """Sections that serve nothing but one differential-holding device."""
        net, found = self.net, set()
        for name, section in net["sections"].items():
            if section["entry"].get("balance") != "differential":
                continue
            near = section["entry"]["from"]
            behind = net["users"][(name, "out")]
            while near in net["sections"]:
                if len(net["users"][(near, "out")]) == len(behind):
                    found.add(near)
                near = net["sections"][near]["entry"]["from"]
        return found

    # -- sizes --------------------------------------------------------------------------------------

    def speed(self) -> float:
        """A velocity to size for in m/s."""
        if self.slow:
            return self.rng.uniform(0.05, 0.6) if self.pen.gas else self.rng.uniform(0.02, 0.25)
        return self.rng.uniform(2, 8) if self.pen.gas else self.rng.uniform(0.3, 1.4)

    def conduit(self, entry: Entry, mass: float, length: float) -> None:
        """Size, length and fittings of a section or run-out that carries this kg/s."""
        area = mass / self.pen.density / self.speed()
        (self.duct if self.pen.gas else self.pipe)(entry, sqrt(4 * area / pi))
        entry["length"] = self.pen.write(length, "length")
        fittings = entry.setdefault("fittings", {})
        if self.rng.random() < 0.3:
            fittings["swing joint"] = self.rng.randint(1, 3)
            self.tags.add("own fitting")
        if self.pen.gas and self.rng.random() < 0.5:
            fittings["bend"] = self.rng.randint(1, 4)
        if not fittings:
            del entry["fittings"]

    def pipe(self, entry: Entry, diameter: float) -> None:
        """A catalogue size near this diameter in m, or a bore where the catalogue has none."""
        rng, lines = self.rng, self.run["pipe"]
        line = rng.choices(("main", "steel-40", "copper X", "own", "bare"), (50, 20, 12, 8, 10))[0]
        if diameter > 0.32 or (line in ("main", "copper X") and diameter > 0.16):
            line = "bare" if diameter > 0.32 else "steel-40"
        if line != "main":
            entry["pipe"] = line
        if line == "bare":
            lines.setdefault(line, {"roughness": rng.choice(("0.03 mm", "0.0012 in", "0.1 mm"))})
            entry["bore"] = self.pen.write(max(diameter, 0.008), "size")
            self.tags.add("bore")
            return
        if line == "own":
            sizes = {f"DN{dn}": f"{round(dn * 1.03, 1)} mm" for dn in OWN_SIZES}
            lines.setdefault(line, {"roughness": "0.007 mm", "sizes": sizes})
            dn = min(OWN_SIZES, key=lambda dn: abs(dn / 1000 - diameter))
            entry["size"] = f"DN{dn}"
            self.tags.add("own pipe")
        else:
            lines.setdefault(line, {"catalogue": PIPES[line]})
            if line == "steel-40" and rng.random() < 0.02:
                lines[line]["roughness"] = "0.1 mm"
            bores = CATALOGUE[PIPES[line]]["bores"]
            nominal = min(bores, key=lambda dn: abs(bores[dn] / 1000 - diameter))
            if line == "copper X":
                entry["size"] = f"{plain(nominal)} mm"
                self.tags.add("copper")
            elif line == "steel-40":
                written = [f"NPS {nps}" for nps, dn in NPS.items() if dn == nominal]
                entry["size"] = rng.choice([*written, f"DN{nominal}"])
            else:
                entry["size"] = f"DN{nominal}"
        fittings = entry.setdefault("fittings", {})
        for kind in ("elbow 90", "elbow 45", "gate valve", "globe valve", "tee straight", "tee branch"):
            if rng.random() < 0.2:
                fittings[kind] = rng.randint(1, 4)
                self.tags.add("fittings by size")

    def duct(self, entry: Entry, diameter: float) -> None:
        """A round, rectangular, flat oval or flexible duct of about this diameter's area."""
        rng, inch = self.rng, self.pen.units == "IP"
        shape = rng.choices(("round", "rectangular", "oval", "flexible"), (35, 40, 15, 10))[0]
        lines = self.run["duct"]
        if shape == "flexible":
            lines.setdefault("flex", {"catalogue": "flexible", "compression": "10 %"})
            entry["duct"] = "flex"
            if rng.random() < 0.5:
                entry["compression"] = f"{rng.randint(0, 30)} %"
        elif rng.random() < 0.1:
            lines.setdefault("lined", {"roughness": "0.9 mm"})
            entry["duct"] = "lined"
        self.tags.add(shape)
        unit = 0.0254 if inch else 0.001
        if shape in ("round", "flexible"):
            sizes = INCHES if inch else ROUNDS
            near = min(sizes, key=lambda side: abs(side * unit - diameter))
            entry["size"] = f"{near} in" if inch else f"{near} mm"
            return
        grid = INCHES if inch else SIDES
        height = min(grid, key=lambda side: abs(side * unit - diameter * rng.uniform(0.5, 0.95)))
        wanted = pi * diameter**2 / 4 / (height * unit) / unit
        allowed = [side for side in grid if side <= 6 * height]
        width = min(allowed, key=lambda side: abs(side - wanted))
        if shape == "oval":
            height = min(height, width)
            if height == width:
                width = min(side for side in grid if side > height) if height < grid[-1] else width
                height = height if width > height else grid[-2]
            entry["size"] = f"oval {width}x{height}"
        else:
            entry["size"] = f"{width}x{height}" + rng.choice(("", " in" if inch else " mm"))

    # -- items and devices --------------------------------------------------------------------------

    def item(self, mass: float, place: str) -> Entry:
        """Something in line; `place` is section, terminal, or where k has nothing to refer to: source."""
        rng, pen, tags = self.rng, self.pen, self.tags
        drop = rng.uniform(10, 80) if pen.gas else rng.uniform(1e3, 1.2e4)
        volume = mass / pen.density
        kinds = ["drop", "drop at", "drop at", "filter"]
        if place != "source":
            kinds += ["k"]
        if place in ("section", "run-out"):
            kinds += ["equivalent_length"]
        if not pen.gas:
            kinds += ["kv", "cv", "tested"]
        kind = rng.choice(kinds)
        tags.add(f"item {kind}")
        entry: Entry = {"name": f"{kind} item"}
        units = rng.choice((1, 1, 1, 1, 2, 3))
        kv = 3600 * volume / units / sqrt(drop / 1e5 * pen.density / 1000)
        if kind == "k":
            entry["k"] = round(rng.uniform(0.2, 6), 3)
        elif kind == "kv":
            entry["kv"] = float(plain(kv, 4))
        elif kind == "cv":
            entry["cv"] = float(plain(1.156 * kv, 4))
        elif kind == "equivalent_length":
            entry["equivalent_length"] = pen.write(rng.uniform(0.5, 8), "length")
        elif kind == "filter":
            entry["clean"] = pen.write(drop, "pressure")
            entry["final"] = pen.write(drop * rng.uniform(1.5, 3), "pressure")
            if rng.random() < 0.6:
                entry["state"] = rng.choice(("mean", "clean", "final"))
        else:
            entry["drop"] = pen.write(drop, "pressure")
        if kind in ("drop at", "tested") or (kind == "filter" and rng.random() < 0.4):
            entry["at"] = pen.write(volume / units * rng.uniform(0.7, 1.4), "flow")
            if rng.random() < 0.4:
                entry["exponent"] = rng.choice((1.75, 1.9, 2.0, 1.0))
                tags.add("exponent")
        if kind == "tested":
            entry["tested_density"] = rng.choice(("1000 kg/m3", "62.4 lb/ft3", "998 kg/m3"))
        if units > 1 and (kind in ("k", "kv", "cv", "equivalent_length") or "at" in entry):
            entry["parallel"] = units
            tags.add("parallel")
        if rng.random() < 0.08:
            entry["heading"] = rng.choice(("plant", "terminal", "distribution", "control"))
            tags.add("heading")
        return entry

    def control(self, mass: float) -> Entry:
        """A control valve or damper."""
        self.tags.add("control item")
        if self.pen.gas:
            return {"name": "Control damper", "k": round(self.rng.uniform(0.3, 4), 2), "control": "damper"}
        kv = 3600 * mass / self.pen.density / sqrt(self.rng.uniform(0.04, 0.2) * self.pen.density / 1000)
        kind = self.rng.choice(("two-port", "three-port"))
        return {"name": f"{kind} valve", "kv": float(plain(kv, 3)), "control": kind}

    def balance(self, mass: float) -> str:
        """A balancing valve or damper for this kg/s, one of a series of sizes."""
        devices, rng = self.run["device"], self.rng
        if self.pen.gas:
            self.tags.add("device k")
            open_k = rng.choice((0.2, 0.35))
            rows = [[0, open_k], [30, 3.0], [45, 12.0], [60, 40.0], [75, 260.0]]
            name = f"VD {open_k}"
            devices.setdefault(name, {"k": rows})
            return name
        volume = 3600 * mass / self.pen.density
        largest = 0.25
        while largest < 4.5 * volume:
            largest *= 2
        series, kind = rng.choice((("DRV", "kv"), ("DRV", "kv"), ("ORV", "cv"), ("LDV", "kv")))
        self.tags |= {f"device {kind}"} | ({"least drop"} if series == "LDV" else set())
        name = f"{series} {plain(largest)}"
        shares = COARSE if series == "LDV" else VALVE
        rows = [[setting, float(plain(largest * share, 4))] for setting, share in shares]
        entry: Entry = {kind: rows}
        if series == "ORV":
            entry["signal_kv"] = float(plain(largest * 1.1, 4))
        if series == "LDV":
            entry["least_drop"] = "3 kPa"
        devices.setdefault(name, entry)
        return name

    def holding(self, what: str) -> str:
        """A device that holds a flow or a differential."""
        devices, rng = self.run["device"], self.rng
        if what == "flow":
            self.tags.add("holds flow")
            gas = self.pen.gas
            number = rng.randint(1, 4)
            name = f"{'VAV' if gas else 'PIV'} {number}"
            least = f"{20 + 10 * number} Pa" if gas else f"{10 + 3 * number} kPa"
            entry: Entry = {"holds": "flow", "least_drop": least}
            if number != 3:
                entry["greatest_drop"] = f"{150 * number} Pa" if gas else f"{25 * number} kPa"
            devices.setdefault(name, entry)
            return name
        self.tags.add("holds differential")
        name = f"DPV {sum('DPV' in other for other in devices) + 1}"
        devices[name] = {"holds": "differential"}
        if rng.random() < 0.8:
            devices[name]["least_drop"] = f"{rng.randint(5, 12)} kPa"
        return name

    # -- the three kinds of table -------------------------------------------------------------------

    def section(self, name: str, entry: Entry) -> None:
        """A section with its flow known; what holds something has been marked already."""
        rng, gas = self.rng, self.pen.gas
        main = "out" if "from" in entry else "back"
        mass = self.net["masses"][(name, main)]
        self.conduit(entry, mass, rng.uniform(0.8, 12 if gas else 18))
        hold = entry.pop("balance", None)
        if hold == "differential":
            near, nested = entry["from"], False
            while near in self.run["section"]:
                outer = self.run["section"][near]
                nested = nested or outer.get("balance", "").startswith(("DPV", "differential"))
                near = outer["from"]
            if nested:
                self.tags.add("nested differentials")
        if hold == "differential" or (hold == "flow" and name not in self.single):
            entry["balance"] = self.holding(hold)
            self.tags.add(f"holds {hold} on a section")
        elif name not in self.single and rng.random() < 0.2:
            entry["balance"] = self.balance(mass)
            self.tags.add("device on a section")
        elif gas and rng.random() < 0.04:
            entry["balance"] = self.holding("flow")
        if rng.random() < 0.2:
            entry.setdefault("item", []).append(self.item(mass, "section"))
            self.tags.add("item on a section")
        if rng.random() < 0.04:
            entry.setdefault("item", []).append(self.control(mass))

    def terminal(self, name: str, entry: Entry) -> None:
        """A terminal with its drop, perhaps a run-out, items and a device."""
        rng, pen = self.rng, self.pen
        mass = self.net["terminals"][name]["mass"]
        closed = self.net["sources"][self.net["terminals"][name]["source"]]["kind"] == "closed"
        run_out = rng.random() < 0.3
        self.own_drop(entry, mass)
        if run_out:
            self.tags.add("run-out")
            self.conduit(entry, mass, rng.uniform(0.5, 6))
            default = self.run["defaults"].get("paired", False)
            if closed and "to" not in entry and not default:
                entry["paired"] = True
            elif closed and "to" in entry:
                if rng.random() < 0.5:
                    entry["paired"] = not default
                self.tags.add("run-out from and to")
        if "load" in entry and rng.random() < 0.3:
            fluid = self.net["sources"][self.net["terminals"][name]["source"]]["fluid"]
            entry["return_temperature"] = pen.temperature(fluid["back"]["temperature"] + rng.uniform(-3, 3))
            self.tags.add("terminal's return temperature")
        chance = rng.random()
        if chance < 0.25:
            entry["balance"] = self.balance(mass)
            self.tags.add("device on a terminal")
        elif chance < 0.37:
            entry["balance"] = self.holding("flow")
        if rng.random() < 0.25:
            on_source = (entry.get("from") or entry["to"]) in self.run["source"] and "neck" not in entry
            place = "run-out" if run_out else "source" if on_source else "terminal"
            entry.setdefault("item", []).append(self.item(mass, place))
            self.tags.add("item on a terminal")
        if rng.random() < 0.25:
            entry.setdefault("item", []).append(self.control(mass))

    def own_drop(self, entry: Entry, mass: float) -> None:
        """Total or static drop of a terminal, at design flow or another."""
        rng, pen = self.rng, self.pen
        volume = mass / pen.density
        drop = rng.uniform(15, 60) if pen.gas else rng.uniform(2e3, 2e4)
        if pen.gas and rng.random() < 0.4:
            self.tags.add("static drop")
            neck = max(0.08, sqrt(4 * volume / 3 / pi))
            if pen.units == "SI" and rng.random() < 0.3:
                side = round(neck * 1000 / 10) * 10
                entry["neck"] = f"{side}x{side}"
            else:
                entry["neck"] = f"{round(neck * 1000)} mm"
            entry["static_drop"] = pen.write(drop + 10, "pressure")
        elif rng.random() < 0.95:
            entry["drop"] = pen.write(drop, "pressure")
        else:
            return
        if rng.random() < 0.3:
            entry["at"] = pen.write(volume * rng.uniform(0.7, 1.3), "flow")
            self.tags.add("terminal drop at a flow")
            if rng.random() < 0.3:
                entry["exponent"] = rng.choice((1.7, 1.9))

    def source(self, name: str, entry: Entry) -> None:
        """Plant items, reserves and the limit of a source."""
        rng, pen = self.rng, self.pen
        source = self.net["sources"][name]
        mass = source["mass"]
        for _ in range(rng.randint(0, 3)):
            item = self.item(mass, "source")
            self.tags.add("item on a source")
            if pen.gas and rng.random() < 0.6:
                item["inside"] = True
                self.tags.add("inside")
            entry.setdefault("item", []).append(item)
        if rng.random() < 0.5:
            entry["reserve"] = pen.fraction(rng.choice((0.05, 0.1, 0.15)))
            self.tags.add("reserve")
        if rng.random() < 0.5:
            entry["flow_reserve"] = pen.fraction(rng.choice((0.03, 0.05, 0.1)))
            self.tags.add("flow reserve")
        if rng.random() < 0.5:
            entry["available"] = pen.write(600.0 if pen.gas else 1.2e5, "pressure")
            self.tags.add("available")
        if rng.random() < 0.4:
            entry["efficiency"] = round(rng.uniform(0.4, 0.75), 2)
            if rng.random() < 0.5:
                entry["motor_efficiency"] = round(rng.uniform(0.8, 0.92), 2)
        if pen.gas and rng.random() < 0.5:
            side = max(0.1, sqrt(mass / pen.density / 8))
            number = round(side / 0.0254) if pen.units == "IP" else round(side * 1000)
            entry["outlet"] = f"{number}x{number}"
            self.tags.add("outlet")
