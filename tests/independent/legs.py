"""One leg of pipe or duct: its bore, its friction, its fittings, and the items and devices in it."""

from itertools import pairwise
from math import exp, log, pi, sqrt
from typing import Any

from fluids.friction import Colebrook

from tests.independent.properties import Properties
from tests.independent.quantities import mass_flow, measure, split

Table = dict[str, Any]
Terms = tuple[str, bool, float]  # SI or IP, whether the fluid is a gas, the density of a head in kg/m3

# Bores in mm by nominal size, as printed in the standards named.
CATALOGUE: dict[str, Table] = {
    "steel EN 10255 medium": {
        "roughness": 0.045e-3,
        "bores": {
            15: 16.1, 20: 21.7, 25: 27.3, 32: 36.0, 40: 41.9, 50: 53.1, 65: 68.9, 80: 80.9, 100: 105.3,
            125: 129.7, 150: 155.1,
        },
    },
    "steel ASME B36.10 schedule 40": {
        "roughness": 0.045e-3,
        "bores": {
            15: 15.76, 20: 20.96, 25: 26.64, 32: 35.08, 40: 40.94, 50: 52.48, 65: 62.68, 80: 77.92, 90: 90.12,
            100: 102.26, 125: 128.2, 150: 154.08, 200: 202.74, 250: 254.46, 300: 303.18,
        },
    },
    "copper EN 1057 table X": {
        "roughness": 0.0015e-3,
        "bores": {
            15: 13.6, 22: 20.2, 28: 26.2, 35: 32.6, 42: 39.6, 54: 51.6, 66.7: 64.3, 76.1: 73.1, 108: 105.0,
            133: 130.0, 159: 155.0,
        },
    },
    "galvanised steel": {"roughness": 0.09e-3},
    "flexible": {"roughness": 0.9e-3},
}  # fmt: skip
NPS = {
    "1/2": 15, "3/4": 20, "1": 25, "1-1/4": 32, "1-1/2": 40, "2": 50, "2-1/2": 65, "3": 80, "3-1/2": 90,
    "4": 100, "5": 125, "6": 150, "8": 200, "10": 250, "12": 300,
}  # fmt: skip

# Loss coefficients by nominal size (Hydraulic Institute), threaded and flanged; None: not tabulated.
THREADED_SIZES = (10, 15, 20, 25, 32, 40, 50, 65, 80, 100)
FLANGED_SIZES = (25, 32, 40, 50, 65, 80, 100, 150, 200, 250, 300)
THREADED: dict[str, tuple[float, ...]] = {
    "elbow 90": (2.5, 2.1, 1.7, 1.5, 1.3, 1.2, 1.0, 0.85, 0.8, 0.7),
    "elbow 45": (0.38, 0.37, 0.35, 0.34, 0.33, 0.32, 0.31, 0.3, 0.29, 0.28),
    "tee straight": (0.9,) * 10,
    "tee branch": (2.7, 2.4, 2.1, 1.8, 1.7, 1.6, 1.4, 1.3, 1.2, 1.1),
    "globe valve": (20.0, 14.0, 10.0, 9.0, 8.5, 8.0, 7.0, 6.5, 6.0, 5.7),
    "gate valve": (0.4, 0.33, 0.28, 0.24, 0.22, 0.19, 0.17, 0.16, 0.14, 0.12),
}
FLANGED: dict[str, tuple[float | None, ...]] = {
    "elbow 90": (0.43, 0.41, 0.4, 0.38, 0.35, 0.34, 0.31, 0.29, 0.27, 0.25, 0.24),
    "elbow 45": (0.22, 0.22, 0.21, 0.2, 0.19, 0.18, 0.18, 0.17, 0.17, 0.16, 0.16),
    "tee straight": (0.26, 0.25, 0.23, 0.2, 0.18, 0.17, 0.15, 0.12, 0.1, 0.09, 0.08),
    "tee branch": (1.0, 0.95, 0.9, 0.84, 0.79, 0.76, 0.7, 0.62, 0.58, 0.53, 0.5),
    "globe valve": (13.0, 12.0, 10.0, 9.0, 8.0, 7.0, 6.5, 6.0, 5.7, 5.7, 5.7),
    "gate valve": (None, None, None, 0.34, 0.27, 0.22, 0.16, 0.1, 0.08, 0.06, 0.05),
}

# f Re of a flat oval by major over minor axis (numerical).
OVAL_LAMINAR = ((1, 64.0), (1.5, 65.274), (2, 68.109), (3, 73.621), (4, 77.648), (6, 82.643), (8, 85.535))


def between(x: float, points: list[tuple[float, float]]) -> float | None:
    """Linear between rising points; None outside them, within 1e-9 of an end inside."""
    points = sorted(points)
    low, high = points[0], points[-1]
    near = 1e-9 * max(abs(low[0]), abs(high[0]), 1e-30)
    if x < low[0] - near or x > high[0] + near:
        return None
    for (xa, ya), (xb, yb) in pairwise(points):
        if x <= xb:
            return ya + (yb - ya) * (x - xa) / (xb - xa)
    return high[1]


def cross_section(size: str, units: str) -> Table:
    """Area, hydraulic diameter and laminar constant C of a duct size; sides without a unit in mm or inch."""
    oval = size.startswith("oval ")
    text = size.removeprefix("oval ").strip()
    first, cross, second = text.partition("x")
    if not cross:
        d = measure(text, "size", units)
        return {"bore": d, "hydraulic_diameter": d, "area": pi * d * d / 4, "laminar": 64.0}
    number, unit = split(second)
    suffix = f" {unit}" if unit else ""
    width, height = (measure(f"{side}{suffix}", "size", units) for side in (float(first), number))
    if oval:
        minor, major = sorted((width, height))
        area = pi * minor**2 / 4 + minor * (major - minor)
        perimeter = pi * minor + 2 * (major - minor)
        laminar = between(major / minor, list(OVAL_LAMINAR))
        if laminar is None:
            raise ValueError(f"{size}: no laminar constant is tabulated for that ratio")
    else:
        area, perimeter, a = width * height, 2 * (width + height), min(width, height) / max(width, height)
        laminar = 96 * (1 - 1.3553 * a + 1.9467 * a**2 - 1.7012 * a**3 + 0.9564 * a**4 - 0.2537 * a**5)
    return {
        "width": width, "height": height, "hydraulic_diameter": 4 * area / perimeter, "area": area,
        "laminar": laminar,
    }  # fmt: skip


def conduit(entry: Table, run: Table, units: str) -> Table:
    """What a section or run-out is made of: its cross-section, roughness, length, factor and fittings' K."""
    defaults = run.get("defaults", {})
    stated = entry if "pipe" in entry or "duct" in entry else defaults
    kind = "pipe" if "pipe" in stated else "duct"
    line = run[kind][stated[kind]]
    listed = CATALOGUE.get(line.get("catalogue", ""), {})
    roughness = measure(line["roughness"], "size", units) if "roughness" in line else listed["roughness"]
    nominal = None
    if "bore" in entry:
        d = measure(entry["bore"], "size", units)
        shape = {"bore": d, "hydraulic_diameter": d, "area": pi * d * d / 4, "laminar": 64.0}
        nominal = 1000 * d
    elif kind == "pipe":
        size = entry["size"]
        nominal = nominal_size(size)
        own = line.get("sizes", {})
        d = measure(own[size], "size", units) if size in own else listed["bores"][nominal] / 1000
        shape = {"bore": d, "hydraulic_diameter": d, "area": pi * d * d / 4, "laminar": 64.0}
    else:
        shape = cross_section(entry["size"], units)
    factor = 1.0
    if line.get("catalogue") == "flexible":
        percent = 100 * measure(entry.get("compression", line.get("compression", 0)), "fraction")
        factor = 1 + 0.58 * percent * exp(-0.00496 * 1000 * shape["hydraulic_diameter"])
    k = 0.0
    for name, count in entry.get("fittings", {}).items():
        fitting = run.get("fitting", {}).get(name)
        k += count * (fitting["k"] if fitting else loss_coefficient(name, nominal))
    length = measure(entry.get("length", 0), "length", units)
    return shape | {"roughness": roughness, "length": length, "factor": factor, "k_total": k}


def nominal_size(size: str) -> float:
    """DN of a size as written: `DN40`, `NPS 1-1/2`; of a metric tube its outside diameter in mm."""
    if size.startswith("DN"):
        return float(size[2:])
    if size.startswith("NPS"):
        return float(NPS[size[3:].strip()])
    return measure(size, "size") * 1000


def loss_coefficient(name: str, nominal: float | None) -> float:
    """K by size: threaded up to DN50, flanged above, on the logarithm of the nominal size."""
    if nominal is None:
        raise ValueError(f"{name} needs a pipe")
    nominal = round(nominal, 6)
    threaded = nominal <= 50
    sizes, column = (THREADED_SIZES, THREADED[name]) if threaded else (FLANGED_SIZES, FLANGED[name])
    points = [(log(size), k) for size, k in zip(sizes, column, strict=True) if k is not None]
    k = between(log(nominal), points)
    if k is None:
        raise ValueError(f"{name} is not tabulated for {nominal} mm")
    return k


def friction_factor(reynolds: float, relative_roughness: float, laminar: float) -> float:
    """Darcy: C/Re below 2300, Colebrook above 4000, a smooth blend of both between."""
    if reynolds < 2300:
        return laminar / reynolds
    turbulent = float(Colebrook(reynolds, relative_roughness, tol=-1))
    if reynolds > 4000:
        return turbulent
    s = (reynolds - 2300) / 1700
    w = s * s * (3 - 2 * s)
    return (1 - w) * laminar / reynolds + w * turbulent


def leg(name: str, mass: float, pipe: Table, fluid: Properties) -> Table:
    """Friction and fittings of one leg at its mass flow and its own fluid."""
    density, d = fluid["density"], pipe["hydraulic_diameter"]
    velocity = mass / density / pipe["area"]
    dynamic = density * velocity**2 / 2
    reynolds = density * velocity * d / fluid["viscosity"]
    regime = "laminar" if reynolds < 2300 else "turbulent" if reynolds > 4000 else "transitional"
    f = friction_factor(reynolds, pipe["roughness"] / d, pipe["laminar"])
    gradient = pipe["factor"] * f / d * dynamic
    return {
        "leg": name,
        "mass_flow": mass,
        "velocity": velocity,
        "velocity_pressure": dynamic,
        "reynolds": reynolds,
        "regime": regime,
        "friction_factor": f,
        "gradient": gradient,
        "friction": gradient * pipe["length"],
        "fittings": pipe["k_total"] * dynamic,
        "junction": 0.0,
        "density": density,
    }


def valve_drop(volume: float, kv: float, density: float) -> float:
    """Pa across a valve: Kv in m3/h at 1 bar and 1000 kg/m3."""
    return 1e5 * (3600 * volume / kv) ** 2 * density / 1000


def item_drop(item: Table, mass: float, place: Table, terms: Terms, key: str = "drop") -> float:
    """Drop of an item in line at its mass flow.

    `place` is the leg that it stands in: its density, and where they are due its velocity pressure and
    gradient. Equal units in parallel share the flow; a drop stated without its flow is the drop of all of
    them at design flow.
    """
    density = place["density"]
    terms = (*terms[:2], density)  # a head is that of the fluid in the leg
    share = mass / item.get("parallel", 1)
    volume = share / density
    if "k" in item:
        return float(item["k"] * place["velocity_pressure"] / item.get("parallel", 1) ** 2)
    if "kv" in item:
        return valve_drop(volume, item["kv"], density)
    if "cv" in item:
        return valve_drop(volume, item["cv"] / 1.156, density)
    if "equivalent_length" in item:
        length = measure(item["equivalent_length"], "length", terms[0])
        return float(place["gradient"] * length / item.get("parallel", 1) ** 2)
    if "clean" in item:
        clean = measure(item["clean"], "pressure", *terms)
        final = measure(item["final"], "pressure", *terms)
        stated = {"mean": (clean + final) / 2, "clean": clean, "final": final}[item.get("state", "mean")]
    else:
        stated = measure(item.get(key, 0), "pressure", *terms)
    if "at" in item:
        stated *= (share / mass_flow(item["at"], density, terms[0], terms[1])) ** item.get("exponent", 2.0)
    if "tested_density" in item:
        stated *= density / measure(item["tested_density"], "density", terms[0])
    return stated


def table_of(device: Table) -> tuple[str, list[tuple[float, float]]] | None:
    """`kv` or `k`, and (setting, coefficient) rows of a device; None where it has no table."""
    if "kv" in device:
        return "kv", [(float(s), float(c)) for s, c in device["kv"]]
    if "cv" in device:
        return "kv", [(float(s), c / 1.156) for s, c in device["cv"]]
    if "k" in device:
        return "k", [(float(s), float(c)) for s, c in device["k"]]
    return None


def base_drop(device: Table, mass: float, place: Table, terms: Terms) -> float:
    """The larger of the drop fully open at design flow and the least drop."""
    terms = (*terms[:2], place["density"])
    least = measure(device["least_drop"], "pressure", *terms) if "least_drop" in device else 0.0
    table = table_of(device)
    if table is None:
        return least
    coefficients = [c for _, c in table[1]]
    if table[0] == "kv":
        return max(least, valve_drop(mass / place["density"], max(coefficients), place["density"]))
    return float(max(least, min(coefficients) * place["velocity_pressure"]))


def device_at(name: str, device: Table, mass: float, place: Table, base: float, take_up: float) -> Table:
    """A device with what it takes up: its coefficient and setting at that drop, and its measuring signal."""
    result: Table = {"name": name, "base": base, "take_up": take_up, "drop": base + take_up}
    result |= {"setting": None, "signal": None}
    table = table_of(device)
    density, volume = place["density"], mass / place["density"]
    if table is not None and "holds" not in device:
        kind, rows = table
        if kind == "kv":
            bars = (base + take_up) / 1e5 / (density / 1000)
            coefficient = 3600 * volume / sqrt(bars)
            signal = device.get("signal_kv")
            result["signal"] = valve_drop(volume, signal, density) if signal else base + take_up
        else:
            coefficient = (base + take_up) / place["velocity_pressure"]
        result[kind] = coefficient
        result["setting"] = setting(rows, coefficient)
    return result


def setting(rows: list[tuple[float, float]], coefficient: float) -> float | None:
    """The setting at which a device has this coefficient, on its logarithm; None outside the table."""
    return between(log(coefficient), [(log(c), s) for s, c in rows])
