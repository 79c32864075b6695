"""Every table and key of a run's file, with what may stand there."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass

from budget.units import Dimension

FORMAT = 1
METHODS = ("by size", "crane", "darby", "hooper")
HEADINGS = ("plant", "distribution", "terminal", "control", "balancing", "static")
CLASSES = ("main", "branch", "run-out")
JUNCTIONS = ("tee-crane", "tee-idelchik")
LEAKAGE = ("ATC 1", "ATC 2", "ATC 3", "ATC 4", "ATC 5", "ATC 6")


@dataclass(frozen=True, slots=True)
class Text:
    """Any text."""


@dataclass(frozen=True, slots=True)
class Choice:
    """One of a few words."""

    words: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Flag:
    """True or false."""


@dataclass(frozen=True, slots=True)
class Number:
    """A plain number within bounds; whole says that it counts something."""

    low: float = -math.inf
    high: float = math.inf
    above: bool = False
    whole: bool = False


@dataclass(frozen=True, slots=True)
class Measure:
    """A quantity of one dimension within bounds, in SI; small lengths are in mm or in where no unit is written."""

    dimension: Dimension
    low: float = -math.inf
    high: float = math.inf
    above: bool = False
    small: bool = False


@dataclass(frozen=True, slots=True)
class Pairs:
    """A list of pairs, such as a pump curve or a setting table."""

    first: Number | Measure
    second: Number | Measure


@dataclass(frozen=True, slots=True)
class Names:
    """A list of IDs."""


@dataclass(frozen=True, slots=True)
class Inline:
    """A table with keys of its own choosing, each of one kind: fittings, accept, share."""

    value: Spec


@dataclass(frozen=True, slots=True)
class Table:
    """A table with known keys."""

    keys: Mapping[str, Spec]


@dataclass(frozen=True, slots=True)
class Array:
    """An array of tables; an open one hands on the keys that it does not know, to be read when the kind is known."""

    keys: Mapping[str, Spec]
    open: bool = False


@dataclass(frozen=True, slots=True)
class Size:
    """A pipe size, duct size or neck: read where the line is known."""


@dataclass(frozen=True, slots=True)
class Change:
    """A change of area: "abrupt", or its included angle."""


Spec = Change | Text | Choice | Flag | Number | Measure | Pairs | Names | Inline | Table | Array | Size

_TEXT = Text()
_FLAG = Flag()
_FACTOR = Number(0.0, 10.0)
_SHARE = Measure(Dimension.FRACTION, 0.0, 1.0)
_LENGTH = Measure(Dimension.LENGTH, 0.0, 1e5)
_BORE = Measure(Dimension.LENGTH, 0.0, 20.0, above=True, small=True)
_ROUGHNESS = Measure(Dimension.LENGTH, 0.0, 0.1, small=True)
_FLOW = Measure(Dimension.FLOW, 0.0, 1e4, above=True)
_PRESSURE = Measure(Dimension.PRESSURE, 0.0, 1e8)
_SIGNED_PRESSURE = Measure(Dimension.PRESSURE, -1e8, 1e8)
_VELOCITY = Measure(Dimension.VELOCITY, 0.0, 200.0, above=True)
_GRADIENT = Measure(Dimension.GRADIENT, 0.0, 1e6, above=True)
_TEMPERATURE = Measure(Dimension.TEMPERATURE, 173.15, 773.15)
_DENSITY = Measure(Dimension.DENSITY, 0.0, 2e4, above=True)
_KV = Number(0.0, 1e6, above=True)
_K = Number(0.0, 1e7)
_RISE = Measure(Dimension.LENGTH, -1e4, 1e4)

_TITLES: dict[str, Spec] = {"title": _TEXT, "note": _TEXT, "location": _TEXT}

ITEM: dict[str, Spec] = {
    "name": _TEXT,
    "k": _K,
    "kv": _KV,
    "cv": _KV,
    "drop": _PRESSURE,
    "at": _FLOW,
    "exponent": Number(0.0, 4.0),
    "equivalent_length": _LENGTH,
    "parallel": Number(1, 1000, whole=True),
    "tested_density": _DENSITY,
    "clean": _PRESSURE,
    "final": _PRESSURE,
    "state": Choice(("mean", "clean", "final")),
    "heading": Choice(HEADINGS),
    "inside": _FLAG,
    "control": Choice(("two-port", "three-port", "damper")),
    "characteristic": Choice(("equal percentage", "linear")),
    "rangeability": Number(1.0, 1e4, above=True),
}

FITTING_USE: dict[str, Spec] = {"kind": _TEXT, "count": Number(1, 10000, whole=True)}
"""Keys of every fitting with parameters; the parameters are those of its kind in the catalogue."""

RUN: dict[str, Spec] = {
    "pipe": _TEXT,
    "duct": _TEXT,
    "size": Size(),
    "bore": _BORE,
    "length": _LENGTH,
    "paired": _FLAG,
    "compression": Measure(Dimension.FRACTION, 0.0, 0.9),
    "fittings": Inline(Number(0, 10000, whole=True)),
    "fitting": Array(FITTING_USE, open=True),
    "fitting_method": Choice(METHODS),
    "takeoff": Choice(("straight", "branch", "none")),
    "junction": Choice(JUNCTIONS),
    "angle": Measure(Dimension.ANGLE, 30.0, 90.0),
    "transition": Change(),
    "class": Choice(CLASSES),
    "limit_velocity": _VELOCITY,
    "limit_gradient": _GRADIENT,
    "diversity": _SHARE,
    "leakage": Choice(LEAKAGE),
    "keep": _FLAG,
}

_JOINED: dict[str, Spec] = {
    "from": _TEXT,
    "to": _TEXT,
    "balance": _TEXT,
    "setting": Number(-1e4, 1e6),
    "accept": Inline(_TEXT),
    "rise": _RISE,
    "item": Array(ITEM),
}

SECTION: dict[str, Spec] = _TITLES | RUN | _JOINED

TERMINAL: dict[str, Spec] = SECTION | {
    "flow": _FLOW,
    "load": Measure(Dimension.POWER, 0.0, 1e9, above=True),
    "return_temperature": _TEMPERATURE,
    "drop": _PRESSURE,
    "at": _FLOW,
    "exponent": Number(0.0, 4.0),
    "static_drop": _SIGNED_PRESSURE,
    "neck": Size(),
    "outlet_pressure": _SIGNED_PRESSURE,
}

SOURCE: dict[str, Spec] = _TITLES | {
    "open": _FLAG,
    "available": _PRESSURE,
    "reserve": _SHARE,
    "flow_reserve": _SHARE,
    "efficiency": Measure(Dimension.FRACTION, 0.0, 1.0, above=True),
    "motor_efficiency": Measure(Dimension.FRACTION, 0.0, 1.0, above=True),
    "curve": Pairs(Measure(Dimension.FLOW, 0.0, 1e4), _PRESSURE),
    "curve_density": _DENSITY,
    "curve_is": Choice(("total", "static")),
    "running": Number(1, 1000, whole=True),
    "controls": Choice(("fixed", "differential")),
    "set_point": _PRESSURE,
    "sensor": _TEXT,
    "temperature": _TEMPERATURE,
    "return_temperature": _TEMPERATURE,
    "outlet": Size(),
    "item": Array(ITEM),
}

LIMIT_CLASS: dict[str, Spec] = {"velocity": _VELOCITY, "gradient": _GRADIENT, "least_velocity": _VELOCITY}

CASE_SOURCE: dict[str, Spec] = {
    "speed": _FACTOR,
    "running": Number(0, 1000, whole=True),
    "set_point": _PRESSURE,
}

SINGLE: dict[str, dict[str, Spec]] = {
    "design": {"title": _TEXT, "number": _TEXT, "revision": _TEXT, "note": _TEXT, "units": Choice(("SI", "IP"))},
    "display": {str(dimension): _TEXT for dimension in Dimension},
    "fluid": {
        "name": Choice(("water", "propylene glycol", "ethylene glycol", "air", "custom")),
        "temperature": _TEMPERATURE,
        "return_temperature": _TEMPERATURE,
        "concentration": Measure(Dimension.FRACTION, 0.0, 1.0),
        "concentration_by": Choice(("mass", "volume")),
        "altitude": Measure(Dimension.LENGTH, -500.0, 9000.0),
        "humidity": _SHARE,
        "density": _DENSITY,
        "viscosity": Measure(Dimension.VISCOSITY, 0.0, 100.0, above=True),
        "specific_heat": Measure(Dimension.SPECIFIC_HEAT, 0.0, 1e5, above=True),
    },
    "defaults": {
        key: RUN[key] for key in ("pipe", "duct", "paired", "takeoff", "junction", "angle", "class", "fitting_method")
    },
    "limits": LIMIT_CLASS
    | {
        "velocity_by_bore": Pairs(_BORE, _VELOCITY),
        "main": Table(LIMIT_CLASS),
        "branch": Table(LIMIT_CLASS),
        "run-out": Table(LIMIT_CLASS),
        "authority": _SHARE,
        "authority_note": _SHARE,
        "tolerance": _SHARE,
    },
    "budget": dict.fromkeys(HEADINGS, _PRESSURE),
    "sizing": {"gradient": _GRADIENT, "height": _BORE, "aspect": Number(1.0, 20.0)},
}
"""Tables that stand once."""

KEYED: dict[str, dict[str, Spec]] = {
    "pipe": {"catalogue": _TEXT, "roughness": _ROUGHNESS, "sizes": Inline(_BORE), "source": _TEXT},
    "duct": {
        "catalogue": _TEXT,
        "roughness": _ROUGHNESS,
        "compression": Measure(Dimension.FRACTION, 0.0, 0.9),
        "source": _TEXT,
    },
    "fitting": {"k": _K, "source": _TEXT, "note": _TEXT},
    "device": {
        "kv": Pairs(Number(), _KV),
        "cv": Pairs(Number(), _KV),
        "k": Pairs(Number(), Number(0.0, 1e7, above=True)),
        "signal_kv": _KV,
        "least_signal": _PRESSURE,
        "least_drop": _PRESSURE,
        "greatest_drop": _PRESSURE,
        "holds": Choice(("flow", "differential")),
        "set_point": _PRESSURE,
        "source": _TEXT,
    },
    "source": SOURCE,
    "section": SECTION,
    "terminal": TERMINAL,
    "link": SECTION,
    "case": {
        "title": _TEXT,
        "note": _TEXT,
        "off": Names(),
        "share": Inline(_SHARE),
        "stroke": Inline(_SHARE),
        "source": Inline(Table(CASE_SOURCE)),
    },
}
"""Tables keyed by ID or name."""

TOP = ("format", "library", *SINGLE, *KEYED)
