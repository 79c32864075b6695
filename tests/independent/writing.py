"""A run as text: quantities in a unit picked at random, tables in TOML, comments here and there."""

import json
import random
from decimal import Decimal
from typing import Any

from tests.independent.quantities import BARE, FACTORS, G

# Units that people use, the first ones mostly; "" is a bare number in the unit of the run.
USUAL: dict[str, dict[str, tuple[str, ...]]] = {
    "SI": {
        "length": ("m", "m", "m", "", "cm"),
        "size": ("mm",),
        "liquid flow": ("L/s", "L/s", "m3/h", "", "L/min", "L/h", "kg/s", "kg/h"),
        "gas flow": ("L/s", "m3/h", "m3/h", "", "m3/s", "kg/s"),
        "liquid pressure": ("kPa", "kPa", "", "mbar", "bar", "mH2O", "m", "Pa"),
        "gas pressure": ("Pa", "Pa", "", "mbar", "mmH2O"),
        "power": ("kW", "kW", "W", ""),
        "density": ("kg/m3",),
        "viscosity": ("mPa s", "cP", "mm2/s"),
    },
    "IP": {
        "length": ("ft", "ft", "", "in", "m"),
        "size": ("in", "mm"),
        "liquid flow": ("gpm", "gpm", "", "L/s", "lb/h"),
        "gas flow": ("cfm", "cfm", "", "L/s", "lb/h"),
        "liquid pressure": ("ftH2O", "", "psi", "ft", "kPa"),
        "gas pressure": ("inH2O", "", "inH2O", "Pa"),
        "power": ("MBH", "Btu/h", "", "TR", "hp"),
        "density": ("lb/ft3", "kg/m3"),
        "viscosity": ("cP", "mPa s", "cSt"),
    },
}


class Pen:
    """Writes quantities of one run; `density` turns heads and mass flows."""

    def __init__(self, rng: random.Random, units: str, gas: bool, density: float) -> None:
        self.rng, self.units, self.gas, self.density = rng, units, gas, density
        self.used: set[str] = set()

    def write(self, value: float, kind: str, unit: str | None = None) -> str | float:
        """A quantity given in SI base units, as text or as a bare number."""
        full = f"{'gas' if self.gas else 'liquid'} {kind}" if kind in ("flow", "pressure") else kind
        if unit is None:
            unit = self.rng.choice(USUAL[self.units][full])
        bare = unit == ""
        if bare:
            unit = BARE[kind][(2 if self.gas else 0) + (self.units == "IP")]
        if unit in ("m", "ft") and kind == "pressure":
            factor = FACTORS["length"][unit] * self.density * G
            self.used.add("head")
        elif unit in FACTORS["mass flow"] and kind == "flow":
            factor = FACTORS["mass flow"][unit] / self.density
            self.used.add("mass flow")
        elif unit in FACTORS["kinematic viscosity"] and kind == "viscosity":
            factor = FACTORS["kinematic viscosity"][unit] * self.density
        else:
            factor = FACTORS[kind][unit]
        number = plain(value / factor)
        if bare:
            self.used.add("bare number")
            return float(number)
        return number + self.rng.choice((" ", " ", "")) + unit

    def temperature(self, celsius: float) -> str | float:
        """A temperature given in degC."""
        unit = self.rng.choice(("degC", "", "K") if self.units == "SI" else ("degF", "", "degC"))
        if unit == "K":
            return f"{plain(celsius + 273.15, 6)} K"
        fahrenheit = unit == "degF" or (unit == "" and self.units == "IP")
        number = plain(celsius * 1.8 + 32 if fahrenheit else celsius)
        return f"{number} {unit}" if unit else float(number)

    def fraction(self, value: float) -> str | float:
        """A fraction, mostly in per cent."""
        return f"{plain(100 * value, 3)} %" if self.rng.random() < 0.7 else round(value, 3)


def plain(value: float, digits: int = 5) -> str:
    """A number to so many figures, never with an exponent."""
    text = format(Decimal(f"{value:.{digits}g}"), "f")
    return text.rstrip("0").rstrip(".") if "." in text else text


def key(name: str) -> str:
    """A TOML key, quoted where it must be."""
    bare = name.isascii() and name.replace("-", "").replace("_", "").isalnum()
    return name if bare else json.dumps(name, ensure_ascii=False)


def literal(value: Any) -> str:
    """A TOML value on one line."""
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, dict):
        return "{ " + ", ".join(f"{key(name)} = {literal(part)}" for name, part in value.items()) + " }"
    if isinstance(value, list):
        return "[" + ", ".join(literal(part) for part in value) + "]"
    return json.dumps(value, ensure_ascii=False)


REMARKS = ("as drawn", "checked on site", "to be confirmed", "maker's figure", "see sketch 3")


def table(path: list[str], entry: dict[str, Any], rng: random.Random) -> list[str]:
    """The lines of one table and its arrays of tables, with a remark here and there."""
    lines = ["", "[" + ".".join(key(part) for part in path) + "]"]
    for name, value in entry.items():
        if name != "item":
            remark = f"  # {rng.choice(REMARKS)}" if rng.random() < 0.04 else ""
            lines.append(f"{key(name)} = {literal(value)}{remark}")
    for item in entry.get("item", []):
        lines += ["", "[[" + ".".join(key(part) for part in [*path, "item"]) + "]]"]
        lines += [f"{key(name)} = {literal(value)}" for name, value in item.items()]
    return lines


def document(run: dict[str, Any], heading: str, rng: random.Random) -> str:
    """The whole run; terminals stand after all sections, or each after the section it hangs on."""
    lines = [f"# {heading}", "format = 1"]
    for name, entry in run.items():
        if name in ("section", "terminal"):
            continue
        if name in ("pipe", "duct", "fitting", "device", "source"):
            for one, inner in entry.items():
                lines += table([name, one], inner, rng)
        else:
            lines += table([name], entry, rng)
    waiting = dict(run["terminal"])
    mixed = rng.random() < 0.5
    for one, inner in run["section"].items():
        lines += table(["section", one], inner, rng)
        if mixed:
            # only where the file order of terminals stays as it is
            while waiting:
                first = next(iter(waiting))
                if (waiting[first].get("from") or waiting[first]["to"]) != one:
                    break
                lines += table(["terminal", first], waiting.pop(first), rng)
    for one, inner in waiting.items():
        lines += table(["terminal", one], inner, rng)
    return "\n".join(lines) + "\n"
