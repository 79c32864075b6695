"""Quantities as people write them, turned into SI base units by a plain table."""

from typing import Any

G = 9.80665  # m/s2, standard gravity
FOOT = 0.3048
POUND = 0.45359237
WATER_INCH = 25.4 * G  # conventional inch of water, 1000 kg/m3
US_GALLON = 3.785411784e-3
BTU = 1055.05585262  # international table

FACTORS: dict[str, dict[str, float]] = {
    "length": {"m": 1.0, "mm": 1e-3, "cm": 1e-2, "ft": FOOT, "in": FOOT / 12},
    "flow": {
        "m3/s": 1.0, "m3/h": 1 / 3600, "L/s": 1e-3, "L/min": 1e-3 / 60, "L/h": 1e-3 / 3600,
        "gpm": US_GALLON / 60, "cfm": FOOT**3 / 60,
    },
    "mass flow": {"kg/s": 1.0, "kg/h": 1 / 3600, "lb/h": POUND / 3600},
    "pressure": {
        "Pa": 1.0, "kPa": 1e3, "mbar": 100.0, "bar": 1e5, "psi": POUND * G / (FOOT / 12) ** 2,
        "inH2O": WATER_INCH, "ftH2O": 12 * WATER_INCH, "mmH2O": G, "mH2O": 1000 * G,
    },
    "power": {
        "W": 1.0, "kW": 1e3, "MW": 1e6, "hp": 550 * POUND * G * FOOT,
        "Btu/h": BTU / 3600, "MBH": 1000 * BTU / 3600, "TR": 12000 * BTU / 3600,
    },
    "density": {"kg/m3": 1.0, "lb/ft3": POUND / FOOT**3},
    "viscosity": {"Pa s": 1.0, "mPa s": 1e-3, "cP": 1e-3},
    "kinematic viscosity": {"m2/s": 1.0, "mm2/s": 1e-6, "cSt": 1e-6},
    "specific heat": {"J/(kg K)": 1.0, "kJ/(kg K)": 1e3, "Btu/(lb degF)": 4186.8},
    "fraction": {"": 1.0, "%": 0.01},
}  # fmt: skip
FACTORS["size"] = FACTORS["length"]

# the unit of a bare number: (SI, IP), and where it differs (gas in SI, gas in IP)
BARE: dict[str, tuple[str, str, str, str]] = {
    "length": ("m", "ft", "m", "ft"),
    "size": ("mm", "in", "mm", "in"),
    "flow": ("L/s", "gpm", "L/s", "cfm"),
    "pressure": ("kPa", "ftH2O", "Pa", "inH2O"),
    "power": ("kW", "MBH", "kW", "MBH"),
    "temperature": ("degC", "degF", "degC", "degF"),
    "density": ("kg/m3", "lb/ft3", "kg/m3", "lb/ft3"),
    "viscosity": ("mPa s", "cP", "mPa s", "cP"),
    "specific heat": ("kJ/(kg K)", "Btu/(lb degF)", "kJ/(kg K)", "Btu/(lb degF)"),
    "fraction": ("", "", "", ""),
}


def split(value: Any) -> tuple[float, str | None]:
    """A number and its unit; the unit is None for a bare number."""
    if not isinstance(value, str):
        return float(value), None
    text = value.strip()
    for end in range(len(text), 0, -1):
        try:
            number = float(text[:end])
        except ValueError:
            continue
        unit = text[end:].strip().replace("³", "3").replace("²", "2").replace("^", "").replace("°", "deg")
        return number, {"l/s": "L/s", "l/h": "L/h", "l/min": "L/min"}.get(unit, unit) or None
    raise ValueError(f"no number in {value!r}")


def measure(value: Any, kind: str, units: str = "SI", gas: bool = False, density: float | None = None) -> float:
    """A quantity in SI base units (a temperature in degC); `density` is that of a head in m or ft."""
    number, unit = split(value)
    if unit is None:
        unit = BARE[kind][(2 if gas else 0) + (1 if units == "IP" else 0)]
    if kind == "temperature":
        return {"degC": number, "degF": (number - 32) / 1.8, "K": number - 273.15}[unit]
    if kind == "pressure" and unit in ("m", "ft"):
        if density is None:
            raise ValueError(f"{value!r} is a head, and no fluid is known here")
        return number * FACTORS["length"][unit] * density * G
    if kind == "viscosity" and unit in FACTORS["kinematic viscosity"]:
        if density is None:
            raise ValueError(f"{value!r} is kinematic, and no density is known here")
        return number * FACTORS["kinematic viscosity"][unit] * density
    return number * FACTORS[kind][unit]


def mass_flow(value: Any, density: float, units: str, gas: bool) -> float:
    """kg/s of a flow stated by volume (at this density) or by mass."""
    number, unit = split(value)
    if unit in FACTORS["mass flow"]:
        return number * FACTORS["mass flow"][unit]
    return measure(value, "flow", units, gas) * density
