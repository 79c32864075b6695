"""Fluids that a description can name, with the source and the range of each correlation."""

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from typing import Any

from budget.catalogue.loader import load
from budget.physics.fluids import AIR_RANGE, GLYCOL_RANGES, WATER_RANGE, Validity


@dataclass(frozen=True, slots=True)
class Property:
    """How one property of a fluid is computed."""

    name: str
    correlation: str
    source: str
    known_from: str
    verified: str


@dataclass(frozen=True, slots=True)
class Fluid:
    """A fluid: "liquid", "gas" or "as stated", its properties, and its ranges by basis of concentration."""

    name: str
    kind: str
    properties: tuple[Property, ...]
    ranges: Mapping[str, Validity]


def fluid(name: str) -> Fluid | None:
    """The fluid of that name, or None; case and runs of spaces do not matter."""
    return _fluids().get(" ".join(name.lower().split()))


def fluid_names() -> tuple[str, ...]:
    """Names of all fluids, in catalogue order."""
    return tuple(_fluids())


@cache
def _fluids() -> Mapping[str, Fluid]:
    ranges: dict[str, dict[str, Validity]] = {
        "water": {"": WATER_RANGE},
        "air": {"": AIR_RANGE},
        "propylene glycol": {basis: v for (kind, basis), v in GLYCOL_RANGES.items() if kind == "propylene"},
        "ethylene glycol": {basis: v for (kind, basis), v in GLYCOL_RANGES.items() if kind == "ethylene"},
    }
    return {row["name"]: _build(row, ranges.get(row["name"], {})) for row in load("fluids")["fluid"]}


def _build(row: Mapping[str, Any], ranges: Mapping[str, Validity]) -> Fluid:
    properties = tuple(Property(*cells) for cells in row["properties"])
    return Fluid(row["name"], row["kind"], properties, ranges)
